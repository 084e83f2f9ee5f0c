"""Cost of what was used: only where the works' form asks for it. Price per delivered active kilogram, then per volume."""

from __future__ import annotations

from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table, Text
from plant.supply import queries as supply

KEY, TITLE = "cost", "Cost of chemicals"


def section(month: Month) -> Section:
    """One row a dosing point. A product without a priced delivery in the year before has no cost, not a cost of zero."""
    prices = {item.product: item for item in supply.supply(month.book, month.at, known=month.ask)}
    if not month.periods:
        return Section(KEY, TITLE, (Text("No dosing point is stated."),))
    show = month.measures
    rows = []
    for row in month.periods:
        found = prices.get(row.product)
        price, currency = (found.price_per_active_kg, found.currency) if found else (None, "")
        cost = None if price is None or row.active_kg.value is None else price * row.active_kg.value
        volume = show.shown(row.volume_ml.value, "ML")
        each = cost / volume if cost is not None and volume else None
        active = show.shown(1.0, "kg")
        per_mass = price / active if price is not None and active else None
        rows.append(
            (
                Cell(row.dosing_point),
                Cell(row.product),
                measures.cell(show.shown(row.active_kg.value, "kg"), 1, key=row.active_kg.key),
                measures.cell(per_mass, 3),
                measures.cell(cost, 2),
                measures.cell(each, 2),
                Cell(currency or measures.UNKNOWN),
            )
        )
    columns = (
        Column("Dosing point", number=False), Column("Product", number=False), Column("used, as dosed", show.label("kg")),
        Column("price", f"per {show.label('kg')}"), Column("cost"), Column("cost per volume", f"per {show.label('ML')}"),
        Column("currency", number=False),
    )  # fmt: skip
    notes = (
        "Price: paid over the last year for deliveries with a price, divided by the mass in them by their certificates; "
        "so a load that came weak costs more. Cost: that price times the mass used. Energy, labour and rent are not in it.",
    )
    return Section(KEY, TITLE, (Table("cost", "", columns, tuple(rows), 2, 0, notes),))
