"""The stock page: columns side by side, and what to order today in a sentence."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from plant import clock, scene
from plant.board import pictures, shown
from plant.dosing.figures import VesselStock
from plant.scene import window
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
    remarks: tuple[str, ...]


@dataclass(frozen=True)
class Store:
    """All vessels of a works at a moment."""

    sentence: str
    columns: list[Column]
    windows: scene.Scene | None
    windows_narrow: scene.Scene | None
    rows: list[VesselStock]


def store(stated: Stated, rows: Sequence[VesselStock], *, now: dt.datetime, calendar: clock.Calendar) -> Store:
    """The page's content from the stock of every vessel."""
    works = stated.works(now)
    today = calendar.local(now).date()
    columns = []
    for row in rows:
        vessel, product = _described(stated, row, now)
        if vessel is None or product is None:
            continue
        contents = str(shown.amount(row.dip_kg, "kg", works)) if row.dip_kg is not None else ""
        picture = pictures.vessel_column(row, vessel, product, per_day_kg=per_day_kg(row, rows), contents=contents, width=280)
        dip = "" if row.dip_at is None else f"dip of {shown.moment(row.dip_at, now, calendar)}"
        state = stated.state("vessel", row.vessel, now)
        columns.append(Column(row.vessel, vessel.name, product.name, state, picture, dip, row.remarks))
    windows = _windows(stated, rows, now)
    title = "When to order"
    wide = window.order_window(title=title, rows=windows, today=today, width=1100) if windows else None
    narrow = window.order_window(title=title, rows=windows, today=today, days=28, width=420) if windows else None
    return Store(order_sentence(windows, today), columns, wide, narrow, list(rows))


def per_day_kg(row: VesselStock, rows: Sequence[VesselStock]) -> float | None:
    """Use of the product, kg of product a day, from its days of supply; None where several vessels share it."""
    if sum(1 for other in rows if other.product == row.product) != 1:
        return None
    if not (row.days_of_supply and row.usable_active_kg and row.active_kg and row.dip_kg):
        return None
    return row.usable_active_kg / row.days_of_supply * row.dip_kg / row.active_kg


def order_sentence(windows: Sequence[window.Window], today: dt.date) -> str:
    """What to order today. Products whose window cannot be computed are named."""
    late = [one.name for one in windows if one.last is not None and one.last < today]
    none = [
        one.name
        for one in windows
        if one.last is not None and one.last >= today and one.first is not None and one.first > one.last
    ]
    last = [one.name for one in windows if one.last == today and one.name not in none]
    open_now = [
        f"{one.name} (until {one.last.day} {one.last:%B})"
        for one in windows
        if one.last is not None and one.last > today and (one.first or today) <= today
    ]
    parts = []
    if late:
        parts.append(f"Order at once, the reserve will be touched: {', '.join(late)}.")
    if last:
        parts.append(f"Order today, it is the last day: {', '.join(last)}.")
    if none:
        parts.append(f"No whole load fits before the reserve is reached: {', '.join(none)}. Ask for a part load.")
    if open_now:
        parts.append(f"May be ordered now: {', '.join(open_now)}.")
    ahead = sorted(
        (one.first, one.name) for one in windows if one.first is not None and one.first > today and one.name not in none
    )
    if not parts and ahead:
        first, name = ahead[0]
        parts.append(f"Nothing to order today. Next is {name}, from {first.day} {first:%B}.")
    unknown = [one.name for one in windows if one.last is None]
    if unknown:
        parts.append(f"No order window can be worked out for {', '.join(unknown)}.")
    return " ".join(parts) or "No product has a lead time and a load stated, so no order window is worked out."


def _windows(stated: Stated, rows: Sequence[VesselStock], now: dt.datetime) -> list[window.Window]:
    """One window a product that is ordered by the load: of its bulk vessels the earliest last day."""
    found: dict[str, window.Window] = {}
    for row in rows:
        vessel, product = _described(stated, row, now)
        if vessel is None or product is None or product.lead_time_days is None or vessel.role not in ("bulk", "silo"):
            continue
        one = window.Window(product.name, row.order_from, row.order_by)
        before = found.get(product.code)
        if before is None or (one.last is not None and (before.last is None or one.last < before.last)):
            found[product.code] = one
    return sorted(found.values(), key=lambda one: (one.last is None, one.last or dt.date.max, one.name))


def _described(stated: Stated, row: VesselStock, now: dt.datetime) -> tuple[described.Vessel | None, described.Product | None]:
    try:
        return stated.vessel(row.vessel, now), stated.product(row.product, now)
    except NotStated:
        return None, None
