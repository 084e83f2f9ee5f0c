"""Mail about deviations: looked for every minute, each sent by a job of its own.

The row of a notice is made once for a deviation and a name. Until a mail server has taken it the row stays unsent, and is asked
for again at every look: a dead server delays mail and loses none. Entry never waits for any of this.
"""

from __future__ import annotations

import datetime as dt
from typing import Any

from django.conf import settings
from django.core.mail import EmailMessage

from plant import clock
from plant.deviations import queries as deviations
from plant.deviations.queries import DeviationView
from plant.jobs import actions as jobs
from plant.jobs.models import Job
from plant.ledger.models import Book
from plant.notices import calls, queries
from plant.notices.models import Notice
from plant.works import queries as works
from plant.works.stated import NotStated, Stated

SEND = "send_notice"
GIVEN_UP_AFTER = dt.timedelta(days=3)
"""Mail that could not be sent for so long says nothing new any more."""
GOVERNS = "The local regulator's rules govern."


def look(*, now: dt.datetime) -> None:
    """Makes the notices that are due at every works, and asks for those that are not sent."""
    if not settings.WEIRBOOK_MAIL:
        return
    for book in Book.objects.exclude(head_seq=0):
        stated = works.stated(book)
        try:
            calendar = stated.calendar(now)
        except NotStated:
            continue
        listed = [one for one in queries.listed(stated, now) if one.email]
        if listed:
            _make(book, listed, calendar, now)
    for notice in Notice.objects.filter(sent_at=None, made_at__gte=now - GIVEN_UP_AFTER).select_related("book"):
        busy = Job.objects.filter(kind=SEND, key=str(notice.pk), state__in=[Job.State.QUEUED, Job.State.RUNNING])
        if not busy.exists():
            jobs.enqueue(kind=SEND, key=str(notice.pk), now=now, book=notice.book, arguments={"notice": notice.pk})


def _make(book: Book, listed: list[calls.Call], calendar: clock.Calendar, now: dt.datetime) -> None:
    local = calendar.local(now)
    open_ones = deviations.open_ones(book)
    rows = [
        Notice(book=book, about=view.ref, call=one.code, address=one.email, made_at=now)
        for view in open_ones
        if queries.waits(view)
        for one in calls.turns(listed, view.level, now - view.raised_at, local.time())[0]
    ]
    today = calendar.day_of(now)
    if open_ones and now - calendar.start_of(today) < dt.timedelta(hours=1):
        rows += [
            Notice(book=book, about=f"digest {today}", call=one.code, address=one.email, made_at=now)
            for one in listed
            if one.digest
        ]
    Notice.objects.bulk_create(rows, ignore_conflicts=True)


def send(*, now: dt.datetime, notice: int, **later_version: Any) -> None:
    """The job. What has been taken on or has ended meanwhile is written as such: the mail says how it stands now."""
    found = Notice.objects.select_related("book").get(pk=notice)
    if found.sent_at is not None:
        return
    stated = works.stated(found.book)
    subject, body = _written(found, stated, now)
    EmailMessage(subject, body, to=[found.address]).send()
    Notice.objects.filter(pk=found.pk).update(sent_at=now)


def _written(found: Notice, stated: Stated, now: dt.datetime) -> tuple[str, str]:
    calendar, name = stated.calendar(now), stated.works(now).name
    if found.about.startswith("digest "):
        open_ones = deviations.open_ones(found.book)
        lines = [_line(view, calendar) for view in open_ones] or ["Nothing is open any more."]
        return f"{name}: {len(open_ones)} open", _body(found.book.code, lines)
    view = deviations.one(found.book, found.about)
    if view is None:
        raise LookupError(f"there is no deviation {found.about}")
    lines = [_line(view, calendar), f"State: {view.state.replace('_', ' ')}."]
    said = queries.words(stated, calendar, view, now)
    place = f"/w/{found.book.code}/deviations/{view.ref}/"
    return f"{name}: {view.level}, {view.subject} {view.parameter}".strip(), _body(found.book.code, [*lines, said, place])


def _line(view: DeviationView, calendar: clock.Calendar) -> str:
    what = " ".join(part for part in (view.subject, view.parameter) if part)
    since = f"{calendar.local(view.since):%Y-%m-%d %H:%M}"
    return f"{view.level.upper()} {what} since {since}: {view.sentence or view.value} (limit {view.limit})"


def _body(code: str, lines: list[str]) -> str:
    said = "\n".join(line for line in lines if line)
    return f"{said}\n\nSent by Weirbook for {code}. The board says how it stands now. {GOVERNS}\n"
