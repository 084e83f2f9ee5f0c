"""Stock: what came in, what a witness says went out, what is left, and what nobody can explain. Never adjusted away."""

from __future__ import annotations

from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "stock", "Stock reconciliation"


def section(month: Month) -> Section:
    """Per product: opening + received − witnessed use − closing = unexplained. Per vessel: what it held at the end."""
    if not month.reconciliation and not month.stock:
        return Section(KEY, TITLE, (Text("No vessel is stated."),))
    return Section(KEY, TITLE, (_products(month), _vessels(month)))


def _products(month: Month) -> Table:
    show = month.measures
    kg = show.label("kg")
    body = []
    for row in month.reconciliation:
        amounts = [
            show.shown(amount, "kg")
            for amount in (
                row.opening_kg,
                row.received_kg,
                row.witnessed_kg,
                row.closing_kg,
                row.unexplained_kg,
                None if row.unexplained_sd_kg is None else 2 * row.unexplained_sd_kg,
                row.used_by_dips_kg,
            )
        ]
        places = measures.decimals(amounts, figures=5, most=1)
        cells = [measures.cell(amount, places) for amount in amounts]
        if row.unexplained_kg is None:
            cells[4] = Cell("no second witness" if row.witnessed_kg is None else measures.UNKNOWN)
        product = month.products.get(row.product)
        body.append(
            (
                Cell(row.product),
                *cells,
                Cell(str(row.deliveries), float(row.deliveries)),
                Cell("; ".join(([product.name] if product else []) + list(row.remarks))),
            )
        )
    return Table(
        "reconciliation",
        "Opening + received − witnessed use − closing = unexplained, as product",
        (
            Column("Product", number=False),
            Column("opening", kg),
            Column("received", kg),
            Column("witnessed use", kg),
            Column("closing", kg),
            Column("unexplained", kg),
            Column("± 2 sd", kg),
            Column("used by dips", kg),
            Column("deliveries"),
            Column("Remarks", number=False, wraps=True),
        ),
        tuple(body),
        1,
        0,
        (
            "A positive unexplained amount is stock that should be there and is not. “No second witness” means that "
            "nothing but the "
            "dips says what was used, so that a loss cannot be told from use.",
        ),
    )


def _vessels(month: Month) -> Table:
    show = month.measures
    kg = show.label("kg")
    body = []
    for row in month.stock:
        amounts = [
            show.shown(amount, "kg")
            for amount in (
                row.book_kg,
                row.dip_kg,
                row.difference_kg,
                None if row.difference_sd_kg is None else 2 * row.difference_sd_kg,
            )
        ]
        places = measures.decimals(amounts, figures=5, most=1)
        strength = measures.decimals([row.strength], figures=4)
        body.append(
            (
                Cell(row.vessel),
                Cell(row.product),
                *(measures.cell(amount, places) for amount in amounts),
                measures.cell(row.strength, strength),
                measures.cell(row.days_of_supply, 0),
                Cell(month.local(row.dip_at) if row.dip_at else "no dip"),
                Cell("; ".join([f"strength in {row.strength_basis.replace('_', ' ')}", *row.remarks])),
            )
        )
    return Table(
        "vessels",
        f"Vessels at the end of the month, {month.local(month.end)}",
        (
            Column("Vessel", number=False),
            Column("Product", number=False),
            Column("book", kg),
            Column("dip", kg),
            Column("book − dip", kg),
            Column("± 2 sd", kg),
            Column("strength"),
            Column("supply", "days"),
            Column("last dip", number=False),
            Column("Remarks", number=False, wraps=True),
        ),
        tuple(body),
        2,
        0,
    )
