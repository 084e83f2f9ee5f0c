"""Reckons a span of days: every vessel walked, every meter counted, every dosing point compared.

This joins the pure parts to what was gathered. It writes nothing; states.py keeps what may be kept.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass, field

from chemistry import errors, units, vessels
from plant import clock
from plant.dosing import gather, products
from plant.dosing.contents import Contents, Decay, Pour
from plant.dosing.gather import Facts
from plant.dosing.spells import LONGEST_SPELL, Mark, Movement, Spell, Used, content_spells, counter_spells, used_between
from plant.dosing.vessel_walk import Walk, walk
from plant.ledger.models import Book
from plant.stock.models import Transfer
from plant.works.described import DosingPoint, Meter, Product, Vessel
from plant.works.stated import NotStated, Stated

REACH = LONGEST_SPELL + dt.timedelta(hours=1)
"""How far outside a span readings may stand that decide about its ends."""
NEED_REACH = dt.timedelta(days=9)
"""How far back a need may look: seven days of demand and the age a reading may have."""
MACHINES = ("meter", "vessel", "dosing_point")


@dataclass
class VesselWalk:
    """A vessel's walk with what it takes to read it."""

    vessel: Vessel
    product: Product
    walk: Walk
    decay: Decay
    pours: list[Pour]
    movements: list[Movement]
    marks: list[Mark]


@dataclass
class Reckoning:
    """One span of operating days of one works, as known at a seq."""

    book: Book
    stated: Stated
    days: list[dt.date]
    known: int | None
    found: Facts
    cuts: list[dt.datetime]
    calendar: clock.Calendar
    walks: dict[str, VesselWalk] = field(default_factory=dict)
    counters: dict[str, tuple[Meter, list[Spell]]] = field(default_factory=dict)

    def bounds(self, day: dt.date) -> tuple[dt.datetime, dt.datetime]:
        return self.calendar.bounds(day)

    def volume(self, meter_code: str, day: dt.date) -> Used:
        """Water through a meter on a day, ML, its standard uncertainty from the meter's stated accuracy."""
        if meter_code not in self.counters:
            return Used(None, remarks=(f"no meter {meter_code} is stated",))
        meter, spells = self.counters[meter_code]
        used = used_between(spells, *self.bounds(day))
        if used.amount is None:
            used.remarks = tuple(f"{meter_code}: {remark}" for remark in used.remarks)
            return used
        used.amount = float(units.convert(used.amount, meter.unit, "ML"))
        used.sd = abs(used.amount) * meter.accuracy_pct / 100
        return used


def reckoning(
    book: Book,
    stated: Stated,
    days: Sequence[dt.date],
    *,
    known: int | None,
    carried: dict[str, Contents] | None = None,
    water: bool = True,
) -> Reckoning:
    """Gathers and walks. ``carried`` gives each vessel's contents at the start of the first day, where they are known;
    without it the walk begins with the book."""
    calendar = stated.calendar(_asked_at(stated, days[-1]))
    cuts = [calendar.start_of(day) for day in [*days, days[-1] + dt.timedelta(days=1)]]
    start = cuts[0] - NEED_REACH if carried is not None else clock.BEGINNING
    end = cuts[-1] + REACH
    sites = {code for kind in (*MACHINES, *(("sample_point",) if water else ())) for code in stated.subjects(kind)}
    if carried is None:
        # The whole past is wanted of the vessels only; readings of water matter for the days asked and just before.
        found = gather.facts(book, stated, start=start, end=end, sites=set(stated.subjects("vessel")), known=known)
        rest = sites - set(stated.subjects("vessel"))
        found.series |= gather.facts(book, stated, start=cuts[0] - NEED_REACH, end=end, sites=rest, known=known).series
    else:
        found = gather.facts(book, stated, start=start, end=end, sites=sites, known=known)
    out = Reckoning(book, stated, list(days), known, found, cuts, calendar)
    for meter in stated.meters(cuts[-1]):
        marks = gather.counter_marks(found, meter)
        out.counters[meter.code] = (
            meter,
            counter_spells(marks, digits=meter.digits, most_per_hour=gather.most_per_hour(meter)),
        )
    _walk_vessels(out, carried)
    return out


def _asked_at(stated: Stated, day: dt.date) -> dt.datetime:
    """An instant at which to ask for the works' own reckoning of days: late on the day, in any zone."""
    return dt.datetime.combine(day, dt.time(23, 59), dt.UTC) + dt.timedelta(hours=14)


