"""Reads of the book that more than one room needs."""

from __future__ import annotations

import datetime as dt

from plant.ledger import models


class NoSuchBook(LookupError):
    """No works of this code."""


def book(code: str) -> models.Book:
    """The book of a works. Raises NoSuchBook."""
    found = models.Book.objects.filter(code=code).first()
    if found is None:
        raise NoSuchBook(f"there is no works with the code {code!r}")
    return found


def seq_known_at(book: models.Book, moment: dt.datetime | None) -> int | None:
    """The seq up to which the book was known at a moment; None for "now" stays None. 0 means nothing was known."""
    if moment is None:
        return None
    last = models.Entry.objects.filter(book=book, recorded_at__lte=moment).order_by("-seq").values_list("seq", flat=True)
    return last.first() or 0
