"""Running means: annual by quarter, at one location or over all, and what the first year already decides."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from statistics import fmean

QUARTERS = 4


@dataclass(frozen=True)
class RunningMean:
    """A running annual mean: its value, how many quarters had data, how many were missing."""

    value: float | None
    quarters: int
    missing: int


def quarter_mean(months: Sequence[float | None]) -> float | None:
    """A quarter's mean of monthly means (40 CFR 141.133(c)(1)(i)); months without samples are left out. None for none."""
    found = [value for value in months if value is not None]
    return fmean(found) if found else None


def annual(quarters: Sequence[float | None]) -> RunningMean:
    """The mean of the last four quarters (40 CFR 141.64(b)(2), 141.133(c)(1)(i)).

    A missing quarter is left out of the mean and counted: the mean is computed on the data there are, and the missing
    samples are a breach of monitoring of their own (40 CFR 141.133(a)(1); EPA 816-R-01-012 as cited by EPA).
    """
    last = list(quarters)[-QUARTERS:]
    found = [value for value in last if value is not None]
    return RunningMean(fmean(found) if found else None, len(found), len(last) - len(found))


def certain_breach(quarters: Sequence[float | None], limit: float) -> bool:
    """In the first year, with fewer than four quarters: whether the annual mean must exceed even if all that is still
    to come were zero (40 CFR 141.133(a)(3)). With four quarters: whether their mean exceeds.
    """
    known = [value for value in list(quarters)[-QUARTERS:] if value is not None]
    if len(quarters) >= QUARTERS:
        value = annual(quarters).value
        return value is not None and value > limit
    return sum(known) / QUARTERS > limit


def operational_evaluation(two_before: float, previous: float, current: float) -> float:
    """The operational evaluation level (A + B + 2 C) / 4 (40 CFR 141.626(a))."""
    return (two_before + previous + 2 * current) / 4


def mean_by_volume(masses: Sequence[float], volumes: Sequence[float]) -> float | None:
    """Mass over volume: 5 mg/L in 2 ML and 2 mg/L in 10 ML are 2.5 mg/L, not 3.5. None without volume."""
    total = sum(volumes)
    return sum(masses) / total if total > 0 else None


def mean_of_decimals(values: Sequence[Decimal]) -> Decimal | None:
    """The plain mean of exact values; None for none."""
    return sum(values, Decimal(0)) / len(values) if values else None
