"""Missing data: every value that was due and is not there, with the reason where one was given; every day without a figure."""

from __future__ import annotations

from itertools import groupby

from plant.dosing.figures import DayDose
from plant.reports.month import Month
from plant.reports.parts import expected, values
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "missing", "Missing data"


def section(month: Month) -> Section:
    """Values not there, then days whose dose is not known and why. Nothing is ever filled in."""
    lines = [line for line in expected.lines(month) if line.missing]
    return Section(
        KEY,
        TITLE,
        (
            Text(
                "No gap is filled with zero, with a limit or by guessing. A dose is known only where every reading it "
                "needs is there."
            ),
            _values(month, lines),
            _days(month),
        ),
    )


def _values(month: Month, lines: list[expected.Due]) -> Table:
    body = []
    for line in lines:
        label, _, _ = values.printed(month, line.parameter)
        body.append(
            (
                Cell(line.site),
                Cell(label),
                Cell(str(line.slots), float(line.slots)),
                Cell(str(line.missing), float(line.missing)),
                Cell(_when(month, line)),
            )
        )
    return Table(
        "missing-values",
        "Values due and not on record",
        (
            Column("Site", number=False),
            Column("Parameter", number=False),
            Column("due"),
            Column("missing"),
            Column("When, and the reason given", number=False, wraps=True),
        ),
        tuple(body),
        2,
        0,
        (),
        "Every value that was due is on record.",
    )


def _when(month: Month, line: expected.Due) -> str:
    """Days and shifts, those of one reason together."""
    by_reason: dict[str, list[str]] = {}
    for day, label in line.empty:
        where = month.day_words(day) + ("" if label == "day" else f" {label}")
        by_reason.setdefault(line.reasons.get((day, label), "no reason on record"), []).append(where)
    return "; ".join(f"{', '.join(places)}: {reason}" for reason, places in by_reason.items())


def _days(month: Month) -> Table:
    body = []
    rows = sorted(
        (row for row in month.doses if row.expected and row.used_mg_l.value is None),
        key=lambda row: (row.dosing_point, row.day),
    )
    for (code, why), group in groupby(rows, key=lambda row: (row.dosing_point, _why(row))):
        days = [row.day for row in group]
        body.append(
            (
                Cell(code),
                Cell(str(len(days)), float(len(days))),
                Cell(", ".join(month.day_words(day) for day in days)),
                Cell(why or "reason not known"),
            )
        )
    return Table(
        "days-without",
        "Operating days without a dose",
        (
            Column("Dosing point", number=False),
            Column("days"),
            Column("Which", number=False, wraps=True),
            Column("Why", number=False, wraps=True),
        ),
        tuple(body),
        1,
        0,
        (),
        "The dose of every dosing point in service is known on every day.",
    )


def _why(row: DayDose) -> str:
    """What is said of the dose used; what is said of the need alone stands elsewhere."""
    return "; ".join(remark for remark in row.remarks if not remark.startswith("need:"))
