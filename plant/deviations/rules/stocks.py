"""Stock: losses that nothing explains, supply, holdings, age and strength of a lot."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import median


@dataclass(frozen=True)
class Loss:
    """The book against the dip: kg (positive: more should be there) and how many standard uncertainties that is."""

    kg: float
    sds: float


def loss(book_kg: float | None, dip_kg: float | None, sd_kg: float | None, *, sigmas: float) -> Loss | None:
    """The difference when it is more than ``sigmas`` standard uncertainties either way, else None. What is unknown, or
    known without an uncertainty, can't be judged.
    """
    if book_kg is None or dip_kg is None or not sd_kg or sd_kg <= 0:
        return None
    kg = book_kg - dip_kg
    return Loss(kg, abs(kg) / sd_kg) if abs(kg) > sigmas * sd_kg else None


USUAL_LEAST_DAYS = 10
WEEK = 7


def against_usual(days: Sequence[tuple[float, float]], *, own_sd_kg: float) -> tuple[float, float] | None:
    """What was used in the last seven days beyond what the feeder's word usually means (kg, and its standard deviation).

    ``days`` are pairs (used by the dips in kg, what the feeder said in any unit), oldest first. A setting read off a feeder
    that follows the flow is off by the same share every day; only what departs from that is a loss. What is usual is the
    median of the days before those seven. None with too few days for it (common practice, no source).
    """
    before = [used / said for used, said in days[:-WEEK] if said > 0]
    if len(before) < USUAL_LEAST_DAYS:
        return None
    share = median(before)
    spread = 1.4826 * median(abs(item - share) for item in before)
    newest = days[-WEEK:]
    said = sum(item for _, item in newest)
    off = sum(used for used, _ in newest) - share * said
    return off, math.hypot(own_sd_kg, spread * said * math.sqrt(1 / len(newest) + 1 / len(before)))


def supply_low(days: float | None, low: float) -> bool:
    """Fewer days of supply than stated; exactly that many passes (Wis. Adm. Code NR 811.40(1)(a): at least 30 days)."""
    return days is not None and days < low


def holding_high(peak_kg: float | None, high_kg: float) -> bool:
    """The most present at any moment of the day at or above a threshold: reportable thresholds are reached, not
    exceeded (40 CFR 370.10, from memory), and it is the peak that counts, the new delivery included.
    """
    return peak_kg is not None and peak_kg >= high_kg


def lot_overdue(day: dt.date, start: dt.date | None, shelf_life_days: float | None) -> float | None:
    """Days by which a lot is past its shelf life; None within it or unknown. Exactly so many days passes.

    Hypochlorite is not stored over 45 days (Pennsylvania DEP, Module 25 answer key, 2013).
    """
    if start is None or shelf_life_days is None:
        return None
    over = (day - start).days - shelf_life_days
    return over if over > 0 else None


def strength_short(strength: float | None, certificate: float | None, pct_below: float) -> float | None:
    """Per cent below the certificate when that is more than ``pct_below``; None otherwise or when unknown."""
    if strength is None or not certificate:
        return None
    short = 100 * (certificate - strength) / certificate
    return short if short > pct_below else None
