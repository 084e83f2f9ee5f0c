"""Does what is kept come back the same when it is reckoned anew?"""

from __future__ import annotations

import math
from collections.abc import Iterator

from plant.dosing import comparison, states
from plant.dosing.figures import DayDose
from plant.dosing.models import DayState
from plant.ledger.models import Book

NEGLIGIBLE = 1e-9


def check(book: Book) -> Iterator[str]:
    """Findings of verify_records: a day that is kept and differs from the same day reckoned from the book alone."""
    if not DayState.objects.filter(book=book, subject="doses").exists():
        return
    head = states.refresh(book)
    days = list(DayState.objects.filter(book=book, subject="doses").order_by("day").values_list("day", flat=True))
    for first in range(0, len(days), comparison.LONGEST_BLOCK):
        block = days[first : first + comparison.LONGEST_BLOCK]
        kept = states.doses(book, block)
        rows = comparison.comparison(book, block[0], block[-1], known=head, bypass=True)
        anew = {(row.day, row.dosing_point): row for row in rows}
        for day in block:
            for row in kept.get(day, []):
                other = anew.get((day, row.dosing_point))
                if other is None or not same(row, other):
                    yield f"{book.code}: the kept figures of {row.dosing_point} on {day} differ from the book"


def same(one: DayDose, other: DayDose) -> bool:
    """Whether two rows say the same, but for the last bits of a float."""
    for name in states.FIGURES:
        left, right = getattr(one, name).value, getattr(other, name).value
        if (left is None) != (right is None):
            return False
        if left is not None and not math.isclose(left, right, rel_tol=1e-6, abs_tol=NEGLIGIBLE):
            return False
    return one.remarks == other.remarks
