"""What was due and has not come: the last finished shift's lines and yesterday's, by the stated round."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass

from plant import clock
from plant.deviations.rules import lateness
from plant.readings.queries import Point
from plant.works.described import RoundLine
from plant.works.stated import Stated

LOOK_BACK = dt.timedelta(hours=24)


@dataclass(frozen=True)
class Missing:
    """One value that is not there: its line, and the span it was due in."""

    site: str
    parameter: str
    slot: lateness.Slot


def missing(stated: Stated, points: Iterable[Point], now: dt.datetime) -> list[Missing]:
    """Round lines whose span ended within the last 24 hours without a reading, in walking order.

    ``points`` are the readings of the last two operating days; a value marked "not taken" counts as an answer. Lines at
    vessels and dosing points that are not in service, and all of them while the works is off, are not expected.
    """
    calendar = stated.calendar(now)
    if stated.state("works", stated.works(now).code, now) == "off":
        return []
    taken: dict[tuple[str, str], list[dt.datetime]] = {}
    for point in points:
        taken.setdefault((point.site, point.parameter), []).append(point.at)
    today = calendar.day_of(now)
    out = []
    for line in stated.round_lines(now):
        if not _in_service(stated, line, now):
            continue
        for day in (today - dt.timedelta(days=1), today):
            due = [slot for slot in _slots(stated, calendar, line, day) if slot.end > now - LOOK_BACK]
            there = taken.get((line.site, line.parameter), [])
            out += [Missing(line.site, line.parameter, slot) for slot in lateness.missing(due, there, hours=0, until=now)]
    return out


def _slots(stated: Stated, calendar: clock.Calendar, line: RoundLine, day: dt.date) -> list[lateness.Slot]:
    start, end = calendar.bounds(day)
    shifts = [(shift.name, _starts(calendar, day, shift.starts)) for shift in stated.shifts(start)]
    return lateness.slots(
        line.due,
        day,
        start=start,
        end=end,
        shifts=shifts,
        start_of={day - dt.timedelta(days=n): calendar.start_of(day - dt.timedelta(days=n)) for n in range(31)},
    )


def _starts(calendar: clock.Calendar, day: dt.date, at: dt.time) -> dt.datetime:
    """When a shift of an operating day starts: on the day's own date, or after midnight on the next."""
    date = day if at >= calendar.day_starts else day + dt.timedelta(days=1)
    return dt.datetime.combine(date, at, calendar.zone).astimezone(dt.UTC)


def _in_service(stated: Stated, line: RoundLine, now: dt.datetime) -> bool:
    kind = stated.site_kind(line.site, now)
    return kind not in ("vessel", "dosing_point") or stated.state(kind, line.site, now) == "in_service"
