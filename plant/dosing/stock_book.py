"""What each vessel holds: by the book, by the dip, and what lies between.

The book starts from an accepted count, adds what came in, and takes off what went out and what a witness other than the
dip says was used. Without a witness it stands on expected use (water treated × recent use per ML) and says so: then book and
dip can still disagree, but the software can't tell a leak from a change of dose.
"""

from __future__ import annotations

import dataclasses
import datetime as dt
import math
import statistics
from dataclasses import dataclass

from plant import clock
from plant.dosing import carry, products
from plant.dosing.figures import ProductReconciliation, VesselStock
from plant.dosing.reckoning import Reckoning, VesselWalk, capacity, consumption
from plant.dosing.spells import Mark
from plant.dosing.witness import witnessed
from plant.ledger.models import Book
from plant.works import queries as works
from plant.works.described import DosingPoint, Product
from plant.works.stated import Stated

RECENT_DAYS = 28
BOOK_DAYS = 7
"""How long the book runs on before it starts again from a count."""


def stock(book: Book, at: dt.datetime, *, known: int | None = None, stated: Stated | None = None) -> list[VesselStock]:
    """Every vessel in force at a moment, in the order stated."""
    return stocks(book, [at], known=known, stated=stated)[at]


def stocks(
    book: Book, moments: list[dt.datetime], *, known: int | None = None, stated: Stated | None = None
) -> dict[dt.datetime, list[VesselStock]]:
    """``stock`` at several moments, from one reckoning that covers them all."""
    if not moments:
        return {}
    stated = stated or works.stated(book, known=known)
    calendar = stated.calendar(max(moments))
    back = dt.timedelta(days=RECENT_DAYS + BOOK_DAYS + 1)
    days = clock.days(calendar.day_of(min(moments)) - back, calendar.day_of(max(moments)))
    whole = carry.reckon(book, stated, days, known=known, water=False)
    found = {}
    for at in moments:
        day = calendar.day_of(at)
        # Each moment sees its own weeks and no others, as if it had been asked alone.
        out = dataclasses.replace(whole, days=clock.days(day - back, day))
        supply = {product.code: _supply(out, product, at) for product in stated.products(at)}
        found[at] = [
            _vessel(out, out.walks[vessel.code], at, supply) for vessel in stated.vessels(at) if vessel.code in out.walks
        ]
    return found


@dataclass(frozen=True)
class Supply:
    """A product over all its vessels."""

    usable_active_kg: float | None
    active_per_day_kg: float | None

    @property
    def days(self) -> float | None:
        if self.usable_active_kg is None or self.active_per_day_kg is None or self.active_per_day_kg <= 0:
            return None
        return max(self.usable_active_kg, 0.0) / self.active_per_day_kg


def _points_of(out: Reckoning, product: str, at: dt.datetime) -> list[DosingPoint]:
    return [point for point in out.stated.dosing_points(at) if point.product == product]


def _supply(out: Reckoning, product: Product, at: dt.datetime) -> Supply:
    per_day = []
    last = out.calendar.day_of(at)
    for back in range(1, RECENT_DAYS + 1):
        day = last - dt.timedelta(days=back)
        if day in out.days:
            drawn = [consumption(out, point, product, day).active_kg for point in _points_of(out, product.code, at)]
            if drawn and all(item is not None for item in drawn):
                per_day.append(sum(item for item in drawn if item is not None))
    usable = 0.0
    seen = False
    for walked in out.walks.values():
        if walked.vessel.product != product.code or out.stated.state("vessel", walked.vessel.code, at) == "off":
            continue
        held = _held(walked, at)
        if held is None:
            continue
        seen = True
        usable += products.active_kg(product, held.usable_kg, held.usable_kg * held.fraction)
    rate = statistics.fmean(per_day) if per_day else None
    return Supply(usable if seen else None, rate)


@dataclass(frozen=True)
class Held:
    """What is in a vessel by its last dip."""

    mark: Mark
    kg: float
    usable_kg: float
    fraction: float
    sd_kg: float


def _held(walked: VesselWalk, at: dt.datetime) -> Held | None:
    marks = [mark for mark in walked.marks if mark.at <= at]
    contents = walked.walk.contents_at(at, walked.decay)
    if not marks or contents is None:
        return None
    mark = marks[-1]
    per_unit = _kg_per_unit(walked, mark.at)
    heel = walked.vessel.heel_kg if walked.vessel.on_scale else walked.vessel.heel_L * per_unit
    kg = mark.amount * per_unit
    return Held(mark, kg, max(kg - heel, 0.0), contents.fraction, mark.sd * per_unit)


