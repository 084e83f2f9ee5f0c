"""How long each product lasts and when to order it, from the stock and the comparison of the past year."""

from __future__ import annotations

import datetime as dt
import functools
from collections import OrderedDict
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace

from chemistry import units
from plant.dosing import products as active
from plant.dosing import queries as dosing
from plant.dosing.figures import VesselStock
from plant.dosing.reckoning import capacity
from plant.ledger.models import Book
from plant.stock import queries as movements
from plant.stock.models import Delivery, Order
from plant.supply.forecast import DayUse, Forecast, forecast
from plant.supply.window import Placed, Terms, Window, window
from plant.works import queries as works
from plant.works.described import Product
from plant.works.stated import Stated

PAST_DAYS = 430
"""A year and what a season needs on either side."""


@dataclass(frozen=True)
class ProductSupply:
    """One product over all its vessels. Masses active are in its dose basis."""

    product: str
    name: str
    usable_active_kg: float | None
    stock_kg: float | None
    per_day_kg: float | None
    days_of_supply: float | None
    days_low: float | None
    days_high: float | None
    forecast: Forecast | None
    window: Window | None
    vessels: tuple[VesselStock, ...]
    price_per_active_kg: float | None = None
    currency: str = ""
    remarks: tuple[str, ...] = ()


_kept: OrderedDict[tuple[object, ...], list[ProductSupply]] = OrderedDict()
KEEP = 64
KEEP_FOR = dt.timedelta(minutes=10)


