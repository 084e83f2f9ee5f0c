"""What was changed in the records and settings of a month: corrections in it, and all that became known after a seq."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from plant.ledger.models import Book, Record
from plant.readings.models import Reading, Settlement
from plant.stock.models import Delivery, Transfer
from plant.works import kinds
from plant.works import models as works
from plant.works import queries as stating
from plant.works.stated import Saying, Stated

NOT_ON_RECORD = "not on record"
WITHDRAWN = "withdrawn"
BOUNDARY = dt.timedelta(hours=30)
"""How far outside its month a reading may lie and still be interpolated into it."""


@dataclass(frozen=True)
class Change:
    """One change: what, of which moment, old and new, who, when it was recorded, why. ``ref`` names the row."""

    what: str
    of: dt.datetime
    old: str
    new: str
    who: str
    recorded_at: dt.datetime
    why: str
    ref: str
    kind: str


def corrections(book: Book, start: dt.datetime, end: dt.datetime, *, until: int) -> list[Change]:
    """Records of [start, end) that a later one replaced or withdrew, and doubts settled, as known at the seq ``until``."""
    found = [
        change
        for model in (Reading, Delivery, Transfer)
        for change in _replaced(model.objects.filter(book=book, supersedes__isnull=False, seq__lte=until), start, end)
    ]
    found += _settled(Settlement.objects.filter(book=book, seq__lte=until), start, end)
    return sorted(found, key=_order)


def since(book: Book, start: dt.datetime, end: dt.datetime, *, after: int) -> list[Change]:
    """All recorded after the seq ``after`` that touches [start, end): late records, corrections, settlements, settings."""
    found: list[Change] = []
    for model in (Reading, Delivery, Transfer):
        later = model.objects.filter(book=book, seq__gt=after)
        found += _replaced(later.filter(supersedes__isnull=False), start, end)
        found += [
            _change(row, NOT_ON_RECORD, words(row))
            for row in later.filter(supersedes__isnull=True, taken_at__gte=start, taken_at__lt=end).select_related(
                "entry__recorded_by"
            )
        ]
    found += _settled(Settlement.objects.filter(book=book, seq__gt=after), start, end)
    found += _settings(book, start, end, after)
    return sorted(found, key=_order)


def _order(change: Change) -> tuple[dt.datetime, dt.datetime, str]:
    return change.of, change.recorded_at, change.ref


def _replaced(rows: Any, start: dt.datetime, end: dt.datetime) -> list[Change]:
    """Corrections and voids where the old or the new record lies in the span."""
    out = []
    for row in rows.select_related("entry__recorded_by", "supersedes"):
        if start <= row.taken_at < end or start <= row.supersedes.taken_at < end:
            moved = "" if row.taken_at == row.supersedes.taken_at else " (time corrected)"
            new = WITHDRAWN if row.voided else words(row) + moved
            out.append(_change(row, words(row.supersedes), new))
    return out


def _settled(rows: Any, start: dt.datetime, end: dt.datetime) -> list[Change]:
    inside = rows.filter(reading__taken_at__gte=start, reading__taken_at__lt=end)
    return [
        Change(
            subject(row.reading),
            row.reading.taken_at,
            f"{words(row.reading)}, doubtful",
            "stands" if row.decision == Settlement.Decision.STANDS else "set aside",
            _who(row),
            row.entry.recorded_at,
            row.reason,
            row.ref,
            "settlement",
        )
        for row in inside.select_related("entry__recorded_by", "reading")
    ]


def _change(row: Any, old: str, new: str) -> Change:
    return Change(
        subject(row),
        row.taken_at,
        old,
        new,
        _who(row),
        row.entry.recorded_at,
        row.reason or getattr(row, "note", ""),
        row.ref,
        row._meta.model_name,
    )


def _who(row: Record | works.Statement) -> str:
    person = row.entry.recorded_by
    if person is not None:
        return str(person.display_name)
    return str(getattr(row, "by_name", "")) or "command line"


def subject(row: Any) -> str:
    """What a record is of."""
    if isinstance(row, Reading):
        more = "" if row.statistic == "reading" else f" ({row.statistic})"
        return f"{row.site} {row.parameter.replace('_', ' ')}{more}"
    if isinstance(row, Delivery):
        return f"Delivery of {row.product} into {row.vessel}"
    return f"Transfer {row.from_vessel} to {row.to_vessel}"


def words(row: Any) -> str:
    """A record in a few words, as it was typed."""
    if isinstance(row, Reading):
        if row.state == Reading.State.NOT_TAKEN:
            return "not taken" + (f": {row.note}" if row.note else "")
        return f"{row.qualifier if not row.typed.startswith(('<', '>')) else ''}{row.typed} {row.typed_unit}".strip()
    lot = f", lot {row.lot}" if getattr(row, "lot", "") else ""
    strength = f", {row.strength:g} {row.strength_basis.replace('_', ' ')}" if getattr(row, "strength", None) else ""
    return f"{row.quantity:g} {row.unit}{strength}{lot}"


# Settings.

AFTER_THE_FACT = frozenset({"membership", "report"})
"""Kinds of statement that change who signs or how it is addressed, not what is reported."""


def _settings(book: Book, start: dt.datetime, end: dt.datetime, after: int) -> list[Change]:
    rows = works.Statement.objects.filter(book=book, seq__gt=after, effective_from__lt=end).exclude(kind__in=AFTER_THE_FACT)
    before = stating.stated(book, known=after)
    out = []
    for row in rows.select_related("entry__recorded_by"):
        at = max(row.effective_from, start)
        old = before.value(row.kind, row.subject, at)
        new = None if row.withdrawn else row.value
        now = stating.stated(book).saying(row.kind, row.subject, at)
        if old == new or now is None or now.ref != row.ref:
            continue  # says the same, or has been stated over since
        out.append(
            Change(
                setting(row.kind, row.subject),
                at,
                *difference(old, new),
                _who(row),
                row.entry.recorded_at,
                row.reason,
                row.ref,
                "setting",
            )
        )
    return out


def setting(kind: str, subject_code: str) -> str:
    """What a statement is about, in words."""
    known = kinds.KINDS.get(kind)
    return f"{known.title if known else kind.replace('_', ' ')}: {subject_code}"


def difference(old: dict[str, Any] | None, new: dict[str, Any] | None) -> tuple[str, str]:
    """What of two values differs, in words: (was, is)."""
    if old is None or new is None:
        return _said(old, None), _said(new, None)
    keys = [key for key in {**old, **new} if old.get(key) != new.get(key)]
    return _said(old, keys), _said(new, keys)


def _said(value: dict[str, Any] | None, keys: Iterable[str] | None) -> str:
    if value is None:
        return "nothing stated"
    chosen = value if keys is None else {key: value.get(key) for key in keys}
    return "; ".join(f"{key.replace('_', ' ')} {_plain(item)}" for key, item in chosen.items()) or "the same"


def _plain(item: Any) -> str:
    if item is None:
        return "not stated"
    if isinstance(item, bool):
        return "yes" if item else "no"
    if isinstance(item, dict):
        return ", ".join(f"{key.replace('_', ' ')} {_plain(inner)}" for key, inner in item.items())
    if isinstance(item, list | tuple):
        return ", ".join(_plain(inner) for inner in item)
    return f"{item:g}" if isinstance(item, float) else str(item)


def settings_of(stated: Stated, start: dt.datetime, end: dt.datetime) -> tuple[list[tuple[Saying, Saying]], int]:
    """Statements that came into force in [start, end): (what held before, what is said now); and how many were first ones."""
    changed: list[tuple[Saying, Saying]] = []
    first_ones = 0
    for saying in stated.changes(start, end):
        earlier = stated.saying(saying.kind, saying.subject, saying.effective_from - dt.timedelta(microseconds=1))
        if earlier is None:
            first_ones += 1
        elif stated.saying(saying.kind, saying.subject, saying.effective_from) is saying and (
            earlier.value != saying.value or earlier.withdrawn != saying.withdrawn
        ):
            changed.append((earlier, saying))
    return changed, first_ones
