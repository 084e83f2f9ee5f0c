"""When to order: from the first day on which a whole load will fit when it comes, to the last that keeps the reserve.

Pure. Masses in kg of product; use ahead from the forecast. The late edge is reckoned with the high edge of the band, the
early edge with the low one: a load that does not fit is worse than one that comes a day later, and so is an empty tank.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from dataclasses import dataclass

DAY_NAMES = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")


@dataclass(frozen=True)
class Terms:
    """How a product is bought, as the works states it."""

    lead_time_days: float
    load_kg: float
    reserve_days: float = 0.0
    shelf_life_days: float | None = None
    no_delivery_days: tuple[str, ...] = ()


@dataclass(frozen=True)
class Placed:
    """A load already on order."""

    arrives: dt.date
    kg: float


@dataclass(frozen=True)
class Window:
    """Order from, order by; ``why`` says what closes it, or why there is none."""

    order_from: dt.date | None
    order_by: dt.date | None
    why: str

    @property
    def open(self) -> bool:
        return self.order_from is not None and self.order_by is not None and self.order_from <= self.order_by


def arrival(ordered: dt.date, terms: Terms) -> dt.date:
    """The day a load ordered on a day comes: after the lead time, on a day on which loads are delivered."""
    day = ordered + dt.timedelta(days=max(round(terms.lead_time_days), 0))
    for _ in range(7):
        if DAY_NAMES[day.weekday()] not in terms.no_delivery_days:
            return day
        day += dt.timedelta(days=1)
    return day


def window(
    *,
    today: dt.date,
    usable_kg: float,
    room_kg: float,
    terms: Terms,
    use_kg: Callable[[int, str], float],
    placed: Sequence[Placed] = (),
    horizon: int = 110,
) -> Window:
    """The order window of one product.

    ``usable_kg`` is what can be used today, ``room_kg`` what fits today; ``use_kg(days, edge)`` is the use of the next days, kg
    of product, at the ``low``, ``expected`` or ``high`` edge of the band.
    """
    reserve = terms.reserve_days * use_kg(28, "expected") / 28
    order_by = None
    for ahead in range(horizon):
        ordered = today + dt.timedelta(days=ahead)
        comes = (arrival(ordered, terms) - today).days
        left = usable_kg + _came(placed, today, comes) - use_kg(comes, "high")
        if left < reserve:
            break
        order_by = ordered
    order_from = None
    for ahead in range(horizon):
        ordered = today + dt.timedelta(days=ahead)
        comes = (arrival(ordered, terms) - today).days
        if room_kg - _came(placed, today, comes) + use_kg(comes, "low") >= terms.load_kg:
            order_from = ordered
            break
    return _explained(today, order_from, order_by, terms, use_kg)


def _came(placed: Sequence[Placed], today: dt.date, days: int) -> float:
    return sum(order.kg for order in placed if today <= order.arrives <= today + dt.timedelta(days=days))


def _explained(
    today: dt.date,
    order_from: dt.date | None,
    order_by: dt.date | None,
    terms: Terms,
    use_kg: Callable[[int, str], float],
) -> Window:
    if order_from is None:
        return Window(None, order_by, "a whole load does not fit within the time looked ahead")
    if order_by is None:
        return Window(
            order_from, None, "a load ordered today comes after the reserve is reached: order at once and look for cover"
        )
    if order_from > order_by:
        return Window(order_from, order_by, "no window: a whole load fits only after the reserve is reached; order a part load")
    if terms.shelf_life_days is not None and terms.load_kg > use_kg(round(terms.shelf_life_days), "expected"):
        return Window(order_from, order_by, f"a load lasts longer than its shelf life of {terms.shelf_life_days:g} days")
    return Window(order_from, order_by, "open now" if order_from <= today <= order_by else f"opens on {order_from}")
