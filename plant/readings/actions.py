"""What may be done to a reading that is in the book: correct it, void it, settle a doubt. Nothing is overwritten.

These make the rows; ``plant.intake.actions`` appends them as an entry and has the day judged again.
"""

from __future__ import annotations

from plant.ledger.models import Book
from plant.readings import marks, models, queries

KEPT_BY_A_CORRECTION = ("site", "parameter", "statistic", "by_name")


class AlreadyCorrected(ValueError):
    """Somebody else was first; ``newer`` is the reading that holds now."""

    def __init__(self, newer: models.Reading) -> None:
        self.newer = newer
        who = newer.entry.recorded_by
        name = str(who) if who is not None else "the system"
        done = "voided" if newer.voided else "corrected"
        super().__init__(f"{name} {done} this reading at {newer.entry.recorded_at:%Y-%m-%d %H:%M} UTC: “{newer.reason}”")


class ReasonMissing(ValueError):
    """A change to the book says why."""


class NothingToSettle(ValueError):
    """The reading carries no doubt."""


def correction(*, old: models.Reading, new: models.Reading, reason: str) -> list[models.Reading]:
    """The row that takes the place of ``old``. Raises AlreadyCorrected, ReasonMissing."""
    _first(old)
    new.supersedes, new.reason = old, _reason(reason)
    for name in KEPT_BY_A_CORRECTION:
        setattr(new, name, getattr(old, name))
    # The doubt between two records of one sample outlives a change of one of them.
    if marks.CONFLICT in old.marks and marks.CONFLICT not in new.marks and new.value_text != old.value_text:
        new.marks = [*new.marks, marks.CONFLICT]
    return [new]


def void(*, old: models.Reading, reason: str) -> list[models.Reading]:
    """The row that says a reading never was. Raises AlreadyCorrected, ReasonMissing."""
    _first(old)
    gone = models.Reading(supersedes=old, reason=_reason(reason), voided=True)
    for field in ("site", "parameter", "taken_at", "date_only", "state", "typed", "typed_unit", "unit", "statistic", "sample"):
        setattr(gone, field, getattr(old, field))
    return [gone]


def settlement(
    *,
    book: Book,
    reading: models.Reading,
    decision: str,
    reason: str,
) -> list[models.Settlement | models.Reading]:
    """The row that says whether a doubtful reading stands. Of two in conflict, the others are set aside with it.

    Raises AlreadyCorrected, ReasonMissing, NothingToSettle.
    """
    _first(reading)
    if not reading.marks:
        raise NothingToSettle("this reading carries no doubt to settle; correct or void it instead")
    if decision not in models.Settlement.Decision.values:
        raise NothingToSettle(f"a doubt is settled as {' or '.join(models.Settlement.Decision.values)}, not {decision!r}")
    why = _reason(reason)
    earlier = models.Settlement.objects.filter(reading=reading).as_known().order_by("-seq", "-line").first()
    rows: list[models.Settlement | models.Reading] = [
        models.Settlement(reading=reading, decision=decision, reason=why, supersedes=earlier)
    ]
    if decision == models.Settlement.Decision.STANDS and marks.CONFLICT in reading.marks:
        for rival in queries.rivals(book, reading):
            rows.extend(void(old=rival, reason=f"the other record of this sample stands: {why}"))
    return rows


def _first(old: models.Reading) -> None:
    newer = queries.replaced_by(old)
    if newer is not None:
        raise AlreadyCorrected(newer)
    if old.voided:
        raise AlreadyCorrected(old)


def _reason(text: str) -> str:
    reason = text.strip()
    if len(reason) < 3:
        raise ReasonMissing("say why: a change to the book needs a reason")
    return reason
