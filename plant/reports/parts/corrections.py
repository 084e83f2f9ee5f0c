"""Corrections: the old and the new value stand side by side, with who, when and why."""

from __future__ import annotations

from collections.abc import Iterable

from plant.reports import changes
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table

KEY, TITLE = "corrections", "Corrections"
COLUMNS = (
    Column("What", number=False, wraps=True),
    Column("Of", number=False),
    Column("Was", number=False, wraps=True),
    Column("Is", number=False, wraps=True),
    Column("By, recorded, why", number=False, wraps=True),
)


def section(month: Month) -> Section:
    """Everything in the month that was corrected, withdrawn or settled before this report."""
    found = changes.corrections(month.book, month.start, month.end, until=month.known)
    return Section(
        KEY,
        TITLE,
        (
            Table(
                "corrections",
                "Records corrected, withdrawn or settled",
                COLUMNS,
                rows(month, found),
                1,
                0,
                ("What was observed is never overwritten: both values stay in the book.",) if found else (),
                "No record of the month was corrected, withdrawn or settled.",
            ),
        ),
    )


def rows(month: Month, found: Iterable[changes.Change]) -> tuple[tuple[Cell, ...], ...]:
    """Changes as rows of a table."""
    return tuple(
        (
            Cell(change.what),
            Cell(month.local(change.of)),
            Cell(change.old, key=_key(change)),
            Cell(change.new, key=_key(change)),
            Cell(f"{change.who}, {month.local(change.recorded_at)}: {change.why or 'no reason given'}"),
        )
        for change in found
    )


def _key(change: changes.Change) -> str:
    return f"reading:{change.ref}" if change.kind == "reading" else f"record:{change.ref}"
