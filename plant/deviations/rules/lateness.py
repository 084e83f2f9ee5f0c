"""What is due and has not come. "Expected" means a stated round line; without any, levels or weights and totalisers of
what is in service, once per operating day.
"""

from __future__ import annotations

import calendar
import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

WEEKDAYS = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")


@dataclass(frozen=True)
class Slot:
    """A span of time [start, end) in which one value is due."""

    start: dt.datetime
    end: dt.datetime
    label: str = "day"


def slots(
    due: str | Sequence[str],
    day: dt.date,
    *,
    start: dt.datetime,
    end: dt.datetime,
    shifts: Sequence[tuple[str, dt.datetime]] = (),
    start_of: dict[dt.date, dt.datetime] | None = None,
) -> list[Slot]:
    """The slots that end with this operating day: each shift; the day; the week at its Sunday; the month at its last
    day; the named weekdays. ``shifts`` are (name, start) within the day; ``start_of`` gives the instant at which an
    earlier operating day started, for weeks and months.
    """
    if due == "shift" and shifts:
        ordered = sorted(shifts, key=lambda item: item[1])
        ends = [at for _, at in ordered[1:]] + [end]
        return [Slot(at, until, name) for (name, at), until in zip(ordered, ends, strict=True)]
    if due in ("day", "shift"):
        return [Slot(start, end)]
    if due == "week":
        first = day - dt.timedelta(days=6)
        return [Slot((start_of or {}).get(first, start), end, "week")] if day.weekday() == 6 else []
    if due == "month":
        last = calendar.monthrange(day.year, day.month)[1]
        first = day.replace(day=1)
        return [Slot((start_of or {}).get(first, start), end, "month")] if day.day == last else []
    if isinstance(due, str):
        raise ValueError(f"due is shift, day, week, month or a list of weekdays, not {due!r}")
    return [Slot(start, end)] if WEEKDAYS[day.weekday()] in due else []


def missing(due: Sequence[Slot], taken: Sequence[dt.datetime], *, hours: float, until: dt.datetime) -> list[Slot]:
    """Slots that ended more than ``hours`` before ``until`` and in which nothing was taken.

    With ``hours`` 0 a slot counts as missing once it has ended. A value taken up to ``hours`` after the end of its slot
    and before the next one is late, not missing, when nothing else stands for it.
    """
    grace = dt.timedelta(hours=hours)
    out = []
    for slot in due:
        if slot.end + grace > until:
            continue
        if not any(slot.start <= at < slot.end for at in taken):
            out.append(slot)
    return out
