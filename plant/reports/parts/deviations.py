"""Deviations: what was outside, for how long, who was told, what was done, and whether it is over."""

from __future__ import annotations

from plant.deviations import queries as deviations
from plant.deviations.queries import DeviationView, EventView
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text

KEY, TITLE = "deviations", "Deviations"
LEVELS = ("regulatory", "action", "alert", "target")


def section(month: Month) -> Section:
    """Episodes raised for days of the month, worst first; then what is told about each, in order."""
    found = sorted(views(month), key=lambda view: (LEVELS.index(view.level), view.since, view.ref))
    rows = tuple(_row(month, number, view) for number, view in enumerate(found, start=1))
    life = tuple(row for number, view in enumerate(found, start=1) for row in _life(month, number, view))
    blocks: list[Block] = [
        Table(
            "deviations",
            "Outside a stated limit, worst first",
            (
                Column("No."),
                Column("Level", number=False),
                Column("What", number=False, wraps=True),
                Column("Since", number=False),
                Column("Found", number=False, wraps=True),
                Column("Limit", number=False, wraps=True),
                Column("State", number=False),
                Column("hours to close"),
                Column("Likely causes", number=False, wraps=True),
            ),
            rows,
            1,
            0,
            (),
            "No deviation was raised for a day of the month.",
        ),
    ]
    if life:
        blocks.append(
            Table(
                "deviation-events",
                "Who was told, cause, action, and the reading back inside",
                (
                    Column("No."),
                    Column("When", number=False),
                    Column("Step", number=False),
                    Column("By", number=False),
                    Column("Words", number=False, wraps=True),
                ),
                life,
                1,
            )
        )
    owed = [f"No. {number}" for number, view in enumerate(found, start=1) if view.tellings_owed]
    if owed:
        blocks.append(Text("Somebody is still to be told of: " + ", ".join(owed) + ".", "caution"))
    return Section(KEY, TITLE, tuple(blocks))


def views(month: Month) -> list[DeviationView]:
    """The month's episodes as known at the report's seq."""
    return list(deviations.between(month.book, month.first, month.last, known=month.known))


def _row(month: Month, number: int, view: DeviationView) -> tuple[Cell, ...]:
    ended = [
        event.at for event in view.events if event.kind == "closed" or (event.kind == "corrected_away" and event.day is None)
    ]
    hours = (ended[-1] - view.since).total_seconds() / 3600 if ended else None
    what = " ".join(part.replace("_", " ") for part in (view.subject, view.parameter, f"({view.kind})") if part)
    days = f" ({len(view.days)} days, to {month.day_words(view.last_day)})" if len(view.days) > 1 else ""
    return (
        Cell(str(number), float(number), f"deviation:{view.ref}"),
        Cell(view.level),
        Cell(what),
        Cell(month.local(view.since)),
        Cell(f"{view.value}{days}"),
        Cell(view.limit),
        Cell(view.state.replace("_", " ") + (", correction awaits approval" if view.awaiting_approval else "")),
        Cell(measures.UNKNOWN) if hours is None else measures.cell(hours, 1),
        Cell(", ".join(name.replace("_", " ") for name in view.likely_causes)),
    )


STEPS = {
    "acknowledged": "acknowledged",
    "told": "told",
    "cause": "cause",
    "action": "action",
    "verified": "back inside",
    "closed": "closed",
    "comment": "comment",
    "corrected_away": "corrected away",
    "approved": "approved",
}


def _life(month: Month, number: int, view: DeviationView) -> list[tuple[Cell, ...]]:
    return [
        (
            Cell(str(number), float(number)),
            Cell(month.local(event.at)),
            Cell(STEPS[event.kind]),
            Cell(event.by or "the program"),
            Cell(_said(event)),
        )
        for event in view.events
        if event.kind in STEPS
    ]


LEFT_OUT = frozenset({"corrected_by", "refs", "whole", "awaiting", "reading", "days"})


def _said(event: EventView) -> str:
    """What was said at a step: the words themselves, then whom, how and under which reference."""
    said = []
    for key, value in event.fields.items():
        if value in (None, "", [], {}) or key in LEFT_OUT:
            continue
        text = str(value).replace("_", " ") if key == "cause" else str(value)
        said.append(text if key in ("words", "note", "who", "cause") else f"{key.replace('_', ' ')} {text}")
    return ", ".join(said)
