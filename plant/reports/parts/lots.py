"""Product received: every delivery with its lot, strength and papers."""

from __future__ import annotations

from chemistry import units
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table
from plant.stock import queries as stock
from plant.stock.models import Delivery

KEY, TITLE = "lots", "Product received"


def section(month: Month) -> Section:
    """Deliveries of the month, by time."""
    found = stock.deliveries(month.book, start=month.start, end=month.end, known=month.known)
    rows = [_row(month, delivery) for delivery in found]
    return Section(
        KEY,
        TITLE,
        (
            Table(
                "lots",
                "Deliveries",
                (
                    Column("When", number=False),
                    Column("Vessel", number=False),
                    Column("Product", number=False),
                    Column("quantity", month.measures.label("kg")),
                    Column("as stated", number=False),
                    Column("Lot", number=False, wraps=True),
                    Column("Certificate", number=False, wraps=True),
                    Column("Supplier, paper, price", number=False, wraps=True),
                ),
                tuple(rows),
                3,
                0,
                (),
                "Nothing was received in the month.",
            ),
        ),
    )


def _row(month: Month, delivery: Delivery) -> tuple[Cell, ...]:
    when = month.local(delivery.taken_at)
    kg = _kg(month, delivery)
    strength = (
        f"{delivery.strength:g} {delivery.strength_basis.replace('_', ' ')}"
        if delivery.strength is not None
        else "none: stated strength used"
    )
    if delivery.manufactured_on:
        strength += f", made {delivery.manufactured_on:%Y-%m-%d}"
    papers = [delivery.supplier, delivery.document]
    if delivery.cost is not None:
        papers.append(f"{delivery.cost:.2f} {delivery.currency}".strip())
    shown = month.measures.shown(kg, "kg")
    return (
        Cell(when[:10] + " (day only)" if delivery.date_only else when),
        Cell(delivery.vessel),
        Cell(delivery.product),
        measures.cell(shown, measures.decimals([shown], figures=5, most=1), key=f"record:{delivery.ref}"),
        Cell(f"{delivery.quantity:g} {delivery.unit}"),
        Cell(delivery.lot or "not stated"),
        Cell(strength),
        Cell(", ".join(part for part in papers if part)),
    )


def _kg(month: Month, delivery: Delivery) -> float | None:
    """Mass of a delivery; by volume with the certificate's density, or the product's stated one."""
    if units.kind_of(delivery.unit) == "mass":
        return float(units.mass_kg(delivery.quantity, delivery.unit))
    product = month.products.get(delivery.product)
    density = delivery.density_kg_per_l or (product.density_kg_per_L if product else None)
    return None if density is None else float(units.volume_l(delivery.quantity, delivery.unit)) * density