def supply(book: Book, at: dt.datetime, *, known: int | None = None, stated: Stated | None = None) -> list[ProductSupply]:
    """Every product in force at a moment, in the order stated.

    Kept by this process until the book's head moves, for ten minutes at most: in that time only decay moves it, by less than
    what is printed.
    """
    # Asked of the database: the book at hand may have been read before the entry that is to be seen.
    head = Book.objects.values_list("head_seq", "head_hash").get(pk=book.pk)
    key = (book.pk, book.code, *head, known, int(at.timestamp() // KEEP_FOR.total_seconds()))
    if key not in _kept:
        _kept[key] = _reckoned(book, at, known, stated)
        while len(_kept) > KEEP:
            _kept.popitem(last=False)
    return _kept[key]


def _reckoned(book: Book, at: dt.datetime, known: int | None, stated: Stated | None) -> list[ProductSupply]:
    stated = stated or works.stated(book, known=known)
    vessels = dosing.stock(book, at, known=known, stated=stated)
    calendar = stated.calendar(at)
    yesterday = calendar.day_of(at) - dt.timedelta(days=1)
    history = history_of(book, yesterday, known, stated)
    orders = movements.orders(book, known=known)
    loads = movements.deliveries(book, start=at - dt.timedelta(days=365), end=at, known=known)
    return [
        _one(
            stated,
            product,
            at,
            yesterday,
            history.get(product.code, {}),
            tuple(row for row in vessels if row.product == product.code),
            [order for order in orders if order.product == product.code],
            loads,
        )
        for product in stated.products(at)
    ]


def stock(book: Book, at: dt.datetime, *, known: int | None = None, stated: Stated | None = None) -> list[VesselStock]:
    """Every vessel, its days of supply from the forecast and its product's order window filled in."""
    return by_vessel(supply(book, at, known=known, stated=stated))


def by_vessel(products: Iterable[ProductSupply]) -> list[VesselStock]:
    """The vessels of some products, what is known of the product filled in."""
    out = []
    for product in products:
        for row in product.vessels:
            remarks = [*row.remarks, *product.remarks]
            if product.window is not None:
                remarks.append(f"order: {product.window.why}")
            out.append(
                replace(
                    row,
                    days_of_supply=product.days_of_supply,
                    order_from=product.window.order_from if product.window else None,
                    order_by=product.window.order_by if product.window else None,
                    remarks=tuple(remarks),
                )
            )
    return out


def history_of(book: Book, last: dt.date, known: int | None, stated: Stated) -> dict[str, dict[dt.date, DayUse]]:
    """Use per product and day. Points of one product add up by mass; the water is that of the point that treats most."""
    rows = dosing.comparison(book, last - dt.timedelta(days=PAST_DAYS), last, known=known, stated=stated)
    missing: dict[str, set[dt.date]] = {}
    out: dict[str, dict[dt.date, DayUse]] = {}
    for row in rows:
        if not row.expected:
            continue
        if row.active_kg.value is None or row.volume_ml.value is None:
            missing.setdefault(row.product, set()).add(row.day)
            continue
        before = out.setdefault(row.product, {}).get(row.day, DayUse(0.0, 0.0))
        out[row.product][row.day] = DayUse(
            before.active_kg + max(row.active_kg.value, 0.0), max(before.volume_ml, row.volume_ml.value)
        )
    return {code: {day: use for day, use in found.items() if day not in missing.get(code, ())} for code, found in out.items()}


def _one(
    stated: Stated,
    product: Product,
    at: dt.datetime,
    yesterday: dt.date,
    history: dict[dt.date, DayUse],
    vessels: tuple[VesselStock, ...],
    orders: Sequence[Order],
    loads: Sequence[Delivery],
) -> ProductSupply:
    made = forecast(history, yesterday, design=design_of(stated, product, at))
    usable = _sum(row.usable_active_kg for row in vessels)
    kg = _sum(row.dip_kg for row in vessels)
    remarks = []
    if made is None:
        remarks.append("too little past for a forecast")
    elif made.past_checked == 0:
        remarks.append("band: usual error, the past is too short to tell")
    today = yesterday + dt.timedelta(days=1)
    # One that is overdue may never come: it is named, and keeps nobody from ordering in time.
    placed = [Placed(order.expected_on, order.quantity_kg) for order in orders if order.expected_on >= today]
    remarks += [f"on order: {order}" + ("; overdue, not counted on" if order.expected_on < today else "") for order in orders]
    lasts = None if made is None or usable is None else made.lasts_days(usable)
    price, currency = _price(loads, product)
    return ProductSupply(
        product=product.code,
        name=product.name,
        usable_active_kg=usable,
        stock_kg=kg,
        per_day_kg=None if made is None else made.total(7) / 7,
        days_of_supply=lasts,
        days_low=None if made is None or usable is None else made.lasts_days(usable, high=True),
        days_high=None,
        forecast=made,
        window=_window(stated, product, at, yesterday, made, usable, kg, vessels, placed),
        vessels=vessels,
        price_per_active_kg=price,
        currency=currency,
        remarks=tuple(remarks),
    )


def _sum(values: object) -> float | None:
    found = [value for value in values if value is not None]  # type: ignore[attr-defined]
    return sum(found) if found else None


def design_of(stated: Stated, product: Product, at: dt.datetime) -> Callable[[dt.date], float | None]:
    """The design doses of a product's points added up, on any day, past or stated ahead."""
    points = [point.code for point in stated.dosing_points(at) if point.product == product.code]
    calendar = stated.calendar(at)

    # The check of past forecasts asks each day some dozen times.
    @functools.cache
    def on(day: dt.date) -> float | None:
        moment = calendar.start_of(day) + dt.timedelta(hours=12)
        return _sum(stated.design_dose_mg_l(point, moment) for point in points)

    return on


def _window(
    stated: Stated,
    product: Product,
    at: dt.datetime,
    yesterday: dt.date,
    made: Forecast | None,
    usable: float | None,
    kg: float | None,
    vessels: tuple[VesselStock, ...],
    placed: Sequence[Placed] = (),
) -> Window | None:
    """In kg of product, at the strength the stock has now."""
    if made is None or usable is None or not kg or product.load_kg is None or product.lead_time_days is None:
        return None
    held_active = _sum(row.active_kg for row in vessels) or 0.0
    share = held_active / kg if kg else 0.0
    if share <= 0:
        return None
    room = 0.0
    for row in vessels:
        vessel = stated.vessel(row.vessel, at)
        size = capacity(vessel)
        if vessel.role in ("bulk", "silo") and size and row.dip_kg is not None:
            density = 1.0 if vessel.on_scale else (product.density_kg_per_L or 1.0)
            room = max(room, size * density * vessel.max_fill_pct / 100 - row.dip_kg)
    if room == 0.0:
        return None
    terms = Terms(
        product.lead_time_days, product.load_kg, product.reserve_days or 0.0, product.shelf_life_days, product.no_delivery_days
    )

    def use_kg(days: int, edge: str) -> float:
        low, high = made.band(max(days, 1))
        total = {"low": low, "high": high}.get(edge, made.total(max(days, 1)))
        return (total if days > 0 else 0.0) / share

    today = yesterday + dt.timedelta(days=1)
    return window(today=today, usable_kg=usable / share, room_kg=room, terms=terms, use_kg=use_kg, placed=placed)


def _price(loads: Iterable[Delivery], product: Product) -> tuple[float | None, str]:
    """Price per delivered active kilogram over the last year, by what the certificates say was in the loads."""
    paid = mass = 0.0
    currency = ""
    for delivery in loads:
        if delivery.product != product.code or delivery.cost is None:
            continue
        if currency and delivery.currency != currency:
            return None, ""
        density = delivery.density_kg_per_l or product.density_kg_per_L
        if units.kind_of(delivery.unit) != "mass" and not density:
            continue
        kg = active.quantity_kg(delivery.quantity, delivery.unit, density)
        share = active.fraction(product, delivery.strength, delivery.strength_basis or None, density)
        mass += active.active_kg(product, kg, kg * share)
        paid += delivery.cost
        currency = delivery.currency
    return (paid / mass if mass else None), currency
