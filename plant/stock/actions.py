"""What may be done to an order, a delivery or a transfer that is in the book: end it, or put a corrected one in its place.

A delivery booked to the wrong vessel is mended by reversing it and entering it again; the reversal is a row too. These
make the rows; ``plant.intake.actions`` appends them as an entry and has the days judged again.
"""

from __future__ import annotations

from typing import TypeVar

from plant.stock import models

Movement = TypeVar("Movement", models.Delivery, models.Transfer, models.Order)


class AlreadyReversed(ValueError):
    """Somebody else was first."""


class ReasonMissing(ValueError):
    """A change to the book says why."""


def reversal(*, old: Movement, reason: str) -> list[Movement]:
    """The row that takes a delivery or transfer out of the reckoning. Raises AlreadyReversed, ReasonMissing."""
    why = _ready(old, reason)
    gone = type(old)(
        **{
            field.attname: getattr(old, field.attname)
            for field in old._meta.concrete_fields
            if field.name not in {"id", "book", "entry", "seq", "line", "reason", "supersedes", "voided"}
        }
    )
    gone.supersedes, gone.reason, gone.voided = old, why, True
    return [gone]


def replacement(*, old: Movement, new: Movement, reason: str) -> list[Movement]:
    """The row that takes the place of a wrong one. Raises AlreadyReversed, ReasonMissing."""
    new.reason, new.supersedes = _ready(old, reason), old
    return [new]


def _ready(old: models.Delivery | models.Transfer | models.Order, reason: str) -> str:
    newer = type(old).objects.filter(supersedes=old.pk).select_related("entry__recorded_by").first()
    if newer is not None:
        who = newer.entry.recorded_by or "the system"
        raise AlreadyReversed(f"{who} changed this at {newer.entry.recorded_at:%Y-%m-%d %H:%M} UTC: “{newer.reason}”")
    if old.voided:
        raise AlreadyReversed("this row is itself a reversal")
    if len(reason.strip()) < 3:
        raise ReasonMissing("say why: a change to the book needs a reason")
    return reason.strip()
