"""stock: what each vessel holds, by the book and by the dip, as CSV."""

from typing import Any

from django.core.management.base import CommandParser

from plant.dosing import figures
from plant.dosing.management.commands.comparison import number
from plant.supply import queries
from plant.works import commands

HEADER = (
    "vessel",
    "product",
    "book_kg",
    "dip_kg",
    "difference_kg",
    "difference_sd_kg",
    "active_kg",
    "usable_active_kg",
    "strength",
    "days_of_supply",
    "order_from",
    "order_by",
    "remarks",
)


class Command(commands.WorksCommand):
    help = "Stock per vessel at a moment: book, dip, the difference with its uncertainty, days of supply, when to order."
    takes_known_at = True

    def add_arguments(self, parser: CommandParser) -> None:
        super().add_arguments(parser)
        parser.add_argument("--at", metavar="ISO", help="the moment asked about; default: now")

    def run(self, asked: commands.Asked, **options: Any) -> None:
        at = asked.moment if options.get("at") is None else commands.moment(options["at"], asked.calendar, option="--at")
        rows = queries.stock(asked.book, at, known=asked.known, stated=asked.stated)
        self.write_csv(HEADER, (cells(row) for row in rows))


def cells(row: figures.VesselStock) -> tuple[Any, ...]:
    """One row of the CSV; days of supply and the order window are those of the product over all its vessels."""
    return (
        row.vessel,
        row.product,
        number(row.book_kg, 2),
        number(row.dip_kg, 2),
        number(row.difference_kg, 2),
        number(row.difference_sd_kg, 2),
        number(row.active_kg, 3),
        number(row.usable_active_kg, 3),
        number(row.strength, 3),
        number(row.days_of_supply, 1),
        row.order_from,
        row.order_by,
        "; ".join(row.remarks),
    )
