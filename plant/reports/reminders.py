"""Which report is due: shown on the board to whoever prepares or certifies, from the end of the month until it is issued."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

from django.http import HttpRequest

from plant import clock
from plant.reports import actions, queries
from plant.reports.models import Report
from plant.works import access


@dataclass(frozen=True)
class Due:
    """The report of the last month, while it is not issued. ``level`` turns to action once the day has passed."""

    month: str
    words: str
    level: str


def due(at: access.At) -> Due | None:
    """None where nothing is due, no due day is stated, or this person neither prepares nor certifies."""
    if not (at.member.may(actions.PREPARED) or at.member.may(actions.CERTIFIED)):
        return None
    day = (at.stated.value("report", "form", at.now) or {}).get("due_day")
    if day is None:
        return None
    calendar = at.stated.calendar(at.now)
    today = calendar.day_of(at.now)
    month_end = today.replace(day=1) - dt.timedelta(days=1)
    month = f"{month_end:%Y-%m}"
    if Report.objects.filter(book=at.book, month=month).exists() or not _has_readings(at, calendar, month_end):
        return None
    return _in_words(
        month, month_end, today.replace(day=int(day)), today, prepared=queries.preparation(at.book, month) is not None
    )


def _has_readings(at: access.At, calendar: clock.Calendar, month_end: dt.date) -> bool:
    start, end = calendar.span(month_end.replace(day=1), month_end)
    return queries.Reading.objects.filter(book=at.book, taken_at__gte=start, taken_at__lt=end).exists()


def _in_words(month: str, month_end: dt.date, on: dt.date, today: dt.date, *, prepared: bool) -> Due:
    days = (on - today).days
    waits = "waits to be certified" if prepared else "is not prepared yet"
    name = f"The report of {month_end:%B %Y} {waits}"
    if days < 0:
        return Due(month, f"{name}; it was due on {on.day} {on:%B}, {-days} day{'s' if days < -1 else ''} ago.", "action")
    left = "today" if days == 0 else f"on {on.day} {on:%B}, {days} day{'s' if days > 1 else ''} from now"
    return Due(month, f"{name}; it is due {left}.", "alert")


def for_pages(request: HttpRequest) -> dict[str, Any]:
    """A context processor: nothing is asked of the database until a page of a works wants to know."""

    def report_due() -> Due | None:
        at = getattr(request, "at", None)
        return due(at) if at is not None and request.user.is_authenticated else None

    return {"report_due": report_due}
