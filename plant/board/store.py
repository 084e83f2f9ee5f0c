"""The stock page: columns side by side, and what to order today in a sentence."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from plant import clock, scene
from plant.board import pictures, shown
from plant.dosing.figures import VesselStock
from plant.scene import window
from plant.supply import queries as supply
from plant.works import described
from plant.works.stated import NotStated, Stated


@dataclass(frozen=True)
class Column:
    """One vessel: its picture and what is written under it."""

    code: str
    name: str
    product: str
    state: str
    picture: scene.Scene
    dip: str


@dataclass(frozen=True)
class ProductLine:
    """One product over all its vessels, in words."""

    name: str
    days: str
    per_day: str
    order: str
    why: str
    price: str


@dataclass(frozen=True)
class Store:
    """All vessels of a works at a moment."""

    sentence: str
    columns: list[Column]
    products: list[ProductLine]
    windows: scene.Scene | None
    windows_narrow: scene.Scene | None


def store(
    stated: Stated,
    products: Sequence[supply.ProductSupply],
    rows: Sequence[VesselStock],
    *,
    now: dt.datetime,
    calendar: clock.Calendar,
) -> Store:
    """The page's content from the supply of every product and the stock of every vessel."""
    works = stated.works(now)
    today = calendar.day_of(now)
    by_code = {product.product: product for product in products}
    columns = []
    for row in rows:
        try:
            vessel, product = stated.vessel(row.vessel, now), stated.product(row.product, now)
        except NotStated:
            continue
        contents = str(shown.amount(row.dip_kg, "kg", works)) if row.dip_kg is not None else ""
        per_day = per_day_kg(by_code[row.product])
        picture = pictures.vessel_column(row, vessel, product, per_day_kg=per_day, contents=contents)
        dip = "" if row.dip_at is None else f"dip of {shown.moment(row.dip_at, now, calendar)}"
        state = stated.state("vessel", row.vessel, now)
        columns.append(Column(row.vessel, vessel.name, product.name, state, picture, dip))
    windows = {product.product: window_of(product) for product in products if _by_the_load(stated, product.product, now)}
    ordered = sorted(windows.values(), key=lambda one: (not one.late, one.last or dt.date.max, one.name))
    lines = [_line(product, windows.get(product.product), works, today) for product in products if product.vessels]
    title = "When to order"
    wide = window.order_window(title=title, rows=ordered, today=today, width=1100) if ordered else None
    narrow = window.order_window(title=title, rows=ordered, today=today, days=28, width=420) if ordered else None
    return Store(order_sentence(ordered, today), columns, lines, wide, narrow)


def _by_the_load(stated: Stated, code: str, now: dt.datetime) -> bool:
    product = stated.product(code, now)
    return product.load_kg is not None and product.lead_time_days is not None


def window_of(product: supply.ProductSupply) -> window.Window:
    """A product's order window for the picture."""
    found = product.window
    if found is None:
        return window.Window(product.name, None, None)
    return window.Window(
        product.name, found.order_from, found.order_by, late=found.order_by is None and found.order_from is not None
    )


def _line(product: supply.ProductSupply, found: window.Window | None, works: described.Works, today: dt.date) -> ProductLine:
    days = "not known"
    if product.days_of_supply is not None:
        days = f"{product.days_of_supply:.0f}"
        if product.days_low is not None and round(product.days_low) < round(product.days_of_supply):
            days += f" ({product.days_low:.0f} if use runs high)"
    price = ""
    if product.price_per_active_kg is not None:
        per_kg = shown.in_units(1.0, "kg", works)
        price = f"{product.price_per_active_kg / per_kg[0]:.2f} {product.currency} per {per_kg[1]}".replace("  ", " ")
    return ProductLine(
        name=product.name,
        days=days,
        per_day=str(shown.amount(product.per_day_kg, "kg", works)),
        order=window.words_of(found, today) if found else "not ordered by the load",
        why="; ".join(part for part in (_why(product, found), *product.remarks) if part),
        price=price,
    )


def _why(product: supply.ProductSupply, found: window.Window | None) -> str:
    if product.window is not None:
        return product.window.why
    return "no vessel of it takes a whole load, or too little past" if found else ""


def per_day_kg(product: supply.ProductSupply) -> float | None:
    """Use ahead, kg of product a day, where one vessel holds it all; None where several share it or it is not known."""
    if len(product.vessels) != 1 or not product.per_day_kg:
        return None
    row = product.vessels[0]
    return product.per_day_kg * row.dip_kg / row.active_kg if row.dip_kg and row.active_kg else None


def order_sentence(windows: Sequence[window.Window], today: dt.date) -> str:
    """What to order today. Products whose window cannot be worked out are named."""
    if not windows:
        return "No product has a lead time and a load stated, so no order window is worked out."
    fits = [one for one in windows if one.fits and one.first is not None and one.last is not None]
    late = [one.name for one in windows if one.late]
    none = [one.name for one in windows if one.known and not one.late and not one.fits]
    unknown = [one.name for one in windows if not one.known]
    last = [one.name for one in fits if one.last == today]
    open_now = [
        f"{one.name} (until {one.last.day} {one.last:%B})"
        for one in fits
        if one.last and one.first and one.first <= today < one.last
    ]
    ahead = sorted((one.first, one.name) for one in fits if one.first and one.first > today)
    parts = []
    if late:
        parts.append(f"Order at once, the reserve will be touched: {', '.join(late)}.")
    if last:
        parts.append(f"Order today, it is the last day: {', '.join(last)}.")
    if none:
        parts.append(f"No whole load fits before the reserve is reached: {', '.join(none)}. Ask for a part load.")
    if open_now:
        parts.append(f"May be ordered now: {', '.join(open_now)}.")
    if not parts and ahead:
        first, name = ahead[0]
        parts.append(f"Nothing to order today. Next is {name}, from {first.day} {first:%B}.")
    if unknown:
        parts.append(f"No order window can be worked out for {', '.join(unknown)}.")
    return " ".join(parts)
