"""Several days as one: masses and volumes are added, and the dose is mass over volume. Never a mean of doses."""

from __future__ import annotations

import math
from collections.abc import Sequence

from plant.dosing.figures import DayDose, Figure, PeriodDose


def period(rows: Sequence[DayDose]) -> list[PeriodDose]:
    """One row per dosing point over all the days given. Only days on which mass and volume are both known count."""
    by_point: dict[str, list[DayDose]] = {}
    for row in rows:
        by_point.setdefault(row.dosing_point, []).append(row)
    return [_one(found) for found in by_point.values()]


def _one(rows: list[DayDose]) -> PeriodDose:
    first, last = rows[0], rows[-1]
    expected = [row for row in rows if row.expected]
    known = [row for row in rows if row.active_kg.value is not None and row.volume_ml.value is not None]
    treated = [row for row in known if row.volume_ml.value]
    volume = math.fsum(row.volume_ml.value or 0.0 for row in known)
    active = math.fsum(row.active_kg.value or 0.0 for row in known)
    product = math.fsum(row.product_kg.value or 0.0 for row in known)
    used = active / volume if treated and volume else None
    tag = f"{first.dosing_point}:{first.day.isoformat()}..{last.day.isoformat()}"
    remarks = []
    if len(known) < len(expected):
        remarks.append(f"{len(known)} of {len(expected)} days known")
    if any(row.corrected for row in rows):
        remarks.append("corrected")
    return PeriodDose(
        dosing_point=first.dosing_point,
        product=last.product,
        dose_basis=last.dose_basis,
        first=first.day,
        last=last.day,
        days_expected=len(expected),
        days_counted=len(known),
        volume_ml=Figure(volume if known else None, "ML", _meter(treated, volume), f"volume:{tag}"),
        product_kg=Figure(product if known else None, "kg", None, f"product:{tag}"),
        active_kg=Figure(active if known else None, "kg", None, f"active:{tag}"),
        used_mg_l=Figure(used, "mg/L", None if used is None else _sd(treated, used, volume), f"used:{tag}"),
        design_mg_l=Figure(_by_volume(treated, "design_mg_l"), "mg/L", None, f"design:{tag}"),
        need_mg_l=Figure(_by_volume(treated, "need_mg_l"), "mg/L", None, f"need:{tag}"),
        remarks=tuple(remarks),
    )


def _meter(rows: list[DayDose], volume: float) -> float:
    """A meter's error is the same every day: it does not average out."""
    return max(((row.volume_ml.sd or 0.0) / row.volume_ml.value for row in rows if row.volume_ml.value), default=0.0) * volume


def _sd(rows: list[DayDose], used: float, volume: float) -> float:
    """Strength and meter count in full, being the same every day; of the dips only those at the two ends remain, since each
    reading inside the period ends one day and begins the next. JCGM 100:2008, 5.2.2 for the fully correlated part."""
    gauges = []
    for row in rows:
        strength = 0.0 if row.dose_basis == "product" else (row.active_kg.value or 0.0) * row.strength_sd_pct / 100
        gauges.append(max((row.active_kg.sd or 0.0) ** 2 - strength**2, 0.0))
    gauge = math.sqrt(math.fsum(gauges) / len(gauges)) / volume
    strength_pct = max((0.0 if row.dose_basis == "product" else row.strength_sd_pct) for row in rows)
    return math.hypot(gauge, used * strength_pct / 100, used * _meter(rows, volume) / volume)


def _by_volume(rows: list[DayDose], name: str) -> float | None:
    """A dose over the period, weighted by the water it was meant for."""
    found = [(getattr(row, name).value, row.volume_ml.value or 0.0) for row in rows if getattr(row, name).value is not None]
    weight = math.fsum(volume for _, volume in found)
    return math.fsum(dose * volume for dose, volume in found) / weight if weight else None
