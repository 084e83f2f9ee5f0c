"""Reads of orders, deliveries and transfers."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable

from django.db.models import Q

from plant.ledger.models import Book
from plant.stock import models

_REF = re.compile(r"([0-9]{1,15})\.([0-9]{1,8})")


def delivery(book: Book, ref: str) -> models.Delivery | None:
    """The delivery called ``seq.line``, reversed or not."""
    named = _REF.fullmatch(ref)
    if named is None:
        return None
    rows = models.Delivery.objects.filter(book=book, seq=int(named[1]), line=int(named[2]))
    return rows.select_related("entry__recorded_by").first()


def transfer(book: Book, ref: str) -> models.Transfer | None:
    """The transfer called ``seq.line``, reversed or not."""
    named = _REF.fullmatch(ref)
    if named is None:
        return None
    rows = models.Transfer.objects.filter(book=book, seq=int(named[1]), line=int(named[2]))
    return rows.select_related("entry__recorded_by").first()


def deliveries(
    book: Book,
    *,
    start: dt.datetime,
    end: dt.datetime,
    vessels: Iterable[str] | None = None,
    known: int | None = None,
) -> list[models.Delivery]:
    """Deliveries with start <= taken_at < end, by time, as known at a seq (None: now)."""
    rows = models.Delivery.objects.filter(book=book, taken_at__gte=start, taken_at__lt=end)
    if vessels is not None:
        rows = rows.filter(vessel__in=list(vessels))
    return list(rows.as_known(known).select_related("entry").order_by("taken_at", "seq", "line"))


def transfers(
    book: Book,
    *,
    start: dt.datetime,
    end: dt.datetime,
    vessels: Iterable[str] | None = None,
    known: int | None = None,
) -> list[models.Transfer]:
    """Transfers out of or into the vessels, start <= taken_at < end, by time."""
    rows = models.Transfer.objects.filter(book=book, taken_at__gte=start, taken_at__lt=end)
    if vessels is not None:
        named = list(vessels)
        rows = rows.filter(Q(from_vessel__in=named) | Q(to_vessel__in=named))
    return list(rows.as_known(known).select_related("entry").order_by("taken_at", "seq", "line"))


def orders(book: Book, *, known: int | None = None) -> list[models.Order]:
    """Orders that are neither delivered nor cancelled, the first expected first."""
    rows = models.Order.objects.filter(book=book).as_known(known)
    return list(rows.select_related("entry__recorded_by").order_by("expected_on", "seq", "line"))


def order(book: Book, ref: str) -> models.Order | None:
    """The open order called ``seq.line``."""
    return next((one for one in orders(book) if one.ref == ref), None)
