"""The report's tables as a workbook: one sheet a table, units in the heads, numbers as numbers, words never as formulas."""

from __future__ import annotations

import datetime as dt
import io
import re
from typing import Any

import xlsxwriter

from plant.reports import facts
from plant.reports.pdf.document import NOTICE, Cell, Document, Table

LONGEST_NAME = 31  # of a sheet, by the format


def to_xlsx(document: Document) -> bytes:
    """The same bytes for the same document: the time inside is that of the issue."""
    out = io.BytesIO()
    book = xlsxwriter.Workbook(out, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False})
    book.set_properties(
        {
            "title": f"{document.title}, {document.works_name}, {document.month_words}",
            "comments": NOTICE,
            "created": dt.datetime.fromisoformat(document.issued_at).replace(tzinfo=None),
        }
    )
    bold, wrapped = book.add_format({"bold": True, "text_wrap": True}), book.add_format({"text_wrap": True, "valign": "top"})
    _cover(book, document, bold)
    used: set[str] = {"report"}
    for section in document.sections:
        for block in section.blocks:
            if isinstance(block, Table) and block.rows:
                _sheet(book.add_worksheet(_name(block.name, used)), block, bold, wrapped)
    _facts(book.add_worksheet(_name("all figures", used)), document, bold)
    book.close()
    return out.getvalue()


def _cover(book: Any, document: Document, bold: Any) -> None:
    sheet = book.add_worksheet("report")
    lines = [(document.title, document.works_name), ("State", document.status), ("Form", document.form_note), *document.cover]
    lines += [
        (one.meaning, ", ".join(part for part in (one.name, one.licence, one.signed_at, one.manner) if part))
        for one in document.signatures
    ]
    for number, (name, text) in enumerate([*lines, ("Note", NOTICE)]):
        sheet.write_string(number, 0, name, bold)
        sheet.write_string(number, 1, text.replace("\n", " "))
    sheet.set_column(0, 0, 24)
    sheet.set_column(1, 1, 90)


def _sheet(sheet: Any, table: Table, bold: Any, wrapped: Any) -> None:
    sheet.write_string(0, 0, table.caption or table.name, bold)
    for column, head in enumerate(table.columns):
        unit = f" ({head.unit})" if head.unit else ""
        sheet.write_string(1, column, " ".join(part for part in (head.group, head.head) if part) + unit, bold)
        sheet.set_column(column, column, 40 if head.wraps else 14)
    for number, row in enumerate(table.rows, start=2):
        for column, cell in enumerate(row):
            _write(sheet, number, column, cell, wrapped)
    for number, note in enumerate(table.notes, start=len(table.rows) + 3):
        sheet.write_string(number, 0, note)
    sheet.freeze_panes(2, table.labels)


def _write(sheet: Any, row: int, column: int, cell: Cell, wrapped: Any) -> None:
    """The number as printed, so that sheet and paper can't differ; its letter as a comment."""
    number = facts.number_of(cell)
    if number is not None:
        sheet.write_number(row, column, float(number))
    elif cell.text:
        sheet.write_string(row, column, cell.text, wrapped)
    if cell.mark:
        sheet.write_comment(row, column, cell.mark)


def _facts(sheet: Any, document: Document, bold: Any) -> None:
    for column, name in enumerate(facts.CSV_HEADER):
        sheet.write_string(0, column, name, bold)
    for number, row in enumerate(facts.rows(document), start=1):
        for column, value in enumerate(row):
            if facts.CSV_HEADER[column] in ("value", "full_value") and value:
                sheet.write_number(number, column, float(value))
            elif value:
                sheet.write_string(number, column, value)
    sheet.freeze_panes(1, 0)


def _name(wanted: str, used: set[str]) -> str:
    """A sheet name that the format takes and that is not used yet, whatever its case."""
    base = re.sub(r"[\[\]:*?/\\']", "-", wanted)[:LONGEST_NAME]
    name, count = base, 1
    while name.lower() in used:
        count += 1
        name = f"{base[: LONGEST_NAME - len(str(count)) - 1]} {count}"
    used.add(name.lower())
    return name
