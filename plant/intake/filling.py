"""Whether a load goes into a vessel: what it holds by its last dip and what came since, against what it may hold.

What was used since the last dip isn't taken off: an overfill is a spill, so the older figure errs to the safe side.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from chemistry import errors, vessels
from plant.intake import deliveries, ground, meeting
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.stock import models
from plant.stock import queries as stock
from plant.works import described
from plant.works.stated import Stated

OLDEST_DIP = dt.timedelta(hours=30)


@dataclass(frozen=True)
class Room:
    """What a vessel held at its last dip, what came since, and the most it may hold; litres, None where unknown."""

    held_l: float | None
    came_since_l: float
    most_l: float | None
    dip_at: dt.datetime | None

    @property
    def room_l(self) -> float | None:
        if self.held_l is None or self.most_l is None:
            return None
        return self.most_l - self.held_l - self.came_since_l


def room(book: Book, stated: Stated, vessel: described.Vessel, at: dt.datetime) -> Room:
    """The room in a vessel at a moment. A vessel on a scale, and one without a dip, have no known room."""
    if vessel.on_scale:
        return Room(None, 0.0, None, None)
    most = vessels.full_volume_l(vessel.form) * vessel.max_fill_pct / 100
    level = readings.latest(book, vessel.code, "level", before=at)
    volume = readings.latest(book, vessel.code, "volume", before=at)
    last = max((point for point in (level, volume) if point is not None), key=lambda point: point.at, default=None)
    if last is None or last.value is None:
        return Room(None, 0.0, most, None)
    try:
        held = last.value if last.parameter == "volume" else _volume(vessel, last)
    except errors.ChemistryError:
        return Room(None, 0.0, most, last.at)
    here = ground.Ground(stated, stated.calendar(at))
    came = [
        deliveries.volume_l(delivery, here) or 0.0
        for delivery in stock.deliveries(book, start=last.at, end=at + dt.timedelta(seconds=1), vessels=[vessel.code])
    ]
    return Room(held, sum(came), most, last.at)


def _volume(vessel: described.Vessel, point: readings.Point) -> float:
    assert point.value is not None
    top = vessels.full_level_m(vessel.form)
    level = point.value / 100 * top if point.unit == "%" else point.value
    return float(vessels.volume_l(vessel.form, min(max(level * vessel.level_factor, 0.0), top)))


def problems(book: Book, stated: Stated, delivery: models.Delivery, at: dt.datetime) -> list[str]:
    """Why a load may not be connected; empty when nothing speaks against it that is known here."""
    value = stated.value("vessel", delivery.vessel, at)
    if value is None:
        return [f"{delivery.vessel} is not a vessel of this works."]
    vessel = described.vessel(delivery.vessel, value)
    litres = deliveries.volume_l(delivery, ground.Ground(stated, stated.calendar(at)))
    against = meeting.problems(stated, vessel, delivery.product, at, what="load")
    return against + overfill(book, stated, vessel, litres, at, what="load")


def transfer_problems(book: Book, stated: Stated, transfer: models.Transfer, at: dt.datetime) -> list[str]:
    """Why product may not be moved from one vessel into another."""
    values = [stated.value("vessel", code, at) for code in (transfer.from_vessel, transfer.to_vessel)]
    if None in values:
        return ["One of the two is not a vessel of this works."]
    source = described.vessel(transfer.from_vessel, values[0] or {})
    target = described.vessel(transfer.to_vessel, values[1] or {})
    litres = deliveries.quantity_l(transfer.quantity, transfer.unit, stated.value("product", source.product, at) or {})
    whole = None if litres is None else litres + transfer.carrier_water_l
    against = meeting.problems(stated, target, source.product, at, what="transfer")
    return against + overfill(book, stated, target, whole, at, what="transfer")


def overfill(
    book: Book, stated: Stated, vessel: described.Vessel, litres: float | None, at: dt.datetime, *, what: str
) -> list[str]:
    """Whether so many litres go in, by the last dip; what can't be known stops nothing."""
    space = room(book, stated, vessel, at)
    if litres is not None and space.room_l is not None and litres > space.room_l:
        dip = stated.calendar(at).local(space.dip_at).strftime("%d %b %H:%M") if space.dip_at else "no dip"
        return [
            f"The {what} is {litres:,.0f} L; there is room for {max(space.room_l, 0):,.0f} L up to {vessel.max_fill_pct:g} % "
            f"(by the dip of {dip}). Do not connect; take a fresh dip, or have part of it taken back."
        ]
    if litres is not None and space.most_l is not None and litres > space.most_l:
        return [f"The {what} is {litres:,.0f} L, the whole vessel may hold {space.most_l:,.0f} L. Do not connect."]
    return []
