"""After a fact is safe, its days are judged. Whatever goes wrong here leaves the fact, and the note that it waits."""

from __future__ import annotations

import datetime as dt
import logging
from collections.abc import Iterable, Sequence
from typing import Any

from plant import clock
from plant.deviations import actions as deviations
from plant.jobs import actions as jobs
from plant.ledger import queries as books
from plant.ledger.models import Book, Row

logger = logging.getLogger(__name__)

JOB = "judge"
MOST_DAYS = 31
_HEAD_START = dt.timedelta(minutes=1)
"""The request that wrote the entry judges it itself; the worker only steps in when that has not come to an end."""


def touched(rows: Iterable[Row], calendar: clock.Calendar, now: dt.datetime) -> list[dt.date]:
    """The operating days whose figures rows may change: their own, and those that share a boundary with them."""
    own = {calendar.day_of(at) for row in rows for at in _moments(row)}
    today = calendar.day_of(now)
    day = dt.timedelta(days=1)
    beside = {other for one in own for other in (one - day, one + day) if other <= today}
    return sorted(own | beside)


def _moments(row: Row) -> list[dt.datetime]:
    taken_at = getattr(row, "taken_at", None)
    reading = getattr(row, "reading", None)
    found = [taken_at] if taken_at is not None else []
    if reading is not None:
        found.append(reading.taken_at)
    replaced = getattr(row, "supersedes", None)
    if replaced is not None and getattr(replaced, "taken_at", None) is not None:
        found.append(replaced.taken_at)
    return found


def note(*, book: Book, key: str, days: Sequence[dt.date], now: dt.datetime) -> None:
    """Notes, in the transaction that writes the entry, that its days are to be judged; at most a month of days a note."""
    for name, some in zip(_names(key, days), _months(days), strict=True):
        jobs.enqueue(
            kind=JOB,
            key=name,
            now=now,
            book=book,
            run_after=now + _HEAD_START,
            arguments={"book": book.code, "days": [day.isoformat() for day in some]},
        )


def _months(days: Sequence[dt.date]) -> list[Sequence[dt.date]]:
    return [days[first : first + MOST_DAYS] for first in range(0, len(days), MOST_DAYS)]


def _names(key: str, days: Sequence[dt.date]) -> list[str]:
    return [f"{key}, {place + 1}" if place else key for place in range(len(_months(days)))]


def at_once(*, book: Book, key: str, days: Sequence[dt.date], by: Any, now: dt.datetime) -> tuple[list[Any], bool]:
    """Judges the days now: what was newly found, and whether it came to an end. A failure leaves the note."""
    if not days:
        return [], True
    try:
        found = deviations.judge(book=book, days=list(days), now=now, by=by)
    except Exception:  # no rule may make the server refuse an observation
        logger.exception("judging failed; the note stays", extra={"book": book.code, "key": key})
        return [], False
    if key:
        settle(key, days, now=now)
    return list(found), True


def settle(key: str, days: Sequence[dt.date], *, now: dt.datetime) -> None:
    """What the notes of an entry asked for has been done."""
    for name in _names(key, days):
        jobs.settle(kind=JOB, key=name, now=now)


def run(*, now: dt.datetime, book: str, days: Sequence[str], **extra: Any) -> None:
    """The job: judges what was noted. Twice changes nothing."""
    deviations.judge(book=books.book(book), days=[dt.date.fromisoformat(day) for day in days], now=now, by=None)
