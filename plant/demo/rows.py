"""Lines of the simulation as unsaved rows of the book, and as what a tablet would have sent."""

from __future__ import annotations

import datetime as dt
from typing import Any

from plant.demo import files
from plant.demo.observe import Booked, Moved, Row
from plant.demo.simulate import Simulated
from plant.readings import marks
from plant.readings.models import Reading
from plant.stock.models import Delivery, Transfer
from plant.works.parameters import PARAMETERS

_UNITLESS = {"pH": ""}
_NOT_STATED = "reason not stated"


def doubtful(row: Row) -> bool:
    """Whether a line as written can hardly be true."""
    number = row.text.lstrip("<")
    return bool(number) and not PARAMETERS[row.parameter].possible(float(number))


def reading(row: Row, text: str | None = None) -> Reading:
    """A line as it is kept. All of a plan's lines are in canonical units already, a meter's in the meter's own."""
    typed = row.text if text is None else text
    out = Reading(
        site=row.site, parameter=row.parameter, taken_at=row.at, typed=typed, typed_unit=row.unit, note=row.note, marks=[]
    )
    if not typed:
        out.state, out.note = Reading.State.NOT_TAKEN, row.note or _NOT_STATED
        return out
    out.qualifier = "<" if typed.startswith("<") else ""
    out.value_text = typed.lstrip("<")
    out.value = float(out.value_text)
    out.unit = _UNITLESS.get(row.unit, row.unit)
    if not PARAMETERS[row.parameter].possible(out.value):
        out.marks = [marks.IMPOSSIBLE, marks.LOST_POINT]
    return out


def sent(row: Row) -> list[str]:
    """The line as the tablet sends it."""
    return [row.site, row.at.isoformat(), row.parameter, row.replaced or row.text, row.unit, "" if row.replaced else row.note]


def delivery(history: Simulated, booked: Booked, kg: float) -> Delivery:
    """A load as booked."""
    product = files.product_of(history, booked)
    return Delivery(
        taken_at=booked.at,
        vessel=booked.load.vessel,
        product=product["code"],
        quantity=float(kg),
        unit="kg",
        lot=booked.load.lot,
        strength=files.strength_of(history, booked),
        strength_basis=product["strength_basis"],
        density_kg_per_l=product.get("density_kg_per_L"),
        manufactured_on=booked.at.date() - dt.timedelta(days=1),
        supplier="Invented Supplies",
        document=f"D-{booked.load.lot}",
        cost=round(kg * _PRICE_PER_KG.get(product["code"], 0.5), 2),
        currency="EUR",
        marks=[],
    )


_PRICE_PER_KG = {"HYPO": 0.42, "LIME": 0.21, "NAOH": 0.33, "FERRIC": 0.29, "PEROX": 0.78, "FSA": 0.95}


def transfer(moved: Moved) -> Transfer:
    """A transfer as booked."""
    return Transfer(
        taken_at=moved.at,
        from_vessel=moved.move.from_vessel,
        to_vessel=moved.move.to_vessel,
        quantity=moved.litres,
        unit="L",
        marks=[],
    )


def sent_delivery(row: Delivery) -> dict[str, Any]:
    """The delivery as the tablet sends it."""
    return {
        "timestamp": row.taken_at, "vessel": row.vessel, "product": row.product, "quantity": row.quantity, "unit": row.unit,
        "lot": row.lot, "strength": row.strength, "strength_basis": row.strength_basis, "document": row.document,
    }  # fmt: skip
