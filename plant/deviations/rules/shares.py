"""Shares of a month, shares of samples, days of excursion, and percentiles by their several methods."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from itertools import pairwise
from statistics import fmean

METHODS = ("linear", "hazen", "weibull", "nearest_rank", "inverted_cdf", "rank_rounded", "rank_interpolated")
"""``linear``, ``hazen``, ``weibull``, ``inverted_cdf``: Hyndman & Fan, The American Statistician 50 (1996) 361-365,
definitions 7, 5, 6 and 1. ``nearest_rank`` is definition 1 by another name. The last two: rank 0.9 n from the lowest,
rounded to the nearest whole rank or interpolated between the two (40 CFR 141.80(c)(3); both readings are taught)."""


@dataclass(frozen=True)
class Share:
    """How many of how many met a limit."""

    met: int
    of: int

    @property
    def pct(self) -> float | None:
        """Per cent; None for no measurements."""
        return 100 * self.met / self.of if self.of else None

    def at_least(self, pct: Decimal | float | str) -> bool | None:
        """Whether the share reaches ``pct``, by counting and without rounding: 171 of 180 reaches 95, 170 does not
        (40 CFR 141.173(a)(1), 141.551). None for no measurements.
        """
        if not self.of:
            return None
        return Fraction(self.met, self.of) * 100 >= Fraction(str(pct))


def share_met(verdicts: Sequence[bool | None]) -> Share:
    """From "is it above?" of each measurement; one that can't be told (None) counts as not met."""
    return Share(sum(1 for above in verdicts if above is False), len(verdicts))


def percentile(values: Sequence[float], pct: float, *, method: str, least: int = 1) -> float | None:
    """A percentile by a named method. None below the ``least`` count. Raises ValueError for an unknown method."""
    if method not in METHODS:
        raise ValueError(f"percentile method is one of {', '.join(METHODS)}, not {method!r}")
    n = len(values)
    if n < max(least, 1):
        return None
    ordered = sorted(values)
    share = pct / 100
    if method in ("nearest_rank", "inverted_cdf"):
        return ordered[max(math.ceil(round(n * share, 9)), 1) - 1]
    if method == "rank_rounded":
        return ordered[min(max(math.floor(n * share + 0.5), 1), n) - 1]
    rank = {
        "linear": (n - 1) * share + 1,
        "hazen": n * share + 0.5,
        "weibull": (n + 1) * share,
        "rank_interpolated": n * share,
    }[method]
    return _between(ordered, rank)


def _between(ordered: Sequence[float], rank: float) -> float:
    rank = min(max(rank, 1.0), float(len(ordered)))
    lower = math.floor(rank + 1e-9)
    part = max(rank - lower, 0.0)
    if lower >= len(ordered):
        return ordered[-1]
    return ordered[lower - 1] + part * (ordered[lower] - ordered[lower - 1])


def rank_of_90th(n: int) -> float:
    """The rank from the lowest of the 90th percentile of n samples: 0.9 n (40 CFR 141.80(c)(3))."""
    return round(0.9 * n, 9)


def ninetieth(values: Sequence[float], *, method: str = "rank_interpolated") -> float | None:
    """The 90th percentile of tap samples: with five samples the mean of the two highest (40 CFR 141.80(c)(3)(iv)),
    otherwise rank 0.9 n, its fraction treated as ``method`` says. None below five samples.
    """
    if len(values) < 5:
        return None
    if len(values) == 5:
        return fmean(sorted(values)[-2:])
    return percentile(values, 90, method=method)


def undetectable_pct(a: int, b: int, c: int, d: int, e: int) -> float | None:
    """Share of network samples without a residual, V = 100 (c + d + e) / (a + b), %.

    40 CFR 141.75(b)(2)(iii): a residual measured; b not measured but plate count measured; c measured, none detected,
    no plate count; d none detected and plate count above 500/mL; e not measured and plate count above 500/mL. The
    formula itself is from memory. None with no samples.
    """
    return 100 * (c + d + e) / (a + b) if a + b else None


def undetectable_breach(previous_pct: float | None, this_pct: float | None, most_pct: float = 5.0) -> bool:
    """More than 5 % in each of two months running (40 CFR 141.72(b)(3)(i)); exactly 5 % does not exceed."""
    return previous_pct is not None and this_pct is not None and previous_pct > most_pct and this_pct > most_pct


def daily_values(readings: Mapping[int, Sequence[float]], days: Sequence[int]) -> dict[int, float | None]:
    """The day's value of a corrosion parameter: the mean of all its readings; without one, the last value carries
    forward (40 CFR 141.82(g)(1)-(3)). None before the first reading.
    """
    out: dict[int, float | None] = {}
    last: float | None = None
    for day in days:
        if readings.get(day):
            last = fmean(readings[day])
        out[day] = last
    return out


def excursion_breach(days_outside: int, most: int = 9) -> bool:
    """More than nine days of excursion in six months (40 CFR 141.82(g)); nine passes."""
    return days_outside > most


def lowest(values: Sequence[float]) -> float | None:
    """The lowest of monthly means: the disinfection benchmark (40 CFR 141.543, 141.172(c))."""
    return min(values) if values else None


def in_a_row(days: Sequence[int]) -> int:
    """The longest run of consecutive days among day numbers."""
    if not days:
        return 0
    best = run = 1
    for earlier, later in pairwise(sorted(set(days))):
        run = run + 1 if later == earlier + 1 else 1
        best = max(best, run)
    return best