def _walk_vessels(out: Reckoning, carried: dict[str, Contents] | None) -> None:
    at = out.cuts[-1]
    waiting = {vessel.code: vessel for vessel in out.stated.vessels(at)}
    feeds: dict[str, set[str]] = {}
    for transfer in out.found.transfers:
        feeds.setdefault(transfer.to_vessel, set()).add(transfer.from_vessel)
    while waiting:
        # Sources first: what is poured on has the strength of where it came from. A ring is broken at its first vessel.
        ready = [code for code in waiting if not (feeds.get(code, set()) & set(waiting) - {code})] or [next(iter(waiting))]
        for code in ready:
            vessel = waiting.pop(code)
            try:
                product = out.stated.product(vessel.product, at)
            except NotStated as problem:
                out.found.problem(code, str(problem))
                continue
            out.walks[code] = _walk_one(out, vessel, product, (carried or {}).get(code))


def _walk_one(out: Reckoning, vessel: Vessel, product: Product, carried: Contents | None) -> VesselWalk:
    found = out.found
    decay = products.decay_of(product, gather.store_temperature(found, vessel, product))
    marks = gather.vessel_marks(found, vessel.code)
    pours, movements = [], []
    for delivery in found.deliveries:
        if delivery.vessel == vessel.code:
            try:
                pour, movement = gather.delivered(found, delivery)
            except (NotStated, products.NoDensity, errors.ChemistryError) as problem:
                found.problem(vessel.code, f"delivery of {delivery.taken_at:%Y-%m-%d %H:%M} UTC not reckoned: {problem}")
                continue
            pours.append(pour)
            movements.append(movement)
    for transfer in found.transfers:
        _transfer(out, transfer, vessel, product, pours, movements)
    first = carried or _first_contents(out, vessel, product, marks, movements)
    if carried is not None:
        pours = [pour for pour in pours if pour.at >= carried.at]
    tests = [test for test in gather.strength_tests(found, vessel, product) if test.at >= first.at]
    spells = content_spells(marks, movements)
    walked = walk(
        spells=spells,
        first=first,
        pours=sorted(pours, key=lambda pour: pour.at),
        tests=tests,
        decay=decay,
        in_kg=vessel.on_scale,
        cuts=out.cuts,
    )
    return VesselWalk(vessel, product, walked, decay, pours, movements, marks)


def _transfer(
    out: Reckoning,
    transfer: Transfer,
    vessel: Vessel,
    product: Product,
    pours: list[Pour],
    movements: list[Movement],
) -> None:
    """A transfer as this vessel sees it: out of it, or into it at the strength of where it came from."""
    if vessel.code not in (transfer.from_vessel, transfer.to_vessel):
        return
    source = out.walks.get(transfer.from_vessel)
    contents = None if source is None else source.walk.contents_at(transfer.taken_at, source.decay)
    if contents is None:
        share = products.fraction(product)
        contents = Contents(transfer.taken_at, share, share, product.density_kg_per_L)
    try:
        kg = products.quantity_kg(transfer.quantity, transfer.unit, contents.density_kg_l)
    except products.NoDensity as problem:
        out.found.problem(vessel.code, f"transfer of {transfer.taken_at:%Y-%m-%d %H:%M} UTC not reckoned: {problem}")
        return
    density = contents.density_kg_l
    amount = kg if vessel.on_scale or not density else kg / density
    sd = amount * transfer.quantity_sd_pct / 100
    if vessel.code == transfer.from_vessel:
        movements.append(Movement(transfer.taken_at, -amount, sd, transfer.ref))
        return
    movements.append(Movement(transfer.taken_at, amount + transfer.carrier_water_l, sd, transfer.ref))
    pours.append(Pour(transfer.taken_at, kg, contents, transfer.carrier_water_l, transfer.ref))


def _first_contents(
    out: Reckoning,
    vessel: Vessel,
    product: Product,
    marks: list[Mark],
    movements: list[Movement],
) -> Contents:
    """What the walk begins with: the opening stock stated, else the product's stated strength at the first thing known."""
    times = [mark.at for mark in marks] + [movement.at for movement in movements]
    earliest = min(times, default=out.cuts[0])
    opening = out.stated.value("opening_stock", vessel.code, out.cuts[-1])
    strength, basis = None, None
    if opening is not None:
        stamp = dt.datetime.fromisoformat(str(opening["timestamp"]))
        at = stamp if stamp.tzinfo else out.calendar.instant(stamp, ambiguous="first")
        strength, basis = opening.get("strength"), opening.get("strength_basis")
        earliest = min(at.astimezone(dt.UTC), max(earliest, at.astimezone(dt.UTC)))
    try:
        share = products.fraction(product, strength, basis)
    except errors.ChemistryError as problem:
        out.found.problem(vessel.code, str(problem))
        share = 0.0
    return Contents(earliest, share, share, product.density_kg_per_L)


