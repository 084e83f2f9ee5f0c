"""The figures of a report one by one: what the CSV and XLSX hold, and what two issues are compared by."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from dataclasses import dataclass

from plant.reports.pdf.document import NOTICE, Cell, Document, Section, Table

CSV_HEADER = ("month", "issue", "section", "table", "row", "quantity", "unit", "value", "full_value", "text", "mark", "trail")
_FORMULA = ("=", "+", "-", "@")


@dataclass(frozen=True)
class Fact:
    """One cell of one table: a number with its unit, or words. ``printed`` is exactly what stands in the report."""

    section: str
    table: str
    caption: str
    row: str
    quantity: str
    unit: str
    printed: str
    value: float | None
    mark: str
    trail: str

    @property
    def place(self) -> tuple[str, str, str, str]:
        return self.section, self.table, self.row, self.quantity

    @property
    def words(self) -> str:
        """Which figure this is, for a list of those that moved."""
        quantity = f"{self.quantity} ({self.unit})" if self.unit else self.quantity
        return " · ".join(part for part in (self.caption or self.table, self.row, quantity) if part)


def facts(document: Document) -> Iterator[Fact]:
    """Every cell beside the row labels, in the order of print."""
    for section in document.sections:
        for block in section.blocks:
            if isinstance(block, Table):
                yield from _of_table(section, block)


def _of_table(section: Section, table: Table) -> Iterator[Fact]:
    seen: dict[str, int] = {}
    for row in table.rows:
        label = ", ".join(cell.text for cell in row[: table.labels])
        seen[label] = seen.get(label, 0) + 1
        name = label if seen[label] == 1 else f"{label} ({seen[label]})"
        for column, cell in zip(table.columns[table.labels :], row[table.labels :], strict=True):
            if not cell.text:
                continue
            quantity = " ".join(part for part in (column.group, column.head) if part)
            yield Fact(
                section.key, table.name, table.caption, name, quantity, column.unit, cell.text, cell.value, cell.mark, cell.key
            )


def moved(before: Document, after: Document, *, leave_out: frozenset[str] = frozenset()) -> list[tuple[str, str, str]]:
    """Figures that print otherwise: (which, was, is). Sections and tables named in ``leave_out`` are not compared, nor is
    how many readings a day has, which is a column only where the days differ.
    """
    old, new = _compared(before, leave_out), _compared(after, leave_out)
    out = []
    for place, fact in {**old, **new}.items():
        was, now = old.get(place), new.get(place)
        if (was.printed if was else None) != (now.printed if now else None):
            out.append((fact.words, was.printed if was else "not printed", now.printed if now else "not printed"))
    return out


def _compared(document: Document, leave_out: frozenset[str]) -> dict[tuple[str, str, str, str], Fact]:
    return {
        fact.place: fact
        for fact in facts(document)
        if fact.section not in leave_out and fact.table not in leave_out and fact.quantity.rpartition(" ")[2] != "n"
    }


def safe(text: str) -> str:
    """Words on one line that a spreadsheet will not take for a formula."""
    flat = " ".join(text.split())
    return f"'{flat}" if flat.startswith(_FORMULA) else flat


def rows(document: Document) -> Iterator[list[str]]:
    """Under CSV_HEADER, one row a fact. ``value`` is the number as printed, ``full_value`` before rounding; words stand in
    ``text`` only."""
    issue = f"{document.number} revision {document.revision}" if document.revision else document.number
    issue = "draft" if document.draft else issue
    for fact in facts(document):
        number = number_of(Cell(fact.printed, fact.value))
        full = "" if number is None else repr(fact.value)
        text = fact.printed if number is None else ""
        yield [
            document.month,
            issue,
            fact.section,
            fact.table,
            fact.row,
            fact.quantity,
            fact.unit,
            number or "",
            full,
            text,
            fact.mark,
            fact.trail,
        ]
    yield [document.month, issue, "notice", "", "", "", "", "", "", NOTICE, "", ""]


def to_csv(document: Document) -> str:
    """All facts as CSV. Words that a spreadsheet would take for a formula get a quote in front; numbers stay numbers."""
    numbers = {CSV_HEADER.index("value"), CSV_HEADER.index("full_value")}
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(CSV_HEADER)
    for row in rows(document):
        writer.writerow([text if position in numbers else safe(text) for position, text in enumerate(row)])
    return out.getvalue()


def number_of(cell: Cell) -> str | None:
    """The printed number with an ASCII minus sign; None for words, and for values below or above a bound."""
    if cell.value is None:
        return None
    text = cell.text.replace("−", "-")
    try:
        float(text)
    except ValueError:
        return None
    return text
