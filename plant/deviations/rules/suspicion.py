"""Readings that can hardly be true. They are judged against limits all the same; somebody has to look."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal

WORDS = {
    "impossible": "outside what is physically possible",
    "lost_decimal": "a decimal point seems to be lost",
    "same_as": "equal to another value of the same sample",
    "swapped": "looks swapped with another value of the same sample",
    "conflict": "differs from another value for the same time",
    "totaliser": "a fall of the totaliser that no possible flow explains",
    "free_above_total": "free chlorine above total chlorine",
}
"""Marks in words; a mark that is not listed is shown as it is."""


@dataclass(frozen=True)
class Suspect:
    """A marked reading: what it says and why it is doubted."""

    text: str
    ref: str
    marks: tuple[str, ...]

    @property
    def sentence(self) -> str:
        reasons = "; ".join(WORDS.get(mark, mark.replace("_", " ")) for mark in self.marks)
        return f"{self.text}: {reasons}"


def lost_decimal(value: Decimal, usual: Sequence[Decimal]) -> bool:
    """Whether a value is about ten, a hundred or a thousand times (or a fraction of) the median of earlier ones.

    Needs five earlier values; within 25 % of the power of ten. Common practice, no source.
    """
    if len(usual) < 5 or value <= 0:
        return False
    middle = sorted(usual)[len(usual) // 2]
    if middle <= 0:
        return False
    ratio = value / middle
    return any(abs(ratio / power - 1) <= Decimal("0.25") for power in _POWERS)


_POWERS = tuple(Decimal(10) ** n for n in (-3, -2, -1, 1, 2, 3))
