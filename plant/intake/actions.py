"""Everything observed comes into the book through here: one use case, one Entry; safe first, judged after.

First transaction: the entry, its rows, and the note that their days are to be judged. Second: the judging. A rule that
fails can't make the server refuse a fact; its note stays for the next sweep.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.intake import judging
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry, Row
from plant.works import queries as works

MOST_DAYS_AT_ONCE = 5
"""More days than this are left to the worker, so that nothing slow runs inside a request."""


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
        )
        key = note_key(appended.entry)
        days: list[dt.date] = []
        if appended.created:
            calendar = works.stated(book).calendar(now)
            days = judging.touched(rows, calendar, now)
            judging.note(book=book, key=key, days=days, now=now)
    if not appended.created:
        return Taken(appended.entry, created=False)
    if not judge or len(days) > MOST_DAYS_AT_ONCE:
        return Taken(appended.entry, True, (), not days, appended.rows, tuple(days))
    findings, judged = judging.at_once(book=book, key=key, days=days, by=by, now=appended.entry.recorded_at)
    return Taken(appended.entry, True, tuple(findings), judged, appended.rows, tuple(days))


def note_key(entry: Entry) -> str:
    """What the waiting judgement of an entry is called."""
    return f"{entry.book_id} entry {entry.seq}"
