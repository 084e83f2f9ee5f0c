"""What the design dose asks of each feeder at the present flow, for the tablet to reckon with while it has no network.

litres of product per m³ of water = design dose / (active mass per mass of product x density): mass balance, common practice,
no source. A feeder is taken to deliver in proportion to its setting between two draw-downs (common practice, no source).
Advice to the operator in charge; the works' own procedure and a fresh draw-down come first.
"""

from __future__ import annotations

import datetime as dt
from typing import Any

from chemistry import errors, units
from plant.dosing import products
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.works import described
from plant.works.stated import NotStated, Stated

LOOK_BACK = dt.timedelta(days=60)
BESIDE = dt.timedelta(hours=2)
"""A setting read this near a draw-down was the one it was drawn at."""


def feeding(book: Book, stated: Stated, now: dt.datetime) -> dict[str, Any]:
    """Per dosing point L and kg per m³ at design dose, mL/min per % of setting; per meter the flow; per vessel the heel."""
    points = stated.dosing_points(now)
    codes = {point.code for point in points}
    fed = readings.points(book, start=now - LOOK_BACK, end=now, sites=codes or {"-"}, parameters={"drawdown", "feeder_setting"})
    meters = {point.meter for point in points}
    return {
        "points": {
            point.code: found
            for point in points
            if (found := _point(stated, now, point, [one for one in fed if one.site == point.code]))
        },
        "meters": {code: found for code in meters if (found := _meter(book, stated, now, code))},
        "heels": {
            vessel.code: {"L": vessel.heel_L, "kg": vessel.heel_kg, "role": vessel.role} for vessel in stated.vessels(now)
        },
    }


def _point(stated: Stated, now: dt.datetime, point: described.DosingPoint, fed: list[Point]) -> dict[str, Any] | None:
    dose = stated.design_dose_mg_l(point.code, now)
    if dose is None or stated.state("dosing_point", point.code, now) != "in_service":
        return None
    try:
        product = stated.product(point.product, now)
        active = products.active_kg(product, 1.0, products.fraction(product))
    except (NotStated, errors.ChemistryError):
        return None
    kg_per_m3 = dose / 1000 / active if active > 0 else None
    if kg_per_m3 is None:
        return None
    density = product.density_kg_per_L
    return {
        "meter": point.meter,
        "vessels": list(point.vessels),
        "design_mg_l": dose,
        "kg_per_m3": kg_per_m3,
        "l_per_m3": kg_per_m3 / density if density else None,
        "ml_min_per_pct": _slope(fed),
    }


def _slope(fed: list[Point]) -> float | None:
    """mL/min for each % of setting, by the newest draw-down with a setting beside it."""
    settings = [one for one in fed if one.parameter == "feeder_setting" and one.usable and one.value and one.unit == "%"]
    for drawn in reversed([one for one in fed if one.parameter == "drawdown" and one.usable and one.value]):
        beside = [one for one in settings if abs(one.at - drawn.at) <= BESIDE]
        if beside:
            nearest = min(beside, key=lambda one: abs(one.at - drawn.at))
            return float(drawn.value) / float(nearest.value)  # type: ignore[arg-type]
    return None


def _meter(book: Book, stated: Stated, now: dt.datetime, code: str) -> dict[str, Any] | None:
    """The meter's unit in m³, and the mean flow between its two newest readings in m³/h; None for a meter of product."""
    try:
        meter = stated.meter(code, now)
        if units.kind_of(meter.unit) != "volume":
            return None
        to_m3 = float(units.volume_l(1.0, meter.unit)) / 1000
    except (NotStated, errors.ChemistryError):
        return None
    seen = [
        one
        for one in readings.points(book, start=now - LOOK_BACK, end=now, sites={code}, parameters={"totaliser"})
        if one.usable and one.value is not None
    ][-2:]
    flow = None
    if len(seen) == 2:
        hours = (seen[1].at - seen[0].at).total_seconds() / 3600
        passed = float(seen[1].value) - float(seen[0].value)  # type: ignore[arg-type]
        flow = passed * to_m3 / hours if hours > 0 and passed > 0 else None
    return {"to_m3": to_m3, "flow_m3_h": flow}
