"""Fetches what a span of days needs, in a fixed number of queries, and turns it into marks, movements, pours and tests."""

from __future__ import annotations

import bisect
import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass, field

from chemistry import errors, units, vessels
from plant.dosing import products
from plant.dosing.contents import Contents, Pour, StrengthTest
from plant.dosing.spells import Mark, Movement
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.stock import models as stock_models
from plant.stock import queries as stock
from plant.works.described import Meter, Product, Vessel
from plant.works.stated import NotStated, Stated

VESSEL_PARAMETERS = ("level", "volume", "weight", "container_change")
COUNTER_PARAMETERS = ("totaliser", "totaliser_reset", "volume")


@dataclass
class Facts:
    """Everything observed in a span, by series, and what is stated."""

    book: Book
    stated: Stated
    start: dt.datetime
    end: dt.datetime
    known: int | None
    series: dict[tuple[str, str], list[Point]]
    deliveries: list[stock_models.Delivery]
    transfers: list[stock_models.Transfer]
    problems: dict[str, list[str]] = field(default_factory=dict)
    counted: set[tuple[object, ...]] = field(default_factory=set)

    def usable(self, site: str, parameter: str) -> list[Point]:
        """Points of a series that may enter operating figures; of a conflicting pair the first stands until it is settled."""
        seen: set[tuple[dt.datetime, str, str]] = set()
        out = []
        for point in self.series.get((site, parameter), ()):
            key = (point.at, point.sample, point.statistic)
            if point.usable and key not in seen:
                seen.add(key)
                out.append(point)
        return out

    def problem(self, site: str, words: str) -> None:
        found = self.problems.setdefault(site, [])
        if words not in found:
            found.append(words)


def facts(
    book: Book,
    stated: Stated,
    *,
    start: dt.datetime,
    end: dt.datetime,
    sites: set[str],
    known: int | None,
) -> Facts:
    """Reads the span [start, end) for the named sites: three queries (and one for settlements where there are doubts)."""
    points = readings.points(book, start=start, end=end, sites=sites, known=known)
    found = Facts(book, stated, start, end, known, readings.by_series(points), [], [])
    for delivery in stock.deliveries(book, start=start, end=end, known=known):
        key = (delivery.taken_at, delivery.vessel, delivery.product, delivery.lot, delivery.document)
        if _stands(found, delivery, key, [delivery.vessel], "delivery"):
            found.deliveries.append(delivery)
    for transfer in stock.transfers(book, start=start, end=end, known=known):
        vessels_named = [transfer.from_vessel, transfer.to_vessel]
        if _stands(found, transfer, (transfer.taken_at, *vessels_named), vessels_named, "transfer"):
            found.transfers.append(transfer)
    return found


def _stands(
    found: Facts,
    row: stock_models.Delivery | stock_models.Transfer,
    key: tuple[object, ...],
    vessels_named: list[str],
    what: str,
) -> bool:
    """Whether a movement counts. Of two that contradict each other the first does, until one is reversed, as with readings;
    one that is physically impossible does not. What is left out is named."""
    contradicts = "conflict" in row.marks and key in found.counted
    if not contradicts and "impossible" not in row.marks:
        found.counted.add(key)
        return True
    why = "it contradicts an earlier one" if contradicts else "it is more than the vessel can hold"
    for vessel in vessels_named:
        found.problem(vessel, f"{what} of {row.taken_at:%Y-%m-%d %H:%M} UTC not counted: {why}; reverse the wrong one")
    return False


def vessel_marks(found: Facts, code: str) -> list[Mark]:
    """Contents of a vessel at each dip or weighing: litres, or kg on a scale. A dip outside the shape is named, not used."""
    by_time: dict[dt.datetime, list[Mark]] = {}
    for parameter in VESSEL_PARAMETERS:
        for point in found.usable(code, parameter):
            if any(not mark.begins for mark in by_time.get(point.at, ())) and parameter != "container_change":
                continue
            try:
                mark = _vessel_mark(found.stated.vessel(code, point.at), point)
            except (errors.ChemistryError, NotStated) as problem:
                found.problem(code, f"{parameter} {point.typed} {point.typed_unit} not used: {problem}")
                continue
            if mark is not None:
                by_time.setdefault(point.at, []).append(mark)
    return [mark for at in sorted(by_time) for mark in by_time[at]]