def _kg_per_unit(walked: VesselWalk, at: dt.datetime) -> float:
    if walked.walk.in_kg:
        return 1.0
    contents = walked.walk.contents_at(at, walked.decay)
    return (contents.density_kg_l if contents else None) or walked.product.density_kg_per_L or 0.0


def _vessel(out: Reckoning, walked: VesselWalk, at: dt.datetime, supply: dict[str, Supply]) -> VesselStock:
    held = _held(walked, at)
    code, product = walked.vessel.code, walked.product
    if held is None:
        return VesselStock(
            code,
            product.code,
            at,
            None,
            None,
            None,
            None,
            None,
            None,
            None,
            None,
            product.strength_basis,
            None,
            remarks=("no level or weight on record yet",),
        )
    remarks: list[str] = []
    booked = _book(out, walked, held.mark, remarks)
    contents = walked.walk.contents_at(at, walked.decay)
    assert contents is not None  # held is known
    total = supply[product.code]
    size = capacity(walked.vessel)
    active = products.active_kg(product, held.kg, held.kg * held.fraction)
    usable = products.active_kg(product, held.usable_kg, held.usable_kg * held.fraction)
    if out.stated.state("vessel", code, at) == "off":
        usable = 0.0
        remarks.append("out of service or in quarantine: nothing of it counts as usable")
    if at - held.mark.at > dt.timedelta(hours=30):
        remarks.append(f"last dip {(at - held.mark.at).total_seconds() / 3600:.0f} h ago")
    remarks += out.found.problems.get(code, [])
    difference = None if booked is None else held.kg - booked[0]
    return VesselStock(
        vessel=code,
        product=product.code,
        at=at,
        book_kg=None if booked is None else booked[0],
        dip_kg=held.kg,
        dip_at=held.mark.at,
        difference_kg=difference,
        difference_sd_kg=None if booked is None else math.hypot(booked[1], held.sd_kg),
        active_kg=active,
        usable_active_kg=usable,
        strength=products.strength(product, contents),
        strength_basis=product.strength_basis,
        days_of_supply=total.days,
        level_fraction=None if not size else held.mark.amount / size,
        remarks=tuple(dict.fromkeys(remarks)),
    )


def _book(out: Reckoning, walked: VesselWalk, dip: Mark, remarks: list[str]) -> tuple[float, float] | None:
    """kg by the book at the time of the dip, and its standard uncertainty."""
    earlier = [mark for mark in walked.marks if mark.at <= dip.at - dt.timedelta(days=BOOK_DAYS)]
    candidates = earlier[-1:] or [mark for mark in walked.marks if mark.at < dip.at][:1]
    if not candidates or any(mark.begins for mark in walked.marks if candidates[0].at < mark.at <= dip.at):
        remarks.append("no earlier count for the book to stand on")
        return None
    count = candidates[0]
    per_unit = _kg_per_unit(walked, dip.at)
    moved = [item for item in walked.movements if count.at <= item.at < dip.at]
    kg = (count.amount + sum(item.amount for item in moved)) * per_unit
    variance = (count.sd * per_unit) ** 2 + sum((item.sd * per_unit) ** 2 for item in moved)
    for point in out.stated.dosing_points(dip.at):
        if walked.vessel.code not in point.vessels:
            continue
        used = _used_by_witness(out, walked, point, count.at, dip.at, remarks)
        if used is None:
            return None
        kg -= used[0]
        variance += used[1] ** 2
    return kg, math.sqrt(variance)


