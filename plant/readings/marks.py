"""Doubts that a reading may carry from the moment it comes in. The number stays; somebody settles the doubt."""

from __future__ import annotations

IMPOSSIBLE = "impossible"
LOST_POINT = "lost_decimal_point"
PH_IS_CHLORINE = "ph_equals_chlorine"
CONFLICT = "conflict"
WRONG_PRODUCT = "wrong_product"
OVERFILL = "overfill"
ACCEPTED = "accepted_outside_terms"

WORDS: dict[str, str] = {
    IMPOSSIBLE: "outside what is physically possible",
    LOST_POINT: "a decimal point may be lost",
    PH_IS_CHLORINE: "pH and chlorine of the same sample have the same value",
    CONFLICT: "another value was recorded for the same sample and time",
    WRONG_PRODUCT: "another product than the vessel holds",
    OVERFILL: "more than the vessel had room for",
    ACCEPTED: "outside the stated terms, accepted by a supervisor",
}


def in_words(marks: list[str] | tuple[str, ...]) -> str:
    """The doubts as a screen or a report says them."""
    return "; ".join(WORDS.get(mark, mark.replace("_", " ")) for mark in marks)
