"""Everything observed comes into the book through here: one use case, one Entry; safe first, judged after.

First transaction: the entry, its rows, and the note that their days are to be judged. Second: the judging. A rule that
fails can't make the server refuse a fact; its note stays for the next sweep.
"""

from __future__ import annotations

import datetime as dt
import threading
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

from django.db import transaction

from plant.intake import judging
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry, Row
from plant.works import queries as works

MOST_DAYS_AT_ONCE = 5
"""More days than this are left to the worker, so that nothing slow runs inside a request."""

PATIENCE_S = 0.5
"""How long an entry waits for its turn to be judged at once. Where many come together the worker judges the rest, so that no
sender waits for the days of all the others."""

_one_at_a_time = threading.Lock()


@dataclass(frozen=True)
class Taken:
    """What came of it. ``findings`` are the deviations newly raised; ``judged`` is False while that is still to come."""

    entry: Entry
    created: bool
    findings: tuple[Any, ...] = ()
    judged: bool = True
    rows: tuple[Row, ...] = ()
    days: tuple[dt.date, ...] = ()


def take(
    *,
    book: Book,
    client_id: str,
    kind: str,
    received: Any,
    rows: Sequence[Row],
    by: Any,
    now: dt.datetime,
    device: str = "",
    attested: str = "session",
    noted: Any = None,
    judge: bool = True,
) -> Taken:
    """Appends rows as one entry and judges the days they touch.

    Sending the same again (client id and ``received``) is recognised and adds nothing. With ``judge`` False only the note
    is left; a caller with many entries (a file) judges once at the end. Raises ledger.ContentDiffers.
    """
    with transaction.atomic():
        appended = ledger.append(
            book=book,
            client_id=client_id,
            kind=kind,
            received=received,
            rows=rows,
            by=by,
            now=now,
            device=device,
            attested=attested,
            noted=noted,
        )
        key = note_key(appended.entry)
        days: list[dt.date] = []
        if appended.created:
            calendar = works.stated(book).calendar(now)
            days = judging.touched(rows, calendar, now)
            judging.note(book=book, key=key, days=days, now=now)
    if not appended.created:
        return Taken(appended.entry, created=False)
    taken = Taken(appended.entry, True, (), not days, appended.rows, tuple(days))
    return judge_taken(book=book, taken=taken, by=by) if judge else taken


def judge_taken(*, book: Book, taken: Taken, by: Any) -> Taken:
    """The second half for a caller that took with ``judge`` False: judges the days of a new entry, if they are few."""
    if not taken.created or not taken.days or len(taken.days) > MOST_DAYS_AT_ONCE:
        return taken
    if not _one_at_a_time.acquire(timeout=PATIENCE_S):
        return taken
    now = taken.entry.recorded_at
    try:
        findings, judged = judging.at_once(book=book, key=note_key(taken.entry), days=taken.days, by=by, now=now)
    finally:
        _one_at_a_time.release()
    return replace(taken, findings=tuple(findings), judged=judged)


def known(book: Book, client_id: str) -> bool:
    """Whether an entry of this id is in the book already."""
    return Entry.objects.filter(book=book, client_id=client_id).exists()


def note_key(entry: Entry) -> str:
    """What the waiting judgement of an entry is called."""
    return f"{entry.book_id} entry {entry.seq}"
