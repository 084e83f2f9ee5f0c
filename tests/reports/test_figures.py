"""The figures as CSV and as a workbook: the printed numbers, and no formula out of anybody's words."""

from __future__ import annotations

import csv
import io
import re
import zipfile

import pytest

from plant.reports import facts, workbook
from plant.reports.pdf.document import Cell, Column, Section, Table
from tests.reports import documents

EVIL = ['=HYPERLINK("http://x";"y")', "+1+1", "-2+3", "@SUM(A1)", "\t=1", "\r=1", "\n=1"]


def lines(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


def evil_document():
    rows = tuple((Cell(words), Cell("−1.25", -1.2512, "used:X:2026-10-01"), Cell("<0.05", 0.05), Cell(words)) for words in EVIL)
    table = Table(
        "evil", "Evil", (Column("Name", number=False), Column("change", "mg/L"), Column("low"), Column("Words")), rows
    )
    return documents.document(Section("s", "S", (table,)))


@pytest.mark.parametrize("words", EVIL)
def test_words_never_begin_like_a_formula(words: str) -> None:
    for row in lines(facts.to_csv(evil_document())):
        for name in ("row", "text", "quantity"):
            assert not row[name].startswith(("=", "+", "-", "@", "\t", "\r", "\n")), (name, row[name], words)


def test_numbers_stay_numbers() -> None:
    found = [row for row in lines(facts.to_csv(evil_document())) if row["quantity"] == "change"]
    assert [float(row["value"]) for row in found] == [-1.25] * len(EVIL)
    assert [float(row["full_value"]) for row in found] == [-1.2512] * len(EVIL)
    assert {row["unit"] for row in found} == {"mg/L"}
    assert {row["trail"] for row in found} == {"used:X:2026-10-01"}


def test_below_detection_is_words_not_a_number() -> None:
    found = [row for row in lines(facts.to_csv(evil_document())) if row["quantity"] == "low"]
    assert {(row["value"], row["text"]) for row in found} == {("", "<0.05")}


def test_one_row_a_fact_and_every_place_once() -> None:
    made = documents.document()
    found = list(facts.facts(made))
    table = documents.doses(3)
    assert sum(1 for fact in found if fact.table == "doses") == len(table.rows) * (len(table.columns) - 1)
    assert len({fact.place for fact in found}) == len(found)


def test_what_moved_names_old_and_new() -> None:
    def made(value: str):
        table = Table(
            "t", "T", (Column("Day", number=False), Column("used", "mg/L")), ((Cell("01 Oct"), Cell(value, float(value))),)
        )
        return documents.document(Section("s", "S", (table,)))

    assert facts.moved(made("1.10"), made("1.25")) == [("T · 01 Oct · used (mg/L)", "1.10", "1.25")]
    assert facts.moved(made("1.10"), made("1.10")) == []
    assert facts.moved(made("1.10"), made("1.25"), leave_out=frozenset({"s"})) == []


def sheets(data: bytes) -> dict[str, str]:
    with zipfile.ZipFile(io.BytesIO(data)) as book:
        return {name: book.read(name).decode() for name in book.namelist() if name.endswith(".xml")}


def test_workbook_has_units_in_its_heads_no_formulas_and_the_same_bytes_twice() -> None:
    made = evil_document()
    data = workbook.to_xlsx(made)
    assert workbook.to_xlsx(made) == data
    parts = sheets(data)
    assert "change (mg/L)" in parts["xl/sharedStrings.xml"]
    assert "=HYPERLINK" in parts["xl/sharedStrings.xml"]
    assert not any("<f>" in xml for name, xml in parts.items() if name.startswith("xl/worksheets"))
    values = re.findall(r"<c r=\"B\d+\"[^>]*><v>(-1\.25)</v>", parts["xl/worksheets/sheet2.xml"])
    assert len(values) == len(EVIL)
