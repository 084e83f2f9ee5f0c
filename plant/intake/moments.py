"""When something happened, from what was typed: an ISO 8601 instant, a local time, or a date alone."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from plant import clock

EXPECTED = "ISO 8601 such as 2026-03-01T07:00, 2026-03-01T07:00+01:00 or 2026-03-01"
REFUSE = "refuse"
_EARLIEST = dt.date(1900, 1, 2)
_LATEST = dt.date(2199, 12, 31)


class NotATime(ValueError):
    """No time can be read from it; ``expected`` says what would do."""

    def __init__(self, expected: str) -> None:
        super().__init__(expected)
        self.expected = expected


@dataclass(frozen=True)
class Moment:
    """An instant in UTC; for a date alone, the local noon it is ordered by."""

    at: dt.datetime
    date_only: bool = False


def read(typed: str, calendar: clock.Calendar, *, ambiguous: str = REFUSE) -> Moment:
    """The moment a text names; without an offset it is the works' local time. Raises NotATime.

    A local time that the clocks skipped or passed twice is not guessed; ``ambiguous`` (first, second) decides the latter.
    """
    text = typed.strip()
    try:
        if len(text) == 10:
            date = dt.date.fromisoformat(text)
            _within(date)
            return Moment(calendar.noon(date), date_only=True)
        found = dt.datetime.fromisoformat(text)
    except ValueError:
        raise NotATime(EXPECTED) from None
    _within(found.date())
    if found.tzinfo is not None:
        return Moment(found.astimezone(dt.UTC))
    try:
        return Moment(calendar.instant(found, ambiguous=ambiguous))
    except clock.LocalTimeError as problem:
        raise NotATime(f"a time the clocks showed once: {problem}") from None


def _within(date: dt.date) -> None:
    if not _EARLIEST <= date <= _LATEST:
        raise NotATime(f"a date between {_EARLIEST} and {_LATEST}")
