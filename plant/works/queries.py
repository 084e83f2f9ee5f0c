"""Reads of the statements."""

from __future__ import annotations

from collections import OrderedDict

from plant.ledger.models import Book
from plant.works import models
from plant.works.stated import Saying, Stated

_kept: OrderedDict[tuple[int, str], Stated] = OrderedDict()
_KEEP = 64


def stated(book: Book, *, known: int | None = None) -> Stated:
    """All that is stated of a works, as known at a seq (None: now).

    Kept in memory by the hash of the last entry with a statement: it binds all before it, so what is kept
    never goes stale.
    """
    rows = models.Statement.objects.filter(book=book)
    if known is not None:
        rows = rows.filter(seq__lte=known)
    last = rows.order_by("-seq", "-line").values_list("entry__hash").first()
    key = (book.pk, last[0] if last else "")
    if key in _kept:
        _kept.move_to_end(key)
        return _kept[key]
    found = Stated(
        [
            Saying(
                row.kind,
                row.subject,
                row.effective_from,
                row.value,
                row.withdrawn,
                row.seq,
                row.line,
                row.reason,
            )
            for row in rows.iterator(chunk_size=1000)
        ]
    )
    _kept[key] = found
    while len(_kept) > _KEEP:
        _kept.popitem(last=False)
    return found


def exists(code: str) -> bool:
    """Whether there is a works of this code."""
    return Book.objects.filter(code=code).exists()


def forget() -> None:
    """Drops what is kept in memory; tests call it when a database is thrown away under the program."""
    _kept.clear()
