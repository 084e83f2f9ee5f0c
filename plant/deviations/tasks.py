"""Judging that nobody asks for: every few minutes what time alone makes true, and each night yesterday and whatever late
entries touched.
"""

from __future__ import annotations

import datetime as dt
from typing import Any

from plant.deviations import actions
from plant.jobs import actions as jobs
from plant.jobs.models import Job
from plant.ledger import queries as books
from plant.ledger.models import Book
from plant.readings.models import Reading, Settlement
from plant.stock.models import Delivery, Transfer
from plant.works import queries as works
from plant.works.stated import NotStated

CLOCK = "judge_clock"
NIGHT = "judge_night"
NIGHT_AFTER = dt.timedelta(hours=3)
"""How long after the end of an operating day the nightly review comes: the last shift has entered its round by then."""
MOST_DAYS = 62


def ask_clock(*, now: dt.datetime) -> None:
    """A row for every works."""
    for book in Book.objects.exclude(head_seq=0):
        jobs.enqueue(kind=CLOCK, key=f"{book.pk}", now=now, book=book, arguments={"book": book.code})


def by_the_clock(*, now: dt.datetime, book: str, **extra: Any) -> None:
    """Today, and yesterday while something of it may still be late."""
    found = books.book(book)
    try:
        calendar = works.stated(found).calendar(now)
    except NotStated:
        return
    actions.judge(book=found, days=[calendar.day_of(now)], now=now)


def ask_night(*, now: dt.datetime) -> None:
    """A row for every works whose operating day ended long enough ago and that has not been reviewed since."""
    for book in Book.objects.exclude(head_seq=0):
        try:
            calendar = works.stated(book).calendar(now)
        except NotStated:
            continue
        yesterday = calendar.day_of(now - NIGHT_AFTER) - dt.timedelta(days=1)
        key = f"{book.pk} {yesterday.isoformat()}"
        if not Job.objects.filter(kind=NIGHT, key=key).exists():
            jobs.enqueue(kind=NIGHT, key=key, now=now, book=book, arguments={"book": book.code, "day": yesterday.isoformat()})


def by_night(*, now: dt.datetime, book: str, day: str, **extra: Any) -> None:
    """Yesterday, and the days that entries of the last day and a half touched."""
    found = books.book(book)
    yesterday = dt.date.fromisoformat(day)
    days = {yesterday, *touched_since(found, now - dt.timedelta(hours=36), now)}
    actions.judge(book=found, days=sorted(days)[-MOST_DAYS:], now=now)


def touched_since(book: Book, since: dt.datetime, now: dt.datetime) -> set[dt.date]:
    """Operating days of what was recorded since a moment, and of what it replaced."""
    calendar = works.stated(book).calendar(now)
    first = book_seq_after(book, since)
    if first is None:
        return set()
    times: set[dt.datetime] = set()
    for model in (Reading, Delivery, Transfer):
        rows = model._base_manager.filter(book=book, seq__gte=first)
        for own, replaced in rows.values_list("taken_at", "supersedes__taken_at"):
            times.update(at for at in (own, replaced) if at is not None)
    times.update(Settlement.objects.filter(book=book, seq__gte=first).values_list("reading__taken_at", flat=True))
    return {calendar.day_of(at) for at in times if at < now}


def book_seq_after(book: Book, since: dt.datetime) -> int | None:
    """The first seq recorded at or after a moment; None for none."""
    last = books.seq_known_at(book, since) or 0
    return last + 1 if book.head_seq > last else None
