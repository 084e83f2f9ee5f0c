"""comparison: used, design and need, one row per operating day and dosing point, as CSV."""

from typing import Any

from plant.dosing import figures, queries
from plant.works import commands

HEADER = (
    "operating_day",
    "dosing_point",
    "volume_ml",
    "product_kg",
    "active_kg",
    "used_mg_per_L",
    "used_sd_mg_per_L",
    "design_mg_per_L",
    "need_mg_per_L",
    "remarks",
)


class Command(commands.WorksCommand):
    help = (
        "Dose used, designed and needed, per operating day and dosing point. Masses and doses are in the product's dose basis."
    )
    takes_known_at = True
    takes_days = True

    def run(self, asked: commands.Asked, **options: Any) -> None:
        rows = queries.comparison(asked.book, asked.first, asked.last, known=asked.known, stated=asked.stated)
        self.write_csv(HEADER, (cells(row) for row in rows))


def cells(row: figures.DayDose) -> tuple[Any, ...]:
    """One row of the CSV."""
    return (
        row.day,
        row.dosing_point,
        number(row.volume_ml.value, 4),
        number(row.product_kg.value, 3),
        number(row.active_kg.value, 4),
        number(row.used_mg_l.value, 4),
        number(row.used_mg_l.sd, 4),
        number(row.design_mg_l.value, 4),
        number(row.need_mg_l.value, 4),
        "; ".join(row.remarks),
    )


def number(value: float | None, decimals: int) -> str | None:
    """A figure in a cell; None stays an empty cell. Minus zero is zero."""
    return None if value is None else f"{round(value, decimals) + 0.0:.{decimals}f}"
