"""The dose used against the dose designed, the dose needed, and the certified maximum."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

PLAUSIBLE = (-0.05, 3.0)
"""Of the reference: outside of it a day is a reading or a delivery to be settled, and no part of a mean of days."""


@dataclass(frozen=True)
class Dosed:
    """One day of one dosing point as the rules see it. Doses in mg/L, all in one basis; ``sd`` the standard
    uncertainty of ``used``.
    """

    used: float | None
    sd: float | None
    design: float | None
    need: float | None
    volume_ml: float | None = None
    active_kg: float | None = None
    product_kg: float | None = None
    weak: bool = False


@dataclass(frozen=True)
class Difference:
    """Used against a reference: how far off, in per cent of it, and in standard uncertainties."""

    used: float
    reference: float
    pct: float
    sds: float
    days: int

    @property
    def word(self) -> str:
        return "above" if self.pct > 0 else "below"


def difference(rows: Sequence[Dosed], *, to: str, weak_days: int = 7) -> Difference | None:
    """The last day against ``design`` or ``need``; where that day is weak, the last ``weak_days`` days by mass over
    volume (a state code bars tank marks where a day's use is under 5 % of the tank: Wis. Adm. Code NR 811.40(1)(c)).

    None where the day is unknown, or the reference is unknown or zero.
    """
    if not rows or rows[-1].used is None:
        return None
    chosen = [rows[-1]]
    if rows[-1].weak:
        chosen = [row for row in rows[-weak_days:] if _complete(row, to) and (row is rows[-1] or _plausible(row, to))]
        if len(chosen) < min(weak_days, 5):
            return None
    volume = sum(row.volume_ml or 0.0 for row in chosen)
    reference = [row.design if to == "design" else row.need for row in chosen]
    if any(value is None for value in reference):
        return None
    if len(chosen) == 1 or volume <= 0:
        used, wanted = float(chosen[-1].used or 0.0), float(reference[-1] or 0.0)
        sd = chosen[-1].sd or 0.0
    else:
        used = sum(row.active_kg or 0.0 for row in chosen) / volume
        wanted = sum((value or 0.0) * (row.volume_ml or 0.0) for value, row in zip(reference, chosen, strict=True)) / volume
        # The readings between the days cancel, so the first and the last remain: the sd of a sum is that of one day.
        daily = [(row.sd or 0.0) * (row.volume_ml or 0.0) for row in chosen]
        sd = math.sqrt(sum(value**2 for value in daily) / len(daily)) / volume
    if wanted <= 0:
        return None
    off = used - wanted
    return Difference(used, wanted, 100 * off / wanted, abs(off) / sd if sd > 0 else math.inf, len(chosen))


def _complete(row: Dosed, to: str) -> bool:
    reference = row.design if to == "design" else row.need
    return row.used is not None and row.active_kg is not None and bool(row.volume_ml) and reference is not None


def _plausible(row: Dosed, to: str) -> bool:
    """Whether a day can be a mean's part: half of a pair that gives back what the other took would spoil it."""
    reference = row.design if to == "design" else row.need
    if row.used is None or not reference:
        return False
    return PLAUSIBLE[0] <= row.used / reference <= PLAUSIBLE[1]


def off_by(found: Difference, *, pct: float, sds: float = 2.0) -> bool:
    """More than ``pct`` per cent off, and by more than ``sds`` standard uncertainties, so that a coarse gauge alone
    raises nothing. Exactly ``pct`` passes. The two sds are common practice, no source.
    """
    return abs(found.pct) > pct and found.sds > sds


def product_over(rows: Sequence[Dosed], *, days: int = 7) -> tuple[float, int] | None:
    """Mean dose as product over the last ``days`` days, mass over volume, mg/L, and how many days had data.

    A regulator averages over at most seven calendar days (Saskatchewan EPB 432, 2014): one day at 20 and six at 2 mg/L
    are 4.6. None with no day complete.
    """
    known = [row for row in rows[-days:] if row.product_kg is not None and row.volume_ml]
    volume = sum(row.volume_ml or 0.0 for row in known)
    if volume <= 0:
        return None
    return sum(row.product_kg or 0.0 for row in known) / volume, len(known)