def capacity(vessel: Vessel) -> float | None:
    """What the vessel holds when full: litres, or kg on a scale where its capacity is stated."""
    if vessel.on_scale:
        stated = vessel.form.get("capacity_kg")
        return None if stated is None else float(stated)
    return float(vessels.full_volume_l(vessel.form))


@dataclass
class Consumption:
    """What a dosing point drew on a day, over all its vessels."""

    product_kg: float | None = None
    active_kg: float | None = None
    sd_active_kg: float = 0.0
    weak: bool = False
    interpolated: bool = False
    corrected: bool = False
    remarks: list[str] = field(default_factory=list)
    refs: list[str] = field(default_factory=list)
    parts: list[tuple[VesselWalk | None, Used, float, float]] = field(default_factory=list)


def consumption(out: Reckoning, point: DosingPoint, product: Product, day: dt.date) -> Consumption:
    """By the feed meter where one is stated, else by the vessels' outflow. Strength uncertainty is added by the caller."""
    if point.feed_meter and point.feed_meter in out.counters:
        return _by_feed_meter(out, point, product, day)
    got = Consumption(0.0, 0.0)
    variance = 0.0
    full: list[tuple[float, float | None]] = []
    for code in point.vessels:
        walked = out.walks.get(code)
        if walked is None:
            return _unknown(got, f"no vessel {code} is stated")
        if out.stated.state("vessel", code, out.bounds(day)[0]) == "off" and not walked.marks:
            continue
        used = walked.walk.used(*out.bounds(day))
        if used.amount is None:
            _unknown(got, *(f"{code}: {remark}" for remark in used.remarks))
            continue
        drawn = walked.walk.drawn.get(out.bounds(day))
        if drawn is None or got.product_kg is None or got.active_kg is None:
            continue
        kg, chemical = drawn.kg, drawn.active_kg
        active = products.active_kg(product, kg, chemical)
        got.product_kg += kg
        got.active_kg += active
        per_unit = _active_per_unit(walked, product, day, out)
        variance += (used.sd * per_unit) ** 2
        full.append((used.amount, capacity(walked.vessel)))
        got.interpolated |= used.interpolated
        got.corrected |= used.corrected
        got.remarks += [f"{code}: {remark}" for remark in used.remarks]
        got.refs += used.refs
        got.parts.append((walked, used, kg, active))
        got.remarks += [f"{code}: {words}" for words in out.found.problems.get(code, ()) if str(day) in words]
    got.sd_active_kg = variance**0.5
    known = [(amount, size) for amount, size in full if size]
    got.weak = bool(known) and sum(amount for amount, _ in known) < 0.05 * max(size for _, size in known if size)
    return got


def _unknown(got: Consumption, *remarks: str) -> Consumption:
    got.product_kg = got.active_kg = None
    got.remarks += remarks
    return got


def _active_per_unit(walked: VesselWalk, product: Product, day: dt.date, out: Reckoning) -> float:
    """kg active for one litre (or kg, on a scale) drawn, at the middle of the day: what an error of a dip amounts to."""
    start, end = out.bounds(day)
    contents = walked.walk.contents_at(start + (end - start) / 2, walked.decay)
    if contents is None:
        return 0.0
    kg = 1.0 if walked.walk.in_kg else (contents.density_kg_l or 0.0)
    return products.active_kg(product, kg, kg * contents.fraction)


def _by_feed_meter(out: Reckoning, point: DosingPoint, product: Product, day: dt.date) -> Consumption:
    meter, spells = out.counters[point.feed_meter or ""]
    used = used_between(spells, *out.bounds(day))
    got = Consumption()
    if used.amount is None:
        return _unknown(got, *(f"{meter.code}: {remark}" for remark in used.remarks))
    start, end = out.bounds(day)
    walked = next((out.walks[code] for code in point.vessels if code in out.walks), None)
    contents = None if walked is None else walked.walk.contents_at(start + (end - start) / 2, walked.decay)
    share = contents.fraction if contents else products.fraction(product)
    density = (contents.density_kg_l if contents else None) or product.density_kg_per_L
    try:
        kg = products.quantity_kg(used.amount, meter.unit, density)
    except products.NoDensity as problem:
        return _unknown(got, f"{meter.code}: {problem}")
    got.product_kg, got.active_kg = kg, products.active_kg(product, kg, kg * share)
    got.sd_active_kg = abs(got.active_kg) * meter.accuracy_pct / 100
    got.interpolated, got.corrected = used.interpolated, used.corrected
    got.remarks += [f"by feed meter {meter.code}", *(f"{meter.code}: {remark}" for remark in used.remarks)]
    got.refs += used.refs
    got.parts.append((walked, used, kg, got.active_kg))
    return got
