"""The quantity on the papers against what the vessel itself says: its level before and after the load.

Differences beyond two standard uncertainties and 3 % of the load are shown: common practice, no source (2 to 3 % is usual).
Nothing is refused: the load is in.
"""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import dataclass
from typing import Any

from chemistry import errors, vessels
from plant.intake import deliveries, ground, lines
from plant.intake.cells import Unreadable
from plant.readings.models import Reading
from plant.stock import models
from plant.works import described
from plant.works.stated import Stated

SHARE_PCT = 3.0
APART = dt.timedelta(minutes=1)
"""The load counts at one instant; the readings beside it stand a minute before and after, so that it lies between them."""


@dataclass(frozen=True)
class Levels:
    """The vessel's level (m) or weight (kg) just before and just after, as typed."""

    before: str
    after: str

    def as_received(self) -> dict[str, str]:
        return {"before": self.before, "after": self.after}


@dataclass(frozen=True)
class Rise:
    """The two readings, and in words how the rise compares."""

    readings: tuple[Reading, ...]
    words: str
    differs: bool


def rise(stated: Stated, delivery: models.Delivery, levels: Levels, here: ground.Ground, by: Any) -> Rise:
    """Raises cells.Unreadable for what can't be a level of this vessel."""
    value = stated.value("vessel", delivery.vessel, delivery.taken_at) or {}
    vessel = described.vessel(delivery.vessel, value)
    parameter, unit = ("weight", "kg") if vessel.on_scale else ("level", "m")
    read = [
        _reading(column, typed, delivery, delivery.taken_at + apart, parameter, unit, here, by)
        for column, typed, apart in (("level_before", levels.before, -APART), ("level_after", levels.after, APART))
    ]
    before, after = (float(one.value or 0.0) for one in read)
    if after <= before:
        raise Unreadable("level_after", f"{levels.after} after, {levels.before} before", "more after than before")
    kept = (read[0], read[1])
    papers = _papers(delivery, here, vessel)
    if papers is None:
        return Rise(kept, "The rise can't be compared: no density is known.", False)
    try:
        found, sd = _rise(vessel, before, after)
    except errors.ChemistryError as problem:
        raise Unreadable("level_after", levels.after, str(problem)) from None
    what = "kg" if vessel.on_scale else "L"
    sd_papers = papers * delivery.quantity_sd_pct / 100
    difference, both = found - papers, math.hypot(sd, sd_papers)
    differs = abs(difference) > 2 * both and abs(difference) > papers * SHARE_PCT / 100
    side = "more" if difference > 0 else "less"
    words = (
        f"The papers say {papers:,.0f} {what}, the vessel rose by {found:,.0f} ± {2 * both:,.0f} {what}: "
        f"{abs(difference):,.0f} {what} {side}."
    )
    end = " Look at the papers, the gauge and the fill line before the driver leaves." if differs else " They agree."
    return Rise(kept, words + end, differs)


def _papers(delivery: models.Delivery, here: ground.Ground, vessel: described.Vessel) -> float | None:
    litres = deliveries.volume_l(delivery, here)
    if not vessel.on_scale:
        return litres
    product = here.value("product", delivery.product, delivery.taken_at) or {}
    density = delivery.density_kg_per_l or product.get("density_kg_per_L")
    if delivery.unit in ("kg", "t", "lb", "g"):
        return float(deliveries.units.mass_kg(delivery.quantity, delivery.unit))
    return None if litres is None or not density else litres * float(density)


def _rise(vessel: described.Vessel, before: float, after: float) -> tuple[float, float]:
    """Litres (kg on a scale) and standard uncertainty of the rise."""
    if vessel.on_scale:
        return after - before, math.sqrt(2) * float(vessel.form.get("weight_sd_kg", 1.0))
    before, after = before * vessel.level_factor, after * vessel.level_factor
    volume = [float(vessels.volume_l(vessel.form, level)) for level in (before, after)]
    area = [
        (float(vessels.volume_l(vessel.form, level)) - float(vessels.volume_l(vessel.form, max(level - 0.01, 0.0)))) / 0.01
        for level in (before, after)
    ]
    return volume[1] - volume[0], math.hypot(*(one * vessel.level_sd_m for one in area))


def _reading(
    column: str, typed: str, delivery: models.Delivery, at: dt.datetime, parameter: str, unit: str, here: ground.Ground, by: Any
) -> Reading:
    found = lines.read_line(
        lines.Typed(
            site=delivery.vessel, timestamp=at.isoformat(), parameter=parameter, value=typed, unit=unit,
            by=str(getattr(by, "display_name", "") or by or "")[:80], note=f"at the delivery, {column.rpartition('_')[2]}",
        ),
        here,
        line=1,
    )  # fmt: skip
    if isinstance(found, lines.Refusal):
        raise Unreadable(column, found.read, found.expected)
    if found.reading.value is None or found.reading.qualifier:
        raise Unreadable(column, typed, "a number")
    return found.reading
