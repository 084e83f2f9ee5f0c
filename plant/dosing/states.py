"""DayState: what a day came to, kept until something touches it.

What is kept is checked when it is asked for: whatever was entered since, and touches a time, drops the days from there
on. So no writer need know that anything is kept, and what is kept can't be stale. Questions about past knowledge never
come here.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import asdict
from typing import Any

from django.db import transaction
from django.db.models import Min

from plant import clock
from plant.dosing.contents import Contents
from plant.dosing.figures import DayDose, Figure
from plant.dosing.models import DayState
from plant.dosing.reckoning import REACH
from plant.ledger.models import Book
from plant.readings.models import Reading, Settlement
from plant.stock.models import Delivery, Transfer
from plant.works.models import Statement

CODE_VERSION = 2
"""Raised with every change that alters a figure; rows of another version are thrown away."""
MARKER = ("", dt.date(1900, 1, 1))


def refresh(book: Book) -> int:
    """Drops the days that entries since the last look have touched. Returns the seq up to which what remains is true."""
    head = Book.objects.values_list("head_seq", flat=True).get(pk=book.pk)
    current = DayState.objects.filter(book=book, subject=MARKER[0], day=MARKER[1], through_seq=head, code_version=CODE_VERSION)
    if current.exists():
        return int(head)
    with transaction.atomic():
        head = Book.objects.select_for_update().values_list("head_seq", flat=True).get(pk=book.pk)
        marker, _ = DayState.objects.get_or_create(
            book=book,
            subject=MARKER[0],
            day=MARKER[1],
            defaults={"through_seq": head, "code_version": CODE_VERSION, "figures": {}},
        )
        if marker.code_version != CODE_VERSION:
            DayState.objects.filter(book=book).exclude(pk=marker.pk).delete()
        elif marker.through_seq < head:
            first = touched_day(book, marker.through_seq)
            if first is not None:
                DayState.objects.filter(book=book, day__gte=first).exclude(pk=marker.pk).delete()
        if marker.through_seq != head or marker.code_version != CODE_VERSION:
            DayState.objects.filter(pk=marker.pk).update(through_seq=head, code_version=CODE_VERSION)
        return int(head)


def touched_day(book: Book, after: int) -> dt.date | None:
    """The first day whose figures may differ by what was entered after a seq; None when nothing was that matters."""
    touched = _earliest_touched(book, after)
    return None if touched is None else (touched - REACH - dt.timedelta(days=1)).date()


def _earliest_touched(book: Book, after: int) -> dt.datetime | None:
    times: list[dt.datetime] = []
    for model in (Reading, Delivery, Transfer):
        rows = model._base_manager.filter(book=book, seq__gt=after)
        found = rows.aggregate(own=Min("taken_at"), replaced=Min("supersedes__taken_at"))
        times += [value for value in found.values() if value is not None]
    settled = Settlement.objects.filter(book=book, seq__gt=after).aggregate(at=Min("reading__taken_at"))["at"]
    stated = (
        Statement.objects.filter(book=book, seq__gt=after).exclude(kind="membership").aggregate(at=Min("effective_from"))["at"]
    )
    times += [value for value in (settled, stated) if value is not None]
    # A conflict, a shape or a product stated "from the beginning" reaches as far back as anything does.
    return max(min(times), clock.BEGINNING + REACH * 2) if times else None


def doses(book: Book, days: list[dt.date]) -> dict[dt.date, list[DayDose]]:
    """The days that are kept."""
    rows = (
        DayState.objects.filter(book=book, subject="doses", day__in=days)
        if len(days) <= 400
        else (DayState.objects.filter(book=book, subject="doses", day__gte=days[0], day__lte=days[-1]))
    )
    return {row.day: [_dose_from(item) for item in row.figures["rows"]] for row in rows}


def carried(book: Book, day: dt.date) -> tuple[dt.date, dict[str, Contents]] | None:
    """The latest day at or before ``day`` whose vessels' contents at its start are kept, and those contents."""
    row = DayState.objects.filter(book=book, subject="contents", day__lte=day).order_by("-day").first()
    if row is None:
        return None
    return row.day, {code: _contents_from(value) for code, value in row.figures.items()}


def keep(
    book: Book,
    *,
    through: int,
    doses: dict[dt.date, list[DayDose]],
    contents: dict[dt.date, dict[str, Contents]],
) -> None:
    """Keeps what was reckoned from the book as it stood at ``through``; if the book has moved on, keeps nothing."""
    rows = [
        DayState(
            book=book,
            subject="doses",
            day=day,
            through_seq=through,
            code_version=CODE_VERSION,
            figures={"rows": [_plain(item) for item in found]},
        )
        for day, found in doses.items()
    ] + [
        DayState(
            book=book,
            subject="contents",
            day=day,
            through_seq=through,
            code_version=CODE_VERSION,
            figures={code: _plain(item) for code, item in found.items()},
        )
        for day, found in contents.items()
    ]
    with transaction.atomic():
        head = Book.objects.select_for_update().values_list("head_seq", flat=True).get(pk=book.pk)
        if head == through:
            DayState.objects.bulk_create(rows, batch_size=200, ignore_conflicts=True)


def drop(book: Book) -> None:
    """Throws away all that is kept of a works."""
    DayState.objects.filter(book=book).delete()


def _plain(item: Any) -> dict[str, Any]:
    out = asdict(item)
    for key, value in out.items():
        if isinstance(value, dt.datetime | dt.date):
            out[key] = value.isoformat()
    return out


def _contents_from(value: dict[str, Any]) -> Contents:
    return Contents(**value | {"at": dt.datetime.fromisoformat(value["at"]), "lots": tuple(value["lots"])})


FIGURES = ("volume_ml", "product_kg", "active_kg", "used_mg_l", "design_mg_l", "need_mg_l")


def _dose_from(value: dict[str, Any]) -> DayDose:
    figures = {name: Figure(**value[name] | {"remarks": tuple(value[name]["remarks"])}) for name in FIGURES}
    return DayDose(**value | figures | {"day": dt.date.fromisoformat(value["day"]), "remarks": tuple(value["remarks"])})
