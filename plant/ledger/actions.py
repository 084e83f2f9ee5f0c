"""The one way to write into a book."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import transaction
from django.db.models import ForeignKey

from plant.ledger import canonical, models


class ContentDiffers(ValueError):
    """An entry of this client id is in the book already, with other content."""


class EarlierThanBook(ValueError):
    """The moment given lies before the book's last entry; recorded times never run backwards."""


class CrossesWorks(ValueError):
    """A row refers to a row of another works."""


@dataclass(frozen=True)
class Appended:
    """What came of an append. ``created`` is False when the same entry was there already."""

    entry: models.Entry
    rows: tuple[models.Row, ...]
    created: bool


def open_book(*, code: str, now: dt.datetime) -> models.Book:
    """A new, empty book."""
    return models.Book.objects.create(code=code, opened_at=now)


def append(
    *,
    book: models.Book,
    client_id: str,
    kind: str,
    received: Any,
    rows: Sequence[models.Row],
    by: Any,
    now: dt.datetime,
    device: str = "",
    attested: str = "session",
    noted: Any = None,
) -> Appended:
    """Appends one entry with its rows while the book's head is held; all of it or nothing.

    ``received`` is what came in, kept as it came; ``rows`` are unsaved Records and Statements in their order.
    ``noted`` is what the server observed of this one sending (a tablet's clock); it makes no repeat another content.
    Sending the same client id with the same ``received`` again returns the entry of the first time.
    Raises ContentDiffers, CrossesWorks. A clock slightly behind the book (another node's) is lifted to the head's time.
    """
    content_hash = canonical.digest([kind, received])
    with transaction.atomic():
        # On SQLite the transaction itself is the lock (IMMEDIATE); on PostgreSQL the row is.
        head = models.Book.objects.select_for_update().get(pk=book.pk)
        known = models.Entry.objects.filter(book=head, client_id=client_id).first()
        if known is not None:
            if known.content_hash != content_hash:
                raise ContentDiffers(f"entry {client_id} is in the book already, with other content")
            return Appended(known, (), False)
        seq = head.head_seq + 1
        at = now if head.head_at is None else max(now, head.head_at)
        entry = models.Entry(
            book=head,
            seq=seq,
            client_id=client_id,
            recorded_at=at,
            recorded_by=by,
            device=device,
            attested=attested,
            kind=kind,
            content_hash=content_hash,
            previous_hash=head.head_hash,
        )
        for line, row in enumerate(rows, start=1):
            row.book, row.seq, row.line = head, seq, line
        for row in rows:
            _same_works(row, head)
        payload = {"received": received, "rows": [row.facts() for row in rows]}
        entry.payload = canonical.text(payload if noted is None else payload | {"noted": noted})
        entry.hash = entry.chained()
        entry.save()
        _create(entry, rows)
        models.Book.objects.filter(pk=head.pk).update(head_seq=seq, head_hash=entry.hash, head_at=at)
        book.head_seq, book.head_hash, book.head_at = seq, entry.hash, at
    return Appended(entry, tuple(rows), True)


def _same_works(row: models.Row, head: models.Book) -> None:
    for field in row._meta.concrete_fields:
        if isinstance(field, ForeignKey) and field.name not in ("book", "entry") and field.is_cached(row):
            other = getattr(row, field.name)
            if getattr(other, "book_id", head.pk) != head.pk:
                raise CrossesWorks(f"{row._meta.label}.{field.name} refers to another works")


def _create(entry: models.Entry, rows: Sequence[models.Row]) -> None:
    """Saves rows model by model, in the order in which the models first appear, so that a row may name an earlier one."""
    by_model: dict[type[models.Row], list[models.Row]] = {}
    for row in rows:
        row.entry = entry
        by_model.setdefault(type(row), []).append(row)
    for model, batch in by_model.items():
        model._base_manager.bulk_create(batch, batch_size=500)


def refuse_earlier(book: models.Book, now: dt.datetime) -> None:
    """For moments given by hand: raises EarlierThanBook when ``now`` lies before the book's last entry."""
    book.refresh_from_db()
    if book.head_at is not None and now < book.head_at:
        raise EarlierThanBook(f"{now.isoformat()} is earlier than the book's last entry, {book.head_at.isoformat()}")
