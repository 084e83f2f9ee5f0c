"""What else moved when a dose did: the other doses of the meter, the need, the response in the water, the vessel, the feeder.

Each clue is a number, or None where nothing is known; causes.py makes sentences of them.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import fmean, median

from plant.deviations.evidence import Day
from plant.dosing.figures import DayDose
from plant.dosing.need import RESIDUAL_OF
from plant.works.described import DosingPoint, Product
from plant.works.stated import NotStated

BEFORE_DAYS = 28
LEAST = 4
GIVEN_BACK_SDS = 4.0
RESPONSE_OF = RESIDUAL_OF | {
    "NaOH": "pH",
    "Na2CO3": "pH",
    "Ca(OH)2": "hardness",
    "CaO": "hardness",
    "CO2": "pH",
    "H2SO4": "pH",
    "HCl": "pH",
    "NaF": "fluoride",
    "Na2SiF6": "fluoride",
    "H2SiF6": "fluoride",
}
"""What in the water shows that a chemical arrived."""
OF_MODEL = {"target_ph": "pH", "lime_soda": "hardness", "ion_exchange_salt": "hardness", "fluoride": "fluoride"}
LOWERS = frozenset({("lime_soda", "hardness"), ("ion_exchange_salt", "hardness"), ("acid", "pH")})
ACIDS = frozenset({"CO2", "H2SO4", "HCl"})


@dataclass(frozen=True)
class Clues:
    """What is known about a dosing point since a day, against the weeks before it."""

    point: DosingPoint
    product: Product
    used: float | None
    need: float | None
    others: tuple[float, ...]
    response_name: str
    response_sds: float | None
    feeder: float | None
    negative: bool
    given_back: bool
    empty: bool
    still: int
    delivered_days_before: int | None
    lot_days: int | None
    strength_short_pct: float | None
    unknown_days: int
    used_over_need: float | None


def response_of(point: DosingPoint, product: Product) -> tuple[str, int]:
    """The parameter that answers to a dosing point, and whether more of the product raises (+1) or lowers (-1) it."""
    model = str(point.need.get("model", "none"))
    if model == "quench":
        return ("free_chlorine" if point.need.get("of") == "chlorine" else "hydrogen_peroxide"), -1
    name = OF_MODEL.get(model) or RESPONSE_OF.get(product.chemical, "")
    lowers = (model, name) in LOWERS or (name == "pH" and product.chemical in ACIDS) or name == "hardness"
    return name, -1 if lowers else 1


def gather(day: Day, code: str, since: dt.date) -> Clues | None:
    """The clues about a dosing point. None when it is not stated."""
    try:
        point = day.stated.dosing_point(code, day.moment)
        product = day.stated.product(point.product, day.moment)
    except NotStated:
        return None
    rows = day.rows(code)
    name, direction = response_of(point, product)
    sds = response_sds(day, point.sample_point, name, since) if point.sample_point and name else None
    newest = [row for row in rows if row.used_mg_l.value is not None][-2:]
    after = [row for row in rows if row.day >= since]
    lot = _lot(day, point, since)
    # A demand reckoned from the doses themselves moves with a leak as with the water: it is no witness.
    witness = "demand_from" not in point.need
    return Clues(
        point=point,
        product=product,
        used=moved([_ratio(row) for row in rows], rows, since),
        need=moved([_need(row) for row in rows], rows, since) if witness else None,
        others=_others(day, point, since),
        response_name=name,
        response_sds=None if sds is None else sds * direction,
        feeder=_feeder(day, code, since),
        negative=any((row.used_mg_l.value or 0.0) < 0 or "negative use" in row.remarks for row in after),
        given_back=given_back(newest),
        empty=_empty(day, point),
        still=max((_still(day, vessel) for vessel in point.vessels), default=0),
        delivered_days_before=lot[0],
        lot_days=lot[1],
        strength_short_pct=lot[2],
        unknown_days=sum(1 for row in day.of.doses if _unknown(row, code, since, day.day)),
        used_over_need=_over_need(after) if witness else None,
    )


def moved(values: Sequence[float | None], rows: Sequence[DayDose], since: dt.date) -> float | None:
    """The median since a day less the median of the weeks before it; None with too few days on either side."""
    before = [
        value
        for value, row in zip(values, rows, strict=True)
        if value is not None and since - dt.timedelta(days=BEFORE_DAYS) <= row.day < since
    ]
    after = [value for value, row in zip(values, rows, strict=True) if value is not None and row.day >= since]
    if len(before) < LEAST or not after:
        return None
    return median(after) - median(before)


def _ratio(row: DayDose) -> float | None:
    return row.ratio


def _need(row: DayDose) -> float | None:
    design = row.design_mg_l.value
    return row.need_mg_l.value / design if row.need_mg_l.value is not None and design else None


def _others(day: Day, point: DosingPoint, since: dt.date) -> tuple[float, ...]:
    out = []
    for other in day.stated.dosing_points(day.moment):
        if other.code == point.code or other.meter != point.meter:
            continue
        rows = day.rows(other.code)
        found = moved([_ratio(row) for row in rows], rows, since)
        if found is not None:
            out.append(found)
    return tuple(out)


def daily_medians(day: Day, site: str, parameter: str, days_back: int) -> dict[dt.date, float]:
    """The median of each day's usable readings, up to what may be known."""
    by_day: dict[dt.date, list[float]] = {}
    for item in day.points(site, parameter, days_back=days_back):
        if item.usable and item.value is not None and item.statistic in ("reading", "day_mean"):
            by_day.setdefault(day.of.calendar.day_of(item.at), []).append(item.value)
    return {on: median(found) for on, found in by_day.items()}