def _used_by_witness(
    out: Reckoning,
    walked: VesselWalk,
    point: DosingPoint,
    start: dt.datetime,
    end: dt.datetime,
    remarks: list[str],
) -> tuple[float, float] | None:
    density = None if walked.walk.in_kg else _kg_per_unit(walked, end)
    share = 1 / len(point.vessels)
    if len(point.vessels) == 1:
        said = witnessed(out, point, start, end, density or walked.product.density_kg_per_L)
        if said is not None:
            remarks.append(f"book stands on {said.words}")
            return said.kg, said.sd_kg
    rates, volume = [], 0.0
    for day in out.days:
        first, last = out.bounds(day)
        passed = out.volume(point.meter, day).amount
        if not passed:
            continue
        if last <= start:
            drawn = consumption(out, point, walked.product, day).product_kg
            if drawn is not None and drawn > 0:
                rates.append(drawn / passed)
        overlap = (min(last, end) - max(first, start)) / (last - first)
        volume += passed * max(overlap, 0.0)
    if len(rates) < 3:
        remarks.append("no second witness, and too little past for an expected use")
        return None
    rate = statistics.median(rates)
    spread = 1.4826 * statistics.median(abs(item - rate) for item in rates)
    remarks.append("no second witness: book stands on expected use (water treated × recent use per ML)")
    kg = rate * volume * share
    # The scatter of the days averages out over the week; what the dose really does meanwhile does not: 3 % is kept for it.
    return kg, kg * math.hypot(spread / rate / math.sqrt(BOOK_DAYS), 0.03)


def reconciliation(
    book: Book,
    first: dt.date,
    last: dt.date,
    *,
    known: int | None = None,
    stated: Stated | None = None,
) -> list[ProductReconciliation]:
    """Each product over operating days: opening + received - witnessed use - closing = unexplained, kg of product."""
    stated = stated or works.stated(book, known=known)
    days = clock.days(first, last)
    out = carry.reckon(book, stated, days, known=known, water=False)
    begin, end = out.calendar.span(first, last)
    return [_reconcile(out, product, begin, end, days) for product in stated.products(end - dt.timedelta(microseconds=1))]


def _reconcile(
    out: Reckoning,
    product: Product,
    begin: dt.datetime,
    end: dt.datetime,
    days: list[dt.date],
) -> ProductReconciliation:
    remarks: list[str] = []
    opening, closing = 0.0, 0.0
    known_opening = known_closing = True
    variance = received = 0.0
    count = 0
    vessels = [walked for walked in out.walks.values() if walked.vessel.product == product.code]
    for walked in vessels:
        for at, is_opening in ((begin, True), (end, False)):
            amount = walked.walk.amount_at(at)
            if amount is None:
                remarks.append(f"{walked.vessel.code}: no reading around {'the opening' if is_opening else 'the closing'}")
                known_opening, known_closing = known_opening and not is_opening, known_closing and is_opening
                continue
            per_unit = _kg_per_unit(walked, at)
            variance += (per_unit * max((mark.sd for mark in walked.marks), default=0.0)) ** 2
            if is_opening:
                opening += amount * per_unit
            else:
                closing += amount * per_unit
        delivered = {pour.ref for pour in walked.pours} & {delivery.ref for delivery in out.found.deliveries}
        for pour in walked.pours:
            if pour.ref in delivered and begin <= pour.at < end:
                received += pour.kg
                count += 1
                variance += (pour.kg * 0.005) ** 2
    used, said, said_variance = _used_and_witnessed(out, product, begin, end, days, vessels)
    if said is None:
        remarks.append("no second witness")
    unexplained = None
    if known_opening and known_closing and vessels and said is not None:
        unexplained = opening + received - said - closing
    return ProductReconciliation(
        product=product.code,
        opening_kg=opening if known_opening and vessels else None,
        received_kg=received,
        closing_kg=closing if known_closing and vessels else None,
        used_by_dips_kg=used,
        witnessed_kg=said,
        unexplained_kg=unexplained,
        unexplained_sd_kg=None if unexplained is None else math.sqrt(variance + said_variance),
        deliveries=count,
        remarks=tuple(dict.fromkeys(remarks)),
    )


def _used_and_witnessed(
    out: Reckoning,
    product: Product,
    begin: dt.datetime,
    end: dt.datetime,
    days: list[dt.date],
    vessels: list[VesselWalk],
) -> tuple[float | None, float | None, float]:
    used: float | None = 0.0
    said: float | None = 0.0
    variance = 0.0
    density = product.density_kg_per_L
    points = _points_of(out, product.code, end - dt.timedelta(microseconds=1))
    for point in points:
        for day in days:
            drawn = consumption(out, point, product, day).product_kg
            used = None if used is None or drawn is None else used + drawn
        witness = witnessed(out, point, begin, end, density)
        if witness is None or said is None:
            said = None
        else:
            said += witness.kg
            variance += witness.sd_kg**2
    return (used if points else None), (said if points else None), variance
