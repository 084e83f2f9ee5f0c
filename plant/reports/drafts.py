"""Drafts made by a worker: each night of a month that is over and not issued, and when somebody asks for one.

The row of the draft is replaced whole, so a worker that dies leaves the draft before it; asking twice makes one.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

from plant import clock
from plant.jobs import actions as jobs
from plant.jobs import queries as job_queries
from plant.jobs import running
from plant.jobs.models import Job
from plant.ledger import queries as books
from plant.ledger.models import Book
from plant.reports import changes, content, queries
from plant.reports.models import Draft
from plant.reports.month import NoSuchMonth, gather
from plant.works import queries as works
from plant.works.stated import NotStated

KIND = "report_draft"
NIGHT_AFTER = dt.timedelta(hours=4)
"""After the end of an operating day: the nightly review of that day has been asked for by then."""
FOR_DAYS = 45
"""A month that nobody has issued so long after its end gets no draft of its own accord any more."""


def ask(*, book: Book, month: str, now: dt.datetime) -> None:
    """Asks for a draft of a month as it is known when a worker gets to it."""
    jobs.enqueue(kind=KIND, key=f"{book.pk} {month}", now=now, book=book, arguments={"book": book.code, "month": month})


def ask_night(*, now: dt.datetime) -> None:
    """Asks for the last month's draft, once a night, where the month is not issued and something is newer than its draft."""
    for book in Book.objects.exclude(head_seq=0):
        try:
            calendar = works.stated(book).calendar(now)
        except NotStated:
            continue
        last = _last_month(calendar, now)
        if last is not None and queries.latest(book, last) is None and not _fresh(book, last, calendar):
            ask(book=book, month=last, now=now)


def _last_month(calendar: clock.Calendar, now: dt.datetime) -> str | None:
    """The month that ended last, once the night after its end has come; None when that is too long ago."""
    day = calendar.day_of(now - NIGHT_AFTER)
    end = day.replace(day=1) - dt.timedelta(days=1)
    return f"{end:%Y-%m}" if (day - end).days <= FOR_DAYS else None


def _fresh(book: Book, month: str, calendar: clock.Calendar) -> bool:
    kept = of(book, month)
    return kept is not None and not _since(kept, calendar)


def _since(kept: Draft, calendar: clock.Calendar) -> int:
    start, end = calendar.span(*clock.month_days(int(kept.month[:4]), int(kept.month[5:])))
    return len(changes.since(kept.book, start, end, after=kept.known_seq))


def make(*, now: dt.datetime, book: str, month: str, **later_version: Any) -> None:
    """The job. A month of which nothing can be reported has no draft."""
    found = books.book(book)
    try:
        gathered = gather(found, int(month[:4]), int(month[5:]), now=now)
    except NoSuchMonth:
        return
    kept = of(found, month)
    if kept is not None and kept.known_seq == gathered.known:
        return
    keys = content.chosen(gathered)
    sections = []
    for number, key in enumerate(keys, start=1):
        running.tell(f"section {number} of {len(keys)}")
        sections.append(content.SECTIONS[key](gathered))
    running.tell("printing")
    made = content.whole(gathered, sections, revision=0, issued_at=now, signed=content.NOBODY, draft=True)
    Draft.objects.update_or_create(
        book=found, month=month, defaults={"known_seq": gathered.known, "made_at": now, "pdf": content.render(made)}
    )


def of(book: Book, month: str) -> Draft | None:
    """The newest draft of a month that a worker has made."""
    return Draft.objects.filter(book=book, month=month).first()


@dataclass(frozen=True)
class State:
    """What the page says of the draft: the one that is kept, how much has come since, and the job that makes the next."""

    kept: Draft | None
    since: int
    job: job_queries.JobView | None
    working: bool


def state(book: Book, month: str, *, calendar: clock.Calendar, now: dt.datetime) -> State:
    """The draft of a month and whoever works on it."""
    kept = of(book, month)
    newest = Job.objects.filter(kind=KIND, key=f"{book.pk} {month}").order_by("-pk").first()
    working = newest is not None and newest.state in (Job.State.QUEUED, Job.State.RUNNING)
    failed = newest is not None and newest.state == Job.State.FAILED
    view = job_queries.view(newest, now) if newest is not None and (working or failed) else None
    return State(kept, _since(kept, calendar) if kept else 0, view, working)
