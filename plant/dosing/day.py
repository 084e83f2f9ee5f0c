"""One dosing point on one operating day: used, designed, needed, side by side."""

from __future__ import annotations

import datetime as dt
import math

from plant.dosing.figures import DayDose, Figure
from plant.dosing.need import DayNeed, day_need
from plant.dosing.reckoning import Consumption, Reckoning, consumption
from plant.dosing.spells import Used
from plant.works.described import DosingPoint, Product


def day_doses(out: Reckoning, days: list[dt.date]) -> list[DayDose]:
    """All dosing points on the days named, days outer."""
    found = []
    for day in days:
        at = out.bounds(day)[0]
        # A point stated during the day counts on that day too.
        end = out.bounds(day)[1] - dt.timedelta(microseconds=1)
        for point in out.stated.dosing_points(end):
            product = out.stated.product(point.product, end)
            found.append(day_dose(out, point, product, day, expected=in_service(out, point, at, end)))
    return found


def in_service(out: Reckoning, point: DosingPoint, start: dt.datetime, end: dt.datetime) -> bool:
    """Whether the point and the works are in service at any time of the day."""
    works = out.stated.works(end).code

    def always_off(kind: str, code: str) -> bool:
        if out.stated.state(kind, code, start) == "in_service":
            return False
        changes = [item for item in out.stated.history("state", f"{kind}:{code}") if start < item.effective_from < end]
        return all(not item.withdrawn and item.value.get("is") != "in_service" for item in changes)

    return not (always_off("works", works) or always_off("dosing_point", point.code))


def day_dose(out: Reckoning, point: DosingPoint, product: Product, day: dt.date, *, expected: bool) -> DayDose:
    """The row of the comparison for one point and day."""
    volume = out.volume(point.meter, day)
    drawn = consumption(out, point, product, day)
    need = day_need(out, point, product, day)
    design, design_changed = design_for_day(out, point, day)
    used, sd = dose_mg_l(volume, drawn, product)
    remarks = _remarks(volume, drawn, need, expected, design_changed)
    tag = f"{point.code}:{day.isoformat()}"
    return DayDose(
        day=day,
        dosing_point=point.code,
        product=product.code,
        dose_basis=product.dose_basis,
        volume_ml=Figure(volume.amount, "ML", volume.sd if volume.amount is not None else None, f"volume:{tag}"),
        product_kg=Figure(drawn.product_kg, "kg", None, f"product:{tag}"),
        active_kg=Figure(drawn.active_kg, "kg", _active_sd(drawn, product), f"active:{tag}"),
        used_mg_l=Figure(used, "mg/L", sd, f"used:{tag}"),
        design_mg_l=Figure(design, "mg/L", None, f"design:{tag}"),
        need_mg_l=Figure(need.dose_mg_l, "mg/L", need.sd_mg_l, f"need:{tag}"),
        expected=expected,
        weak=drawn.weak,
        interpolated=volume.interpolated or drawn.interpolated,
        corrected=volume.corrected or drawn.corrected,
        strength_sd_pct=product.strength_sd_pct,
        remarks=remarks,
    )


def dose_mg_l(volume: Used, drawn: Consumption, product: Product) -> tuple[float | None, float | None]:
    """Dose = mass over volume, mg/L (= kg/ML), and its standard uncertainty.

    Gauges, strength and meter are taken as independent and joined to first order (JCGM 100:2008, eq. 10).
    """
    if drawn.active_kg is None or not volume.amount:
        return None, None
    dose = drawn.active_kg / volume.amount
    sd_mass = _active_sd(drawn, product) or 0.0
    return dose, math.hypot(sd_mass / volume.amount, dose * volume.sd / volume.amount)


def _active_sd(drawn: Consumption, product: Product) -> float | None:
    if drawn.active_kg is None:
        return None
    strength = 0.0 if product.dose_basis == "product" else drawn.active_kg * product.strength_sd_pct / 100
    return math.hypot(drawn.sd_active_kg, strength)


def design_for_day(out: Reckoning, point: DosingPoint, day: dt.date) -> tuple[float | None, bool]:
    """The design dose in force, weighted by elapsed time where it changes within the day."""
    start, end = out.bounds(day)
    inside = [
        item.effective_from for item in out.stated.history("design_dose", point.code) if start < item.effective_from < end
    ]
    if not inside:
        return out.stated.design_dose_mg_l(point.code, start), False
    total = weight = 0.0
    for since, until in zip([start, *inside], [*inside, end], strict=True):
        dose = out.stated.design_dose_mg_l(point.code, since)
        if dose is not None:
            share = (until - since) / (end - start)
            total += dose * share
            weight += share
    return (total / weight if weight else None), True


def _remarks(volume: Used, drawn: Consumption, need: DayNeed, expected: bool, design_changed: bool) -> tuple[str, ...]:
    remarks = [*volume.remarks, *drawn.remarks]
    if volume.amount == 0:
        remarks.append("no water treated")
    if not expected:
        remarks.append("not in service")
        if drawn.active_kg is not None and drawn.active_kg > 3 * drawn.sd_active_kg and drawn.active_kg > 0:
            remarks.append("used while not in service: leak, make-up or wrong time")
    if volume.interpolated or drawn.interpolated:
        remarks.append("interpolated")
    if drawn.weak:
        remarks.append("weak: use under 5 % of the vessel")
    if volume.corrected or drawn.corrected:
        remarks.append("corrected")
    if design_changed:
        remarks.append("design changed within the day: mean by time")
    return tuple(dict.fromkeys([*remarks, *need.remarks]))
