"""What was due in the month, and what of it is there: the counts that stand beside every statistic."""

from __future__ import annotations

import bisect
import datetime as dt
from dataclasses import dataclass, field

from plant.deviations.rules import lateness
from plant.readings.queries import Point
from plant.reports.month import Month
from plant.works import described


@dataclass
class Due:
    """One line of the round over the month: slots due, slots filled, slots empty, and reasons given for not taking."""

    site: str
    parameter: str
    slots: int = 0
    filled: int = 0
    empty: list[tuple[dt.date, str]] = field(default_factory=list)
    reasons: dict[tuple[dt.date, str], str] = field(default_factory=dict)

    @property
    def missing(self) -> int:
        return self.slots - self.filled


def lines(month: Month) -> list[Due]:
    """Each line of the round with its slots up to now; sites that were not in service were not due.

    With no round lines at all: levels or weights and totalisers of what is in service, once per operating day.
    """
    out: dict[tuple[str, str], Due] = {}
    for day in month.days:
        start, end = month.calendar.bounds(day)
        if end > month.now:
            break
        stated = month.stated.round_lines(start) or _standing_lines(month, start)
        shifts = _shift_starts(month, day, start, end)
        for line in stated:
            if not _in_service(month, line.site, start, end):
                continue
            due = out.setdefault((line.site, line.parameter), Due(line.site, line.parameter))
            taken = month.series.get((line.site, line.parameter), [])
            for slot in lateness.slots(line.due, day, start=start, end=end, shifts=shifts, start_of=_starts(month)):
                _fill(due, slot, day, taken)
    return list(out.values())


def _fill(due: Due, slot: lateness.Slot, day: dt.date, taken: list[Point]) -> None:
    due.slots += 1
    first = bisect.bisect_left(taken, slot.start, key=lambda point: point.at)
    last = bisect.bisect_left(taken, slot.end, key=lambda point: point.at)
    within = taken[first:last]
    if any(point.state != "not_taken" for point in within):
        due.filled += 1
        return
    place = (day, slot.label)
    due.empty.append(place)
    reasons = [point.note or "reason not stated" for point in within]
    if reasons:
        due.reasons[place] = "; ".join(dict.fromkeys(reasons))


def _starts(month: Month) -> dict[dt.date, dt.datetime]:
    return {day: month.calendar.start_of(day) for day in month.days}


def _shift_starts(month: Month, day: dt.date, start: dt.datetime, end: dt.datetime) -> list[tuple[str, dt.datetime]]:
    """Each shift of the pattern with the instant at which it starts within this operating day."""
    found = []
    for shift in month.stated.shifts(start):
        for date in (day, day + dt.timedelta(days=1)):
            at = dt.datetime.combine(date, shift.starts, month.calendar.zone).astimezone(dt.UTC)
            if start <= at < end:
                found.append((shift.name, at))
                break
    return found


def _in_service(month: Month, site: str, start: dt.datetime, end: dt.datetime) -> bool:
    """Whether the works and the site were in service for any of the day's start, middle and end."""
    kind = month.stated.site_kind(site, start)
    moments = (start, start + (end - start) / 2, end - dt.timedelta(seconds=1))
    if all(month.stated.state("works", month.book.code, at) == "off" for at in moments):
        return False
    if kind not in ("vessel", "dosing_point"):
        return True
    return any(month.stated.state(kind, site, at) == "in_service" for at in moments)


def _standing_lines(month: Month, at: dt.datetime) -> tuple[described.RoundLine, ...]:
    found = [(vessel.code, "weight" if vessel.on_scale else "level") for vessel in month.stated.vessels(at)]
    found += [(meter.code, "totaliser") for meter in month.stated.meters(at)]
    return tuple(described.RoundLine(f"{site}:{parameter}", site, parameter, "day") for site, parameter in found)
