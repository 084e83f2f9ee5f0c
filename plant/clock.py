"""What time it is, and which operating day and shift an instant belongs to.

This is the only module that reads the clock. Everything else is handed ``now``. An operating day starts at a stated
local hour and bears the date of its start; days of 23 and 25 hours exist and are never papered over.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from zoneinfo import ZoneInfo

BEGINNING = dt.datetime(1900, 1, 1, tzinfo=dt.UTC)
"""What holds "from the beginning" is in force from here."""


class LocalTimeError(ValueError):
    """A local time that does not exist, or that happened twice."""


def now() -> dt.datetime:
    """The present moment, UTC."""
    return dt.datetime.now(dt.UTC)


@dataclass(frozen=True)
class Shift:
    """One shift of the pattern: its name and the local time it starts."""

    name: str
    starts: dt.time


@dataclass(frozen=True)
class Calendar:
    """The works' own reckoning of days: its zone, and the local time at which the operating day starts."""

    zone: ZoneInfo
    day_starts: dt.time = dt.time(0, 0)

    def local(self, moment: dt.datetime) -> dt.datetime:
        """The moment on the works' wall clock."""
        return moment.astimezone(self.zone)

    def start_of(self, day: dt.date) -> dt.datetime:
        """The first instant of an operating day, UTC. A start that the clock skips falls to the instant of the change."""
        return dt.datetime.combine(day, self.day_starts, self.zone).astimezone(dt.UTC)

    def bounds(self, day: dt.date) -> tuple[dt.datetime, dt.datetime]:
        """The half-open span [start, end) of an operating day, UTC."""
        return self.start_of(day), self.start_of(day + dt.timedelta(days=1))

    def span(self, first: dt.date, last: dt.date) -> tuple[dt.datetime, dt.datetime]:
        """The half-open span from the first operating day to the end of the last, UTC."""
        return self.start_of(first), self.start_of(last + dt.timedelta(days=1))

    def day_of(self, moment: dt.datetime) -> dt.date:
        """The operating day an instant belongs to."""
        day = self.local(moment).date()
        return day if moment >= self.start_of(day) else day - dt.timedelta(days=1)

    def hours_in(self, day: dt.date) -> float:
        """Elapsed hours of an operating day: 23, 24 or 25."""
        start, end = self.bounds(day)
        return (end - start).total_seconds() / 3600

    def instant(self, naive: dt.datetime, *, ambiguous: str = "refuse") -> dt.datetime:
        """The UTC instant of a local wall-clock time.

        ``ambiguous`` says what to do with a time that happened twice: ``refuse``, ``first`` or ``second``.
        Raises LocalTimeError for a time that the clock skipped, and for a doubled one under ``refuse``.
        """
        first = naive.replace(tzinfo=self.zone, fold=0)
        second = naive.replace(tzinfo=self.zone, fold=1)
        if first.astimezone(dt.UTC).astimezone(self.zone).replace(tzinfo=None) != naive:
            raise LocalTimeError(f"{naive:%Y-%m-%d %H:%M} does not exist: the clocks went forward")
        if first.utcoffset() != second.utcoffset():
            if ambiguous == "refuse":
                raise LocalTimeError(f"{naive:%Y-%m-%d %H:%M} happened twice: the clocks went back; give the offset")
            return (second if ambiguous == "second" else first).astimezone(dt.UTC)
        return first.astimezone(dt.UTC)

    def noon(self, date: dt.date) -> dt.datetime:
        """What a date without a time is ordered by: noon, local."""
        return dt.datetime.combine(date, dt.time(12), self.zone).astimezone(dt.UTC)


def shift_at(moment: dt.datetime, calendar: Calendar, shifts: tuple[Shift, ...]) -> Shift | None:
    """The shift on duty at an instant: the one that started last, across midnight too."""
    if not shifts:
        return None
    ordered = sorted(shifts, key=lambda shift: shift.starts)
    clock = calendar.local(moment).time()
    started = [shift for shift in ordered if shift.starts <= clock]
    return started[-1] if started else ordered[-1]


def days(first: dt.date, last: dt.date) -> list[dt.date]:
    """All dates from first to last, both included."""
    return [first + dt.timedelta(days=n) for n in range((last - first).days + 1)]


def month_days(year: int, month: int) -> tuple[dt.date, dt.date]:
    """First and last date of a calendar month; operating days bear these dates."""
    first = dt.date(year, month, 1)
    following = dt.date(year + month // 12, month % 12 + 1, 1)
    return first, following - dt.timedelta(days=1)
