"""Deviations: what was outside, for how long, who was told, what was done, and whether it is over."""

from __future__ import annotations

from typing import Any

from plant.deviations import queries as deviations
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "deviations", "Deviations"
LEVELS = ("regulatory", "action", "alert", "target")


def section(month: Month) -> Section:
    """Episodes raised for days of the month, worst first; then what is told about each, in order."""
    found = sorted(views(month), key=lambda view: (LEVELS.index(view.level), view.since, view.ref))
    rows = tuple(_row(month, number, view) for number, view in enumerate(found, start=1))
    life = tuple(row for number, view in enumerate(found, start=1) for row in _life(month, number, view))
    blocks = [
        Table("deviations", "Outside a stated limit, worst first", (
            Column("No."), Column("Level", number=False), Column("What", number=False, wraps=True), Column("Since", number=False),
            Column("Found", number=False, wraps=True), Column("Limit", number=False, wraps=True), Column("State", number=False),
            Column("hours to close"), Column("Likely causes", number=False, wraps=True),
        ), rows, 1, 0, (), "No deviation was raised for a day of the month."),
    ]
    if life:
        blocks.append(Table("deviation-events", "Who was told, cause, action, and the reading back inside", (
            Column("No."), Column("When", number=False), Column("Step", number=False), Column("By", number=False),
            Column("Words", number=False, wraps=True)), life, 1))
    owed = [f"No. {number}" for number, view in enumerate(found, start=1) if view.tellings_owed]
    if owed:
        blocks.append(Text("Somebody is still to be told of: " + ", ".join(owed) + ".", "caution"))
    return Section(KEY, TITLE, tuple(blocks))


def views(month: Month) -> list[Any]:
    """The month's episodes as known at the report's seq."""
    return list(deviations.between(month.book, month.first, month.last, known=month.known))


def _row(month: Month, number: int, view: Any) -> tuple[Cell, ...]:
    ended = [event.at for event in view.events if event.kind in ("closed", "corrected_away")]
    hours = (ended[-1] - view.since).total_seconds() / 3600 if ended else None
    what = " ".join(part.replace("_", " ") for part in (view.subject, view.parameter, f"({view.kind})") if part)
    return (
        Cell(str(number), float(number), f"deviation:{view.ref}"), Cell(view.level), Cell(what), Cell(month.local(view.since)), Cell(view.value),
        Cell(view.limit), Cell(view.state.replace("_", " ")), measures.cell(hours, 1) if hours is not None else Cell(measures.UNKNOWN),
        Cell(", ".join(_cause(cause) for cause in view.likely_causes)),
    )


def _cause(cause: Any) -> str:
    name = cause if isinstance(cause, str) else cause.get("cause", "") if isinstance(cause, dict) else cause.name
    return str(name).replace("_", " ")


STEPS = {
    "acknowledged": "acknowledged", "told": "told", "cause": "cause", "action": "action", "verified": "back inside", "closed": "closed",
    "comment": "comment", "corrected_away": "corrected away", "approved": "approved",
}


def _life(month: Month, number: int, view: Any) -> list[tuple[Cell, ...]]:
    return [
        (Cell(str(number), float(number)), Cell(month.local(event.at)), Cell(STEPS[event.kind]), Cell(_by(event)), Cell(_said(event)))
        for event in view.events if event.kind in STEPS
    ]


def _by(event: Any) -> str:
    return str(event.by or "the program")


def _said(event: Any) -> str:
    parts = [f"{key.replace('_', ' ')}: {value}" for key, value in sorted(event.fields.items()) if value not in (None, "", [], {})]
    return "; ".join(parts) or event.reason or ""