def _vessel_mark(vessel: Vessel, point: Point) -> Mark | None:
    form = vessel.form
    value = point.value or 0.0
    if vessel.on_scale:
        if point.parameter not in ("weight", "container_change"):
            return None
        sd = float(form.get("weight_sd_kg") or 0.0)
        return Mark(
            point.at,
            float(vessels.net_mass_kg(form, value)),
            sd,
            point.ref,
            point.corrected,
            begins=point.parameter == "container_change",
        )
    if point.parameter == "level":
        shown = float(vessels.level_from_pct(form, value)) if point.unit == "%" else value
        level = shown * vessel.level_factor
        litres = float(vessels.volume_l(form, level))
    elif point.parameter == "volume":
        litres = value
        level = float(vessels.level_m(form, litres))
    else:
        return None
    sd = vessel.level_sd_m * float(vessels.dvolume_dlevel_l_per_m(form, level))
    return Mark(point.at, litres, sd, point.ref, point.corrected)


def counter_marks(found: Facts, meter: Meter) -> list[Mark]:
    """A totaliser's counts, in its own unit; after a reset the next count begins anew."""
    marks = []
    resets = {point.at: point for point in found.usable(meter.code, "totaliser_reset")}
    counts = found.usable(meter.code, "totaliser")
    pending = sorted(resets)
    for point in counts:
        begins = False
        while pending and pending[0] <= point.at:
            old = resets[pending.pop(0)]
            marks.append(Mark(old.at, old.value or 0.0, 0.0, old.ref, old.corrected))
            begins = True
        marks.append(Mark(point.at, point.value or 0.0, 0.0, point.ref, point.corrected, begins))
    if counts:
        return marks
    total = 0.0
    for point in found.usable(meter.code, "volume"):
        # A meter that reports volumes: each is what passed since the one before; a date's is that operating day's.
        if point.date_only:
            calendar = found.stated.calendar(point.at)
            start, end = calendar.bounds(calendar.local(point.at).date())
            marks.append(Mark(start, total, 0.0, point.ref, point.corrected, begins=True))
            total += point.value or 0.0
            marks.append(Mark(end, total, 0.0, point.ref, point.corrected))
            continue
        total += point.value or 0.0
        marks.append(Mark(point.at, total, 0.0, point.ref, point.corrected))
    return marks


def most_per_hour(meter: Meter) -> float | None:
    """The most the meter can count in an hour, in its own unit."""
    if meter.max_flow_m3_per_h is None or units.kind_of(meter.unit) != "volume":
        return None
    return float(units.convert(meter.max_flow_m3_per_h, "m3", meter.unit))


def store_temperature(found: Facts, vessel: Vessel, product: Product) -> Callable[[dt.datetime], float]:
    """The store's temperature at an instant: the vessel's last reading, else what is stated, else 20 °C."""
    points = found.usable(vessel.code, "temperature")
    times = [point.at for point in points]
    stated = product.storage_temperature_C

    def at(moment: dt.datetime) -> float:
        index = bisect.bisect_right(times, moment)
        if index:
            return points[index - 1].value or 0.0
        return products.USUAL_STORE_C if stated is None else stated

    return at


def delivered(found: Facts, delivery: stock_models.Delivery) -> tuple[Pour, Movement]:
    """A delivery as what is poured in, and as a movement in the vessel's own unit.

    Raises NotStated, NoDensity, ChemistryError.
    """
    vessel = found.stated.vessel(delivery.vessel, delivery.taken_at)
    product = found.stated.product(delivery.product, delivery.taken_at)
    density = delivery.density_kg_per_l or product.density_kg_per_L
    kg = products.quantity_kg(delivery.quantity, delivery.unit, density)
    share = products.fraction(product, delivery.strength, delivery.strength_basis or None, density)
    contents = Contents(delivery.taken_at, share, share, density, (delivery.lot,) if delivery.lot else ())
    if delivery.strength_at == "manufacture" and delivery.manufactured_on:
        made = found.stated.calendar(delivery.taken_at).noon(delivery.manufactured_on)
        law = products.decay_of(product, store_temperature(found, vessel, product))
        contents = Contents(made, share, share, density, contents.lots).aged(delivery.taken_at, law)
    amount = kg if vessel.on_scale else kg / _density(density, vessel)
    movement = Movement(delivery.taken_at, amount, amount * delivery.quantity_sd_pct / 100, delivery.ref)
    return Pour(delivery.taken_at, kg, contents, 0.0, delivery.ref), movement


def _density(density: float | None, vessel: Vessel) -> float:
    if not density:
        raise products.NoDensity(f"{vessel.code} is known by level, and no density is stated for what is in it")
    return density


def strength_tests(found: Facts, vessel: Vessel, product: Product) -> list[StrengthTest]:
    """Strength tests of a vessel's contents, on the product's own basis."""
    out = []
    for point in found.usable(vessel.code, "strength"):
        try:
            out.append(StrengthTest(point.at, products.fraction(product, point.value), point.ref))
        except errors.ChemistryError as problem:
            found.problem(vessel.code, f"strength test {point.typed} not used: {problem}")
    return out
