"""Settings that came into force in the month: what held before, what holds since, who said so and why."""

from __future__ import annotations

from plant.ledger.models import Entry
from plant.reports import changes
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "settings", "Settings changed"


def section(month: Month) -> Section:
    """Statements in force from within the month that replace or withdraw an earlier one."""
    found, first_ones = changes.settings_of(month.stated, month.start, month.end)
    who = _authors(month, [saying.seq for _, saying in found])
    body = []
    for earlier, saying in found:
        was, now = changes.difference(None if earlier.withdrawn else earlier.value, None if saying.withdrawn else saying.value)
        name, recorded = who[saying.seq]
        body.append(
            (
                Cell(month.local(saying.effective_from)),
                Cell(changes.setting(saying.kind, saying.subject)),
                Cell(was),
                Cell(now),
                Cell(f"{name}, {recorded}: {saying.reason or 'no reason given'}"),
            )
        )
    table = Table(
        "settings",
        "Settings in force from within the month",
        (
            Column("From", number=False),
            Column("Setting", number=False, wraps=True),
            Column("Was", number=False, wraps=True),
            Column("Is", number=False, wraps=True),
            Column("By, stated, why", number=False, wraps=True),
        ),
        tuple(body),
        1,
        0,
        (),
        "No setting was changed in the month.",
    )
    if not first_ones:
        return Section(KEY, TITLE, (table,))
    return Section(KEY, TITLE, (table, Text(f"{first_ones} settings were stated for the first time in the month.")))


def _authors(month: Month, seqs: list[int]) -> dict[int, tuple[str, str]]:
    entries = Entry.objects.filter(book=month.book, seq__in=seqs).select_related("recorded_by")
    return {
        entry.seq: (entry.recorded_by.display_name if entry.recorded_by else "command line", month.local(entry.recorded_at))
        for entry in entries
    }
