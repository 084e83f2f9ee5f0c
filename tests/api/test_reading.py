"""What machines read: comparison, deviations, issued reports; page by page, and as the screens have it."""

from __future__ import annotations

import datetime as dt
import hashlib

import pytest
import time_machine

from plant.deviations import actions as deviations
from plant.deviations import queries as known
from plant.dosing import queries as dosing
from plant.reports import actions, facts, queries
from tests.api import machines
from tests.reports import plan

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)
FIRST, LAST = dt.date(2026, 3, 1), dt.date(2026, 3, 31)
MARCH = "first=2026-03-01&last=2026-03-31"


@pytest.fixture
def book(db, tmp_path):
    found, _ = plan.works(tmp_path, dt.date(2026, 2, 20), LAST, now=NOW - dt.timedelta(hours=2))
    return found


@pytest.fixture
def machine(book):
    with time_machine.travel(NOW, tick=False):
        yield machines.machine(book)


def at(book, rest: str) -> str:
    return f"/api/w/{book.code}/{rest}"


def paged(machine, address: str) -> tuple[list, int]:
    """All rows, following ``next``; and how many pages it took."""
    rows, pages = [], 0
    while address:
        answer = machine.get(address)
        assert answer.status_code == 200, answer.content
        rows += answer.json()["rows"]
        address, pages = answer.json()["next"], pages + 1
        assert pages < 500
    return rows, pages


def test_the_comparison_is_the_boards_page_by_page(book, machine):
    rows, pages = paged(machine, at(book, f"comparison?{MARCH}&limit=7"))
    expected = sorted(dosing.comparison(book, FIRST, LAST), key=lambda row: (row.day, row.dosing_point))
    assert len(rows) == len(expected) == 31 * 3
    assert pages == 14
    for got, row in zip(rows, expected, strict=True):
        assert (got["day"], got["dosing_point"]) == (row.day.isoformat(), row.dosing_point)
        assert got["used_mg_l"]["value"] == row.used_mg_l.value
        assert got["need_mg_l"]["sd"] == row.need_mg_l.sd
    assert any(row["used_mg_l"]["value"] for row in rows)
    assert paged(machine, at(book, f"comparison?{MARCH}&limit=500")) == (rows, 1)


def test_a_span_longer_than_a_month_is_whole(book, machine):
    rows, _ = paged(machine, at(book, "comparison?first=2026-02-10&last=2026-04-01&limit=50"))
    days = {row["day"] for row in rows}
    assert len(days) == 51
    assert len({(row["day"], row["dosing_point"]) for row in rows}) == len(rows) == 51 * 3


def test_deviations_page_by_page(book, machine):
    deviations.judge(book=book, days=[FIRST + dt.timedelta(days=n) for n in range(31)], now=NOW, by=None)
    expected = {view.ref for view in known.between(book, FIRST, LAST)}
    assert len(expected) > 2, "the works of this test has deviations"
    rows, pages = paged(machine, at(book, f"deviations?{MARCH}&limit=2"))
    assert [row["ref"] for row in rows] == [row["ref"] for row in {row["ref"]: row for row in rows}.values()]
    assert {row["ref"] for row in rows} == expected
    assert pages == (len(expected) + 1) // 2
    opened, _ = paged(machine, at(book, f"deviations?{MARCH}&state=open"))
    assert {row["ref"] for row in opened} == {view.ref for view in known.between(book, FIRST, LAST) if view.open}


def test_issued_reports_their_figures_and_their_very_bytes(book, machine):
    assert machine.get(at(book, "reports")).json() == {"rows": []}
    report = actions.issue_from_shell(book=book, year=2026, month=3, now=NOW).report
    (row,) = machine.get(at(book, "reports")).json()["rows"]
    assert (row["month"], row["revision"]) == ("2026-03", 1)
    figures = machine.get(row["figures"]).json()
    expected = [fact.printed for fact in facts.facts(queries.document(report))]
    assert [one["printed"] for one in figures["rows"]] == expected
    assert len(expected) > 300
    data = machine.get(row["pdf"])
    assert data["Content-Type"] == "application/pdf"
    assert hashlib.sha256(data.content).hexdigest() == row["pdf_sha256"]
    for wrong in ("2026-03/2", "2026-04/1", "march/1", "2026-03/x", "2026-03/99999999999999999999"):
        assert machine.get(at(book, f"reports/{wrong}")).status_code == 404
        assert machine.get(at(book, f"reports/{wrong}/pdf")).status_code == 404


WRONG = [
    ("frist=2026-03-01", "frist"),
    ("first=2026-03-01&first=2026-03-02", "first"),
    ("first=20260301", "first"),
    ("first=2026-02-30", "first"),
    ("last=0001-01-01", "last"),
    ("first=2026-03-02&last=2026-03-01", "first"),
    ("first=2024-03-01&last=2026-03-01", "first"),
    ("limit=0", "limit"),
    ("limit=501", "limit"),
    ("limit=٣", "limit"),
    ("limit=", "limit"),
    ("after=x", "after"),
    ("after=2026-02-30~A", "after"),
]


@pytest.mark.parametrize(("query", "parameter"), WRONG)
def test_what_is_asked_wrongly_is_a_problem_in_words(book, machine, query, parameter):
    for name in ("comparison", "deviations"):
        answer = machine.get(at(book, f"{name}?{query}"))
        assert (answer.status_code, answer.json()["parameter"]) == (422, parameter), answer.content
        assert answer["Content-Type"] == "application/problem+json"
    assert machine.get(at(book, "deviations?state=shut")).json()["parameter"] == "state"
    assert machine.get(at(book, "reports?limit=5")).status_code == 422


def test_codes_to_send_under_are_told(book, machine):
    told = machine.get(at(book, "")).json()
    assert {"code": "ENTRY", "kind": "sample_point", "name": "Works outlet"} in told["sites"]
    assert "free_chlorine" in {one["name"] for one in told["parameters"]}
