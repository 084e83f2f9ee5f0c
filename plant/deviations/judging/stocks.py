"""Kinds of limit on stock: losses, supply, holdings, age and strength of a lot."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator

from chemistry import errors, units
from plant.deviations import clues, defaults, findings
from plant.deviations.evidence import Day
from plant.deviations.findings import Finding
from plant.deviations.rules import stocks
from plant.dosing.figures import VesselStock
from plant.stock import queries as stock
from plant.stock.models import Delivery
from plant.works.described import Limit, Product
from plant.works.stated import NotStated

LOT_DAYS = 800
USUAL_DAYS = 35
"""How far back a feeder's word is held against the dips to learn how far it is off."""
NO_WITNESS = "no second witness"


def _vessels(day: Day, limit: Limit) -> list[VesselStock]:
    """The vessels that a limit is about, as they stood at the end of the day."""
    found = day.of.stock_at(day.until)
    if limit.subject_kind == "vessel":
        return [item for item in found if item.vessel == limit.subject]
    if limit.subject_kind == "product":
        return [item for item in found if item.product == limit.subject]
    if limit.subject_kind == "dosing_point":
        try:
            point = day.stated.dosing_point(limit.subject, day.moment)
        except NotStated:
            return []
        return [item for item in found if item.vessel in point.vessels]
    return []


