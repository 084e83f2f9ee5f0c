"""Days kept ahead of the first who asks: each night, and after an upgrade that reckons anew.

Nothing depends on it: what is missing is reckoned when it is asked for. It only spares the first reader the wait.
"""

from __future__ import annotations

import datetime as dt
from typing import Any

from plant import clock
from plant.dosing import comparison, states
from plant.jobs import actions as jobs
from plant.jobs import queries as job_queries
from plant.jobs import running
from plant.ledger import queries as books
from plant.ledger.models import Book
from plant.works import queries as works
from plant.works.stated import NotStated

KEEP = "keep_days"
DAYS = 430
"""As far back as the forecast looks."""
AT_ONCE = 31


def ask(*, now: dt.datetime) -> None:
    """A row for every works, once a day and once for each way of reckoning."""
    for book in Book.objects.exclude(head_seq=0):
        try:
            today = works.stated(book).calendar(now).day_of(now)
        except NotStated:
            continue
        key = f"{book.pk} {today} {states.CODE_VERSION}"
        if not job_queries.asked_for(KEEP, key):
            jobs.enqueue(kind=KEEP, key=key, now=now, book=book, arguments={"book": book.code})


def keep(*, now: dt.datetime, book: str, **later_version: Any) -> None:
    """The job: the days up to yesterday, newest month first, so that what is looked at most is there first."""
    found = books.book(book)
    stated = works.stated(found)
    last = stated.calendar(now).day_of(now) - dt.timedelta(days=1)
    for back in range(0, DAYS, AT_ONCE):
        end = last - dt.timedelta(days=back)
        days = clock.days(end - dt.timedelta(days=AT_ONCE - 1), end)
        running.tell(f"{back} of {DAYS} days")
        comparison.comparison(found, days[0], days[-1], stated=stated)
