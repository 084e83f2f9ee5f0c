"""Which readings a need is computed from, how old they are, and what comes of it.

The chemistry is in chemistry.needs; this module only picks the readings, and says which and how old.
"""

from __future__ import annotations

import datetime as dt
import statistics
from dataclasses import asdict, dataclass, field
from typing import Any

from chemistry import errors, need_models, needs
from plant.dosing.reckoning import Reckoning, consumption
from plant.readings.queries import Point
from plant.works.described import DosingPoint, Product

USUAL_MAX_AGE_HOURS = 36.0
RESIDUAL_OF = {
    "NaOCl": "free_chlorine",
    "Cl2": "free_chlorine",
    "Ca(OCl)2": "free_chlorine",
    "H2O2": "hydrogen_peroxide",
    "ClO2": "chlorine_dioxide",
    "O3": "ozone",
    "KMnO4": "permanganate",
    "NaMnO4": "permanganate",
}
"""The residual that shows an oxidant's effect (the names are the record file's own)."""


@dataclass
class DayNeed:
    """The need of one dosing point on one day."""

    dose_mg_l: float | None = None
    sd_mg_l: float | None = None
    remarks: list[str] = field(default_factory=list)
    refs: list[str] = field(default_factory=list)
    steps: tuple[Any, ...] = ()


@dataclass(frozen=True)
class Taken:
    """The value of a parameter for a day: the median of the day's readings, or the latest before it."""

    value: float
    refs: tuple[str, ...]
    age_hours: float
    at: dt.datetime


def day_need(out: Reckoning, point: DosingPoint, product: Product, day: dt.date) -> DayNeed:
    """The need; where it can't be computed, why not."""
    settings = dict(point.need)
    model = str(settings.pop("model", "none"))
    if model == "none":
        return DayNeed()
    max_age = float(settings.pop("max_age_hours", USUAL_MAX_AGE_HOURS))
    got = DayNeed()
    values: dict[str, float] = {}
    site = point.before or point.sample_point
    for parameter in needs.needed_parameters(model, settings):
        taken = value_for_day(out, site, parameter, day, max_age) if site else None
        if taken is None:
            continue
        values[parameter] = taken.value
        got.refs += taken.refs
        if taken.age_hours > 0:
            local = out.calendar.local(taken.at)
            got.remarks.append(f"need: {parameter} of {local:%Y-%m-%d %H:%M}, {taken.age_hours:.0f} h before the day")
    if settings.get("demand_from") == "last_7_days":
        demand = demand_of_last_days(out, point, product, day)
        if demand is not None:
            values["demand_mg_per_L"] = demand
    try:
        need = needs.need(model, settings, values, product=asdict(product))
    except errors.ChemistryError as problem:
        got.remarks.append(f"need: {problem}")
        return got
    got.steps = need.steps
    got.remarks += [f"need: {caution}" for caution in need.cautions]
    if need.dose_mg_l is None:
        got.remarks.append(f"need: {need.reason}")
        return got
    got.dose_mg_l, got.sd_mg_l = float(need.dose_mg_l), None if need.sd_mg_l is None else float(need.sd_mg_l)
    return got


def value_for_day(out: Reckoning, site: str, parameter: str, day: dt.date, max_age_hours: float) -> Taken | None:
    """The median of the operating day's usable readings, or the latest before the day if it is not too old.

    Below detection counts at its limit here, and the trail shows the mark: a need must not be understated by a zero.
    """
    start, end = out.bounds(day)
    points = out.found.usable(site, parameter)
    today = [point for point in points if start <= point.at < end]
    if today:
        return Taken(
            statistics.median(point.value or 0.0 for point in today), tuple(point.ref for point in today), 0.0, today[-1].at
        )
    before: list[Point] = [point for point in points if point.at < start]
    if not before:
        return None
    latest = before[-1]
    age = (start - latest.at).total_seconds() / 3600
    return Taken(latest.value or 0.0, (latest.ref,), age, latest.at) if age <= max_age_hours else None


def demand_of_last_days(out: Reckoning, point: DosingPoint, product: Product, day: dt.date, days: int = 7) -> float | None:
    """Flow-weighted mean of dose used less residual over the operating days before; None when no day has all three.

    Both as the residual is stated (chlorine as Cl2), whatever the product's dose basis.
    """
    residual = RESIDUAL_OF.get(product.chemical)
    if residual is None or point.sample_point is None:
        return None
    mass_kg = volume_ml = 0.0
    for back in range(days, 0, -1):
        earlier = day - dt.timedelta(days=back)
        if earlier not in out.days:
            continue
        volume = out.volume(point.meter, earlier).amount
        drawn = consumption(out, point, product, earlier).active_kg
        start, end = out.bounds(earlier)
        found = [item.value or 0.0 for item in out.found.usable(point.sample_point, residual) if start <= item.at < end]
        if volume and drawn is not None and found:
            dosed = need_models.dose_as_residual_mg_l(drawn, asdict(product))
            mass_kg += dosed - statistics.median(found) * volume
            volume_ml += volume
    return mass_kg / volume_ml if volume_ml else None