def stock_loss(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """The book against the newest dip."""
    if limit.subject_kind == "vessel" and not day.in_service("vessel", limit.subject):
        return
    sigmas = float(limit.keys.get("sigmas", defaults.SIGMAS))
    for item in _vessels(day, limit):
        if item.dip_at is None or item.dip_at <= day.start:
            continue
        if defaults.is_default(limit.code) and _silo_by_level(day, item.vessel):
            continue
        if defaults.is_default(limit.code) and any(NO_WITNESS in remark for remark in item.remarks):
            # Then the book stands on the doses before, and can say nothing that the drift of the dose does not say better.
            continue
        loss = stocks.loss(item.book_kg, item.dip_kg, item.difference_sd_kg, sigmas=sigmas)
        if loss is None or (defaults.is_default(limit.code) and _as_always(day, item, loss, sigmas)):
            continue
        word = "less" if loss.kg > 0 else "more"
        stands = next((remark for remark in item.remarks if "book stands on" in remark), "")
        yield findings.of_limit(
            limit,
            ref,
            day.day,
            subject_kind="vessel",
            subject=item.vessel,
            since=day.start,
            value=f"{-loss.kg:+.0f} kg ({loss.sds:.1f} sd)",
            limit=f"within {sigmas:g} sd of the book",
            sentence=f"{abs(loss.kg):.0f} kg {word} in the vessel than the book says" + (f"; {stands}" if stands else ""),
            size=-loss.kg,
        )


def _as_always(day: Day, item: VesselStock, loss: stocks.Loss, sigmas: float) -> bool:
    """Whether the feeder's word is off by no more than it usually is, or nobody can tell yet what is usual."""
    points = [point for point in day.stated.dosing_points(day.moment) if item.vessel in point.vessels]
    if len(points) != 1:
        return False
    code = points[0].code
    said = clues.daily_medians(day, code, "drawdown", USUAL_DAYS) or clues.daily_medians(
        day, code, "feeder_setting", USUAL_DAYS
    )
    rows = [row for row in day.rows(code)[-USUAL_DAYS:] if row.expected and row.day in said]
    pairs = [(row.product_kg.value, said[row.day]) for row in rows if row.product_kg.value is not None]
    found = stocks.against_usual(pairs, own_sd_kg=item.difference_sd_kg or 0.0)
    if found is None:
        return True
    off, sd = found
    return off * loss.kg <= 0 or abs(off) <= sigmas * sd


def _silo_by_level(day: Day, code: str) -> bool:
    """A dry silo's level is not its content (Davis, Water and Wastewater Engineering, 2010, p. 5-5): no loss is read from it
    unless the works states such a limit.
    """
    try:
        vessel = day.stated.vessel(code, day.moment)
    except NotStated:
        return False
    return vessel.role == "silo" and not vessel.on_scale


def days_of_supply(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Fewer days of supply than stated."""
    low = float(limit.keys["low"])
    seen: set[str] = set()
    for item in _vessels(day, limit):
        # Days of supply are of a product over all its vessels, so they are judged once.
        if item.product in seen or not day.in_service("vessel", item.vessel):
            continue
        seen.add(item.product)
        if stocks.supply_low(item.days_of_supply, low):
            yield findings.of_limit(
                limit,
                ref,
                day.day,
                since=day.start,
                value=f"{item.days_of_supply:.1f} days",
                limit=f"≥ {low:g} days",
                sentence=f"{item.usable_active_kg or 0:.0f} kg usable in {item.vessel}, as active mass",
                size=item.days_of_supply,
            )


def holding(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """The most held at any moment of the day, the new delivery counted before it is used."""
    high = float(limit.keys["high"])
    unit = limit.unit or "kg"
    items = _vessels(day, limit)
    if not items:
        return
    before = {item.vessel: item.dip_kg for item in day.of.stock_at(day.start)}
    peak_kg, volume_l = 0.0, 0.0
    for item in items:
        density = _density(day, item.product)
        received = sum(
            _kg(delivery, density)
            for delivery in day.of.deliveries
            if delivery.vessel == item.vessel and day.start <= delivery.taken_at < day.until
        )
        kg = max(item.dip_kg or 0.0, (before.get(item.vessel) or 0.0) + received) * _counted(item, limit)
        peak_kg += kg
        volume_l += kg / density if density else 0.0
    try:
        peak = units.convert(volume_l, "L", unit) if units.kind_of(unit) == "volume" else units.convert(peak_kg, "kg", unit)
    except errors.ChemistryError:
        return
    if stocks.holding_high(float(peak), high):
        yield findings.of_limit(
            limit,
            ref,
            day.day,
            since=day.start,
            value=f"{float(peak):.0f} {unit}",
            limit=f"< {high:g} {unit} at any moment",
            sentence="most held on the day, deliveries counted before use",
            size=float(peak),
        )


def _counted(item: VesselStock, limit: Limit) -> float:
    """The share of a vessel's product that counts against a holding: solutions stand on their own basis, and below a stated
    strength they count zero.
    """
    cut = limit.keys.get("from_strength")
    if cut is not None and item.strength is not None and item.strength < float(cut):
        return 0.0
    if limit.keys.get("counts") == "active" and item.active_kg is not None and item.dip_kg:
        return item.active_kg / item.dip_kg
    return 1.0


def lot_age(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """The oldest lot that is still in the vessel, first in, first out."""
    for item in _vessels(day, limit):
        try:
            product = day.stated.product(item.product, day.moment)
        except NotStated:
            continue
        life = limit.keys.get("days", product.shelf_life_days)
        oldest = _oldest(day, item, product)
        if oldest is None or life is None:
            continue
        made, lot = oldest
        over = stocks.lot_overdue(day.day, made, float(life))
        if over is not None:
            yield findings.of_limit(
                limit,
                ref,
                day.day,
                subject_kind="vessel",
                subject=item.vessel,
                since=day.of.calendar.start_of(made + dt.timedelta(days=int(life) + 1)),
                value=f"{(day.day - made).days} days",
                limit=f"≤ {float(life):g} days",
                sentence=f"oldest lot{' ' + lot if lot else ''} of {made.isoformat()}",
            )


def strength_low(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """What is in the vessel against the certificate of its newest delivery (or the product's stated strength)."""
    pct = float(limit.keys.get("pct_below_certificate", defaults.PCT_BELOW))
    for item in _vessels(day, limit):
        try:
            product = day.stated.product(item.product, day.moment)
        except NotStated:
            continue
        newest = _deliveries(day, item.vessel)[-1:]
        certificate = product.strength
        if newest and newest[0].strength is not None and newest[0].strength_basis in ("", product.strength_basis):
            certificate = newest[0].strength
        short = stocks.strength_short(item.strength, certificate, pct)
        if short is not None:
            yield findings.of_limit(
                limit,
                ref,
                day.day,
                subject_kind="vessel",
                subject=item.vessel,
                since=day.start,
                value=f"{item.strength:.4g} ({short:.1f} % below {certificate:g})",
                limit=f"at most {pct:g} % below the certificate",
                sentence="strength by its last test and the loss since",
                size=-short / 100,
            )


def _deliveries(day: Day, vessel: str) -> list[Delivery]:
    start = day.start - dt.timedelta(days=LOT_DAYS)
    return stock.deliveries(day.of.book, start=start, end=day.until, vessels=[vessel], known=day.of.known)


def _oldest(day: Day, item: VesselStock, product: Product) -> tuple[dt.date, str] | None:
    """The date and the name of the oldest lot still held: walked back from the newest until the contents are covered."""
    held = item.dip_kg if item.dip_kg is not None else item.book_kg
    if held is None:
        return None
    found: tuple[dt.date, str] | None = None
    for delivery in reversed(_deliveries(day, item.vessel)):
        if held <= 0:
            break
        found = (delivery.manufactured_on or day.of.calendar.day_of(delivery.taken_at), delivery.lot)
        held -= _kg(delivery, product.density_kg_per_L)
    if held > 0 and (opening := day.stated.value("opening_stock", item.vessel, day.moment)):
        made = opening.get("manufactured_on") or str(opening.get("timestamp", ""))[:10]
        return (dt.date.fromisoformat(made), str(opening.get("lot", ""))) if made else found
    return found


def _density(day: Day, product: str) -> float | None:
    try:
        return day.stated.product(product, day.moment).density_kg_per_L
    except NotStated:
        return None


def _kg(delivery: Delivery, density: float | None) -> float:
    if units.kind_of(delivery.unit) == "mass":
        return float(units.convert(delivery.quantity, delivery.unit, "kg"))
    return float(units.convert(delivery.quantity, delivery.unit, "L")) * (delivery.density_kg_per_l or density or 1.0)
