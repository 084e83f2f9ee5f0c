"""What a revision changes: the records and settings that became known since the issue before, and the figures that moved."""

from __future__ import annotations

from plant.reports import changes
from plant.reports.month import Month
from plant.reports.parts import corrections
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "revision", "What this revision changes"
MOST_FIGURES = 200


def section(
    month: Month,
    *,
    revision: int,
    reason: str,
    found: list[changes.Change],
    moved: list[tuple[str, str, str]],
) -> Section:
    """``moved`` are figures that print otherwise than before: (which, was, is)."""
    shown = moved[:MOST_FIGURES]
    note = (f"{len(moved) - MOST_FIGURES} more figures moved; both issues hold them all.",) if len(moved) > MOST_FIGURES else ()
    return Section(
        KEY,
        TITLE,
        (
            Text(
                f"This is revision {revision}; it replaces revision {revision - 1}, which stays on file unchanged. "
                f"Reason: {reason}"
            ),
            Table(
                "revision-records",
                "Recorded since the issue before",
                corrections.COLUMNS,
                corrections.rows(month, found),
                1,
                0,
                (),
                "No record or setting of the month was added or changed since.",
            ),
            Table(
                "revision-figures",
                "Figures that moved",
                (
                    Column("Figure", number=False, wraps=True),
                    Column("Was"),
                    Column("Is"),
                ),
                tuple((Cell(which), Cell(was), Cell(now)) for which, was, now in shown),
                1,
                0,
                note,
                "No figure moved.",
            ),
        ),
    )
