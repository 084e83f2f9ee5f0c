"""Changes to what is in the book: each is an entry of its own, with who, when and why, beside what it changes."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from typing import Any

from django.db import transaction

from plant.intake import actions, ground, lines, numbers, records
from plant.ledger.models import Book, Row
from plant.readings import actions as readings
from plant.readings import models
from plant.stock import actions as stock
from plant.works import actions as works_actions
from plant.works.stated import Stated


class NotReadable(ValueError):
    """The corrected value can't be taken; the message says what was read and what was expected."""


def correct(
    *,
    book: Book,
    stated: Stated,
    reading: models.Reading,
    typed: dict[str, str],
    reason: str,
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    """Puts a new value, unit, time or note in the place of a reading.

    ``typed`` has value, unit, timestamp, note, method; an empty value with a note is "not taken". Raises NotReadable,
    readings.AlreadyCorrected, readings.ReasonMissing.
    """
    here = ground.Ground(
        stated,
        stated.calendar(now),
        history=records.history_of(book),
        spelling=ground.Spelling(decimal=numbers.POINT if stated.works(now).units == "us" else numbers.EITHER),
    )
    found = lines.read_line(
        lines.Typed(
            site=reading.site,
            timestamp=typed.get("timestamp", ""),
            parameter=reading.parameter,
            value=typed.get("value", ""),
            unit=typed.get("unit", ""),
            note=typed.get("note", ""),
            method=typed.get("method", reading.method),
            sample=reading.sample,
            statistic=reading.statistic,
        ),
        here,
        line=1,
    )
    if isinstance(found, lines.Refusal):
        raise NotReadable(f"read {found.read}; expected {found.expected}")
    received = {"corrects": reading.ref, "typed": typed, "reason": reason}
    return _change(
        book,
        client_id,
        "correction",
        received,
        lambda: readings.correction(old=reading, new=found.reading, reason=reason),
        by,
        now,
    )


def void(
    *,
    book: Book,
    reading: models.Reading,
    reason: str,
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    """Says that a reading never was. Raises readings.AlreadyCorrected, readings.ReasonMissing."""
    received = {"voids": reading.ref, "reason": reason}
    return _change(book, client_id, "void", received, lambda: readings.void(old=reading, reason=reason), by, now)


def settle(
    *,
    book: Book,
    reading: models.Reading,
    decision: str,
    reason: str,
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    """Says whether a doubtful reading stands. Raises readings.AlreadyCorrected, ReasonMissing, NothingToSettle."""
    received = {"settles": reading.ref, "decision": decision, "reason": reason}
    return _change(
        book,
        client_id,
        "settlement",
        received,
        lambda: readings.settlement(book=book, reading=reading, decision=decision, reason=reason),
        by,
        now,
    )


def reverse(
    *,
    book: Book,
    movement: Any,
    reason: str,
    by: Any,
    now: dt.datetime,
    client_id: str,
) -> actions.Taken:
    """Takes ``movement``, a delivery or transfer, out of the reckoning. Raises stock.AlreadyReversed, stock.ReasonMissing."""
    received = {"reverses": movement.ref, "reason": reason}
    return _change(book, client_id, "reversal", received, lambda: stock.reversal(old=movement, reason=reason), by, now)


def _change(
    book: Book,
    client_id: str,
    kind: str,
    received: Any,
    rows: Any,
    by: Any,
    now: dt.datetime,
) -> actions.Taken:
    """Makes the rows and appends them while the book is held, so that of two people the second sees the first."""
    with transaction.atomic():
        works_actions.hold(book)
        # Sent again, it is recognised before anybody asks whether it can still be done.
        made: Sequence[Row] = [] if actions.known(book, client_id) else rows()
        taken = actions.take(
            book=book, client_id=client_id, kind=kind, received=received, rows=made, by=by, now=now, judge=False
        )
    return actions.judge_taken(book=book, taken=taken, by=by)