def response_sds(day: Day, site: str, parameter: str, since: dt.date) -> float | None:
    """How far a parameter moved since a day, in standard deviations of its days before it."""
    medians = daily_medians(day, site, parameter, 45)
    before = [value for on, value in medians.items() if since - dt.timedelta(days=BEFORE_DAYS) <= on < since]
    after = [value for on, value in medians.items() if on >= since]
    if len(before) < 2 * LEAST or not after:
        return None
    middle = median(before)
    spread = 1.4826 * median(abs(value - middle) for value in before)
    spread = max(spread, 0.01 * abs(middle), 1e-9)
    return (fmean(after) - middle) / spread * min(len(after), 4) ** 0.5


def _feeder(day: Day, code: str, since: dt.date) -> float | None:
    """Relative change of what the feeder itself says: draw-down, else its setting."""
    for parameter in ("drawdown", "feeder_setting"):
        medians = daily_medians(day, code, parameter, 45)
        before = [value for on, value in medians.items() if on < since]
        after = [value for on, value in medians.items() if on >= since]
        if before and after and median(before):
            return median(after) / median(before) - 1
    return None


def given_back(newest: Sequence[DayDose]) -> bool:
    """Whether the last two days are off to opposite sides by nearly the same, and far more than their gauges can be: then
    one reading between them is wrong.
    """
    if len(newest) < 2:
        return False
    offs = []
    for row in newest[-2:]:
        if row.ratio is None or not row.design_mg_l.value:
            return False
        off = row.ratio - 1
        if abs(off) < max(GIVEN_BACK_SDS * (row.used_mg_l.sd or 0.0) / row.design_mg_l.value, 0.1):
            return False
        offs.append(off)
    return offs[0] * offs[1] < 0 and abs(offs[0] + offs[1]) < 0.5 * max(abs(offs[0]), abs(offs[1]))


def _empty(day: Day, point: DosingPoint) -> bool:
    """Whether a vessel of the point stood at its heel or below at its last dip."""
    try:
        vessels = [day.stated.vessel(code, day.moment) for code in point.vessels]
    except NotStated:
        return False
    for vessel in vessels:
        found = [item for name in ("level", "weight") for item in day.points(vessel.code, name) if item.usable]
        if not found:
            continue
        lowest = min(item.value or 0.0 for item in found)
        floor = float(vessel.form.get("tare_kg") or 0.0) + vessel.heel_kg if vessel.on_scale else 0.02
        if lowest <= floor:
            return True
    return False


def _still(day: Day, vessel: str) -> int:
    """How many of the newest readings of a vessel are the same, as typed."""
    for parameter in ("level", "weight"):
        found = [item for item in day.points(vessel, parameter, days_back=10) if item.usable]
        if found:
            count = 1
            while count < len(found) and found[-count - 1].text == found[-1].text:
                count += 1
            return count
    return 0


def _lot(day: Day, point: DosingPoint, since: dt.date) -> tuple[int | None, int | None, float | None]:
    """Days from the newest delivery into the point's vessels to ``since``, the age of its lot today, and how weak the last
    test found it.
    """
    found = [item for item in day.of.deliveries if item.vessel in point.vessels and item.taken_at < day.until]
    tests = [item for code in point.vessels for item in day.points(code, "strength", days_back=20) if item.usable]
    if not found:
        return None, None, None
    newest = found[-1]
    on = day.of.calendar.day_of(newest.taken_at)
    made = newest.manufactured_on or on
    short = None
    if tests and tests[-1].value and newest.strength and tests[-1].at > newest.taken_at:
        short = 100 * (newest.strength - tests[-1].value) / newest.strength
    return (since - on).days, (day.day - made).days, short


def _unknown(row: DayDose, code: str, since: dt.date, until: dt.date) -> bool:
    return row.dosing_point == code and since <= row.day < until and row.used_mg_l.value is None


def _over_need(rows: Sequence[DayDose]) -> float | None:
    found = [
        row.used_mg_l.value / row.need_mg_l.value for row in rows if row.used_mg_l.value is not None and row.need_mg_l.value
    ]
    return median(found) - 1 if found else None
