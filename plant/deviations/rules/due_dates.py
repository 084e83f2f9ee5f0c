"""When a report or a telling is due."""

from __future__ import annotations

import datetime as dt


def monthly_report(year: int, month: int, day: int = 10) -> dt.date:
    """Ten days after the end of the month (40 CFR 141.75(b), 141.570); the day is a setting."""
    return dt.date(year + month // 12, month % 12 + 1, day)


def next_business_day(date: dt.date, holidays: frozenset[dt.date] = frozenset()) -> dt.date:
    """The next Monday-to-Friday that is no holiday (40 CFR 141.75(b)(3)(iii): "end of the next business day")."""
    out = date + dt.timedelta(days=1)
    while out.weekday() >= 5 or out in holidays:
        out += dt.timedelta(days=1)
    return out
