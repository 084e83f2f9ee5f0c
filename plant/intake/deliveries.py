"""A delivery file, or one delivery typed at a desk: a load received into one vessel."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from chemistry import errors, units, vessels
from plant.intake import ground as grounds
from plant.intake.cells import Cells, Unreadable
from plant.readings import marks
from plant.stock import models
from plant.works import described, kinds

REQUIRED = ("timestamp", "vessel", "product", "quantity", "unit")
OPTIONAL = (
    "lot",
    "strength",
    "strength_basis",
    "density_kg_per_L",
    "manufactured_on",
    "cost",
    "currency",
    "supplier",
    "document",
    "strength_at",
    "quantity_sd_pct",
)
UNITS = ("kg", "t", "L", "m3", "lb", "US_gal")
STRENGTH_AT = ("delivery", "manufacture")
MOST_STRENGTH = {
    "g_per_L_available_chlorine": 400.0,
    "trade_pct": 40.0,
    "weight_pct_available_chlorine": 100.0,
    "weight_pct": 100.0,
}
"""Above this a strength was written in another basis (weight %: by definition; solutions of chlorine: common practice)."""


def read(cells: dict[str, str], ground: grounds.Ground, *, already_in: bool = False) -> models.Delivery:
    """An unsaved delivery from the cells of one line. Raises cells.Unreadable.

    ``already_in`` says that it has gone in, whatever the vessel should hold: then another product is marked, not refused.
    """
    line = Cells(cells, ground)
    moment = line.moment("timestamp")
    vessel = line.code("vessel", "vessel", moment.at)
    product = line.code("product", "product", moment.at)
    holds = str((ground.value("vessel", vessel, moment.at) or {})["product"])
    if product != holds and not already_in:
        raise Unreadable("product", f"product {product!r} into {vessel}", f"{holds}, which is what {vessel} holds")
    delivery = models.Delivery(
        taken_at=moment.at,
        date_only=moment.date_only,
        vessel=vessel,
        product=product,
        quantity=line.needed("quantity", above=True),
        unit=line.choice("unit", UNITS),
        quantity_sd_pct=_or(line.number("quantity_sd_pct", high=50), 0.5),
        lot=line.text("lot", 60),
        strength=line.number("strength", above=True),
        strength_basis=line.choice("strength_basis", kinds.STRENGTH_BASES),
        strength_at=line.choice("strength_at", STRENGTH_AT, "delivery"),
        density_kg_per_l=line.number("density_kg_per_L", low=0.2, high=3.0),
        manufactured_on=line.date("manufactured_on"),
        cost=line.number("cost"),
        currency=line.text("currency", 8),
        supplier=line.text("supplier", 80),
        document=line.text("document", 120),
        marks=[],
    )
    _check(delivery, ground)
    if product != holds:
        delivery.marks = [*delivery.marks, marks.WRONG_PRODUCT]
    return delivery


def _or(value: float | None, default: float) -> float:
    return default if value is None else value


def _check(delivery: models.Delivery, ground: grounds.Ground) -> None:
    if not delivery.unit:
        raise Unreadable("unit", "no unit", "one of: " + ", ".join(UNITS))
    if delivery.strength is not None:
        if not delivery.strength_basis:
            raise Unreadable("strength_basis", "a strength without its basis", "one of: " + ", ".join(kinds.STRENGTH_BASES))
        most = MOST_STRENGTH[delivery.strength_basis]
        if delivery.strength > most:
            raise Unreadable(
                "strength", f"strength {delivery.strength:g} {delivery.strength_basis}", f"at most {most:g} in that basis"
            )
    if delivery.strength_at == "manufacture" and delivery.manufactured_on is None:
        raise Unreadable("manufactured_on", "strength_at manufacture without manufactured_on", "the date it was made")
    if delivery.manufactured_on and delivery.manufactured_on > ground.calendar.local(delivery.taken_at).date():
        raise Unreadable("manufactured_on", f"manufactured_on {delivery.manufactured_on}", "a date not after the delivery")
    if not _goes_in(delivery, ground):
        delivery.marks = [marks.IMPOSSIBLE]


def _goes_in(delivery: models.Delivery, ground: grounds.Ground) -> bool:
    """Whether the whole vessel could hold the load at all; what it held already is not looked at here."""
    value = ground.value("vessel", delivery.vessel, delivery.taken_at)
    assert value is not None
    vessel = described.vessel(delivery.vessel, value)
    litres = volume_l(delivery, ground)
    if vessel.on_scale or litres is None:
        return True
    try:
        return litres <= 1.02 * vessels.full_volume_l(vessel.form)
    except errors.ChemistryError:
        return True


def volume_l(delivery: models.Delivery, ground: grounds.Ground) -> float | None:
    """The load in litres, by its own density or the product's; None where neither is known."""
    product = ground.value("product", delivery.product, delivery.taken_at) or {}
    return quantity_l(delivery.quantity, delivery.unit, product, delivery.density_kg_per_l)


def quantity_l(quantity: float, unit: str, product: Mapping[str, Any], density_kg_l: float | None = None) -> float | None:
    """A quantity of a product in litres, by the density given or the one stated; None where neither is known."""
    if units.kind_of(unit) == "volume":
        return float(units.volume_l(quantity, unit))
    density = density_kg_l or product.get("density_kg_per_L")
    return float(units.mass_kg(quantity, unit)) / float(density) if density else None


def key_of(delivery: models.Delivery) -> tuple[object, ...]:
    """What makes two lines speak of the same load."""
    return delivery.taken_at, delivery.date_only, delivery.vessel, delivery.product, delivery.lot, delivery.document


VALUES = (
    "quantity",
    "unit",
    "quantity_sd_pct",
    "strength",
    "strength_basis",
    "strength_at",
    "density_kg_per_l",
    "manufactured_on",
    "cost",
    "currency",
    "supplier",
)
