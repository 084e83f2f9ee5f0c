"""Tables as files: CSV (UTF-8) and XLSX."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from typing import Any

import xlsxwriter
from django.http import HttpResponse

FORMATS = ("csv", "xlsx")
XLSX = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"


def answer(kind: str, name: str, header: Sequence[str], rows: Iterable[Sequence[Any]]) -> HttpResponse:
    """The rows as a file to keep: ``name`` without its ending."""
    body, content_type = (_xlsx(header, rows), XLSX) if kind == "xlsx" else (_csv(header, rows), "text/csv; charset=utf-8")
    out = HttpResponse(body, content_type=content_type)
    out["Content-Disposition"] = f'attachment; filename="{name}.{kind}"'
    return out


def _csv(header: Sequence[str], rows: Iterable[Sequence[Any]]) -> bytes:
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    writer.writerows([[_safe(cell) for cell in row] for row in rows])
    return text.getvalue().encode()


def _safe(cell: Any) -> Any:
    """Words that a spreadsheet would take for a formula get a quote in front; numbers stay numbers."""
    if isinstance(cell, str):
        cell = cell.replace("\r\n", "\n").replace("\r", " ")  # the writer would leave a lone return bare
    if isinstance(cell, str) and cell.lstrip()[:1] in ("=", "+", "-", "@") and not _number(cell):
        return f"'{cell}"
    return "" if cell is None else cell


def _number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _xlsx(header: Sequence[str], rows: Iterable[Sequence[Any]]) -> bytes:
    out = io.BytesIO()
    book = xlsxwriter.Workbook(out, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False})
    sheet = book.add_worksheet()
    bold = book.add_format({"bold": True})
    for column, name in enumerate(header):
        sheet.write_string(0, column, name, bold)
    for number, row in enumerate(rows, start=1):
        for column, cell in enumerate(row):
            if isinstance(cell, int | float):
                sheet.write_number(number, column, cell)
            elif cell not in (None, ""):
                sheet.write_string(number, column, str(cell))
    sheet.freeze_panes(1, 0)
    sheet.autofit()
    book.close()
    return out.getvalue()
