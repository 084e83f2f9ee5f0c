"""A transfer file, or one transfer typed at a desk: product moved from one vessel to another."""

from __future__ import annotations

from plant.intake import deliveries
from plant.intake import ground as grounds
from plant.intake.cells import Cells, Unreadable
from plant.stock import models

REQUIRED = ("timestamp", "from_vessel", "to_vessel", "quantity", "unit", "carrier_water_L")
OPTIONAL = ("note", "quantity_sd_pct")


def read(cells: dict[str, str], ground: grounds.Ground) -> models.Transfer:
    """An unsaved transfer from the cells of one line. Raises cells.Unreadable.

    A day tank may hold another product than the bulk tank (a dilution of it), so only the vessels themselves are checked.
    """
    line = Cells(cells, ground)
    moment = line.moment("timestamp")
    source = line.code("from_vessel", "vessel", moment.at)
    target = line.code("to_vessel", "vessel", moment.at)
    if source == target:
        raise Unreadable("to_vessel", f"from {source} to {target}", "two different vessels")
    unit = line.choice("unit", deliveries.UNITS)
    if not unit:
        raise Unreadable("unit", "no unit", "one of: " + ", ".join(deliveries.UNITS))
    sd_pct = line.number("quantity_sd_pct", high=50)
    return models.Transfer(
        taken_at=moment.at,
        date_only=moment.date_only,
        from_vessel=source,
        to_vessel=target,
        quantity=line.needed("quantity", above=True),
        unit=unit,
        quantity_sd_pct=0.5 if sd_pct is None else sd_pct,
        carrier_water_l=line.number("carrier_water_L") or 0.0,
        note=line.text("note", 2000),
        marks=[],
    )


def key_of(transfer: models.Transfer) -> tuple[object, ...]:
    """What makes two lines speak of the same movement."""
    return transfer.taken_at, transfer.date_only, transfer.from_vessel, transfer.to_vessel


VALUES = ("quantity", "unit", "quantity_sd_pct", "carrier_water_l")
