"""Which shift is on, which was on before it, and what each of them owes."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from plant import clock
from plant.deviations.rules import lateness
from plant.works.described import RoundLine
from plant.works.stated import Stated

_DAY = dt.timedelta(days=1)


@dataclass(frozen=True)
class Span:
    """One shift: its name ("day" where the works has none), the operating day it belongs to, and [start, end)."""

    name: str
    day: dt.date
    start: dt.datetime
    end: dt.datetime


def spans(stated: Stated, calendar: clock.Calendar, day: dt.date) -> list[Span]:
    """The shifts of an operating day, in order. Before the first starts, the night before is still on."""
    start, end = calendar.bounds(day)
    starts = sorted((_starts(calendar, day, shift.starts), shift.name) for shift in stated.shifts(start))
    if not starts:
        return [Span("day", day, start, end)]
    if starts[0][0] > start:
        starts.insert(0, (start, starts[-1][1]))
    ends = [at for at, _ in starts[1:]] + [end]
    return [Span(name, day, at, until) for (at, name), until in zip(starts, ends, strict=True)]


def on_duty(stated: Stated, calendar: clock.Calendar, now: dt.datetime) -> tuple[Span, Span]:
    """The shift that is on, and the one before it."""
    today = calendar.day_of(now)
    around = [span for day in (today - _DAY, today) for span in spans(stated, calendar, day)]
    index = next(place for place, span in enumerate(around) if span.start <= now < span.end)
    return around[index], around[index - 1]


def ahead(stated: Stated, calendar: clock.Calendar, now: dt.datetime, hours: int = 72) -> list[Span]:
    """The shift that is on and those of the coming hours: what a tablet without a network goes by."""
    today = calendar.day_of(now)
    until = now + dt.timedelta(hours=hours)
    found = [span for step in range(hours // 24 + 2) for span in spans(stated, calendar, today + step * _DAY)]
    return [span for span in found if span.end > now and span.start < until]


def expected(stated: Stated, at: dt.datetime) -> list[RoundLine]:
    """The round in walking order, of what is in service; with none stated, each level or weight and totaliser once a day."""
    if stated.state("works", stated.works(at).code, at) == "off":
        return []
    lines = list(stated.round_lines(at)) or [
        *(RoundLine(f"{meter.code}:totaliser", meter.code, "totaliser", "day") for meter in stated.meters(at)),
        *(
            RoundLine(f"{vessel.code}:{reading}", vessel.code, reading, "day")
            for vessel in stated.vessels(at)
            for reading in (("weight",) if vessel.on_scale else ("level",))
        ),
    ]
    return [line for line in lines if _in_service(stated, line, at)]


def slots(stated: Stated, calendar: clock.Calendar, line: RoundLine, day: dt.date) -> list[lateness.Slot]:
    """When a line is due with an operating day."""
    start, end = calendar.bounds(day)
    shifts = [(span.name, span.start) for span in spans(stated, calendar, day)]
    earlier = {day - dt.timedelta(days=n): calendar.start_of(day - dt.timedelta(days=n)) for n in range(31)}
    return lateness.slots(line.due, day, start=start, end=end, shifts=shifts, start_of=earlier)


def due_now(stated: Stated, calendar: clock.Calendar, lines: Iterable[RoundLine], now: dt.datetime) -> dict[str, lateness.Slot]:
    """The lines that are due in the shift that is on, by their code, each with the span it is due in."""
    today = calendar.day_of(now)
    out = {}
    for line in lines:
        slot = next((slot for slot in slots(stated, calendar, line, today) if slot.start <= now < slot.end), None)
        if slot is not None:
            out[line.code] = slot
    return out


def left_open(
    stated: Stated,
    calendar: clock.Calendar,
    lines: Iterable[RoundLine],
    taken: Mapping[tuple[str, str], Sequence[dt.datetime]],
    before: Span,
) -> list[RoundLine]:
    """What was due by the end of the last shift and has not come."""
    out = []
    for line in lines:
        ended = [slot for slot in slots(stated, calendar, line, before.day) if before.start < slot.end <= before.end]
        if lateness.missing(ended, taken.get((line.site, line.parameter), ()), hours=0, until=before.end):
            out.append(line)
    return out


def _starts(calendar: clock.Calendar, day: dt.date, at: dt.time) -> dt.datetime:
    date = day if at >= calendar.day_starts else day + _DAY
    return dt.datetime.combine(date, at, calendar.zone).astimezone(dt.UTC)


def _in_service(stated: Stated, line: RoundLine, at: dt.datetime) -> bool:
    kind = stated.site_kind(line.site, at)
    return kind not in ("vessel", "dosing_point") or stated.state(kind, line.site, at) == "in_service"
