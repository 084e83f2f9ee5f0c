"""From figures to pictures: the strip of a day, the run of a season, the columns of the store."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Sequence
from urllib.parse import urlencode

from chemistry import vessels as shapes
from plant import clock, scene
from plant.board import shown
from plant.deviations import defaults
from plant.dosing.figures import DayDose, Figure, VesselStock
from plant.scene import column, run, strip
from plant.works.described import Product, Vessel
from plant.works.stated import Stated


def tolerance_pct(stated: Stated, dosing_point: str, at: dt.datetime) -> float:
    """The tightest stated ``dose_vs_design`` of a dosing point, %; where none is stated, the one that holds by default."""
    found = [
        float(limit.keys["pct"])
        for limit in stated.limits(at)
        if limit.kind == "dose_vs_design" and limit.subject == dosing_point and "pct" in limit.keys
    ]
    return min(found, default=defaults.DOSE_PCT)


def trail_path(code: str, figure: Figure) -> str:
    """Where a figure opens; empty for one without a key."""
    return f"/w/{code}/trail/?{urlencode({'key': figure.key})}" if figure.key else ""


def day_strip(row: DayDose, *, name: str, code: str, tolerance: float, whisker: bool, width: float) -> scene.Scene:
    """Used, design and need of one day."""
    return strip.dose_strip(
        title=f"{name}: dose on {row.day.day} {row.day:%B %Y}, as {shown.formula(row.dose_basis)}",
        unit=row.used_mg_l.unit or "mg/L",
        used=row.used_mg_l.value,
        used_sd=row.used_mg_l.sd,
        design=row.design_mg_l.value,
        need=row.need_mg_l.value,
        tolerance_pct=tolerance,
        weak=row.weak,
        why_unknown="; ".join(row.used_mg_l.remarks or row.remarks),
        whisker=whisker,
        width=width,
        opens={
            "used": trail_path(code, row.used_mg_l),
            "design": trail_path(code, row.design_mg_l),
            "need": trail_path(code, row.need_mg_l),
        },
    )


def dose_run(
    rows: Sequence[DayDose],
    *,
    name: str,
    calendar: clock.Calendar,
    tolerance: float,
    flags: Sequence[run.Flag],
    levels: dict[dt.date, str],
    width: float,
    height: float = 300,
) -> scene.Scene:
    """The doses of many days, each standing at the noon of its operating day; ``levels`` are the days that deviate."""
    start, end = (calendar.local(at) for at in calendar.span(rows[0].day, rows[-1].day))

    def noon(day: dt.date) -> dt.datetime:
        return calendar.local(calendar.start_of(day) + dt.timedelta(hours=12)).replace(minute=0)

    used = [
        run.Point(noon(row.day), row.used_mg_l.value, row.weak, levels.get(row.day, ""), "a weak day" if row.weak else "")
        for row in rows
    ]
    need = [run.Point(noon(row.day), row.need_mg_l.value) for row in rows]
    unit = rows[-1].used_mg_l.unit or "mg/L"
    return run.run(
        title=f"{name}: dose used, designed and needed",
        quantity=f"Dose as {shown.formula(rows[-1].dose_basis)}",
        unit=unit,
        points=used,
        start=start,
        end=end,
        bands=_bands(rows, calendar, tolerance),
        need=need,
        flags=flags,
        width=width,
        height=height,
        dated=True,
    )


def _bands(rows: Sequence[DayDose], calendar: clock.Calendar, tolerance: float) -> list[run.Band]:
    """One area for each stretch of days with the same design."""
    out: list[run.Band] = []
    for row in rows:
        design = row.design_mg_l.value
        if design is None:
            continue
        start, end = (calendar.local(at) for at in calendar.bounds(row.day))
        low, high = design * (1 - tolerance / 100), design * (1 + tolerance / 100)
        if out and out[-1].end == start and math.isclose(out[-1].low, low) and math.isclose(out[-1].high, high):
            out[-1] = run.Band(out[-1].start, end, low, high)
        else:
            out.append(run.Band(start, end, low, high))
    return out


def vessel_column(
    stock: VesselStock, vessel: Vessel, product: Product, *, per_day_kg: float | None, contents: str, width: float = 266
) -> scene.Scene:
    """A vessel with what it holds. ``per_day_kg`` is the use of its product, kg of product a day, where it alone feeds it."""
    width_m, height_m, cone_m = _proportions(vessel)
    full_kg = stock.dip_kg / stock.level_fraction if stock.dip_kg and stock.level_fraction else None
    fill = vessel.max_fill_pct / 100
    heel = 0.0
    if vessel.on_scale:
        heel = vessel.heel_kg / full_kg if full_kg else 0.0
    elif vessel.heel_L:
        heel = vessel.heel_L / float(shapes.full_volume_l(vessel.form))
    load = reserve = None
    if product.load_kg and full_kg and vessel.role in ("bulk", "silo"):
        load = fill - product.load_kg / full_kg
    if product.reserve_days and per_day_kg and full_kg:
        reserve = heel + product.reserve_days * per_day_kg / full_kg
    return column.level_column(
        title=f"{vessel.name}: what it holds",
        width_m=width_m,
        height_m=height_m,
        cone_m=cone_m,
        level=_height(vessel, stock.level_fraction),
        heel=_height(vessel, heel) or 0.0,
        reserve=_height(vessel, reserve) if reserve is not None and reserve < 1 else None,
        fill_to=_height(vessel, fill) or 1.0,
        load_from=load if load is None or load < 0 else _height(vessel, load),
        days=stock.days_of_supply,
        contents=contents,
        width=width,
    )


def _proportions(vessel: Vessel) -> tuple[float, float, float]:
    """Width, height and the cone's part of it, in metres; a scale and a strapping table show neither, so a drum stands in."""
    form = vessel.form
    match form["shape"]:
        case "vertical_cylinder":
            return float(form["diameter_m"]), float(form["height_m"]), 0.0
        case "horizontal_cylinder":
            return float(form["length_m"]), float(form["diameter_m"]), 0.0
        case "cone_bottom":
            cone = float(form["cone_height_m"])
            return float(form["diameter_m"]), float(form["height_m"]) + cone, cone
        case "strapping":
            height = float(shapes.full_level_m(form))
            across = math.sqrt(4 * float(shapes.full_volume_l(form)) / 1000 / (math.pi * height))
            return across, height, 0.0
    return 0.6, 0.9, 0.0


def _height(vessel: Vessel, fraction: float | None) -> float | None:
    """A share of the volume (or of the weight) as a share of the height."""
    if fraction is None or vessel.on_scale:
        return fraction
    full = float(shapes.full_volume_l(vessel.form))
    level = shapes.level_m(vessel.form, min(max(fraction, 0.0), 1.0) * full)
    return float(level) / float(shapes.full_level_m(vessel.form))
