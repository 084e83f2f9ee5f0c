"""Times below a minimum and shares of the month: against the limit of the moment, in whatever unit it was stated."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest

from plant.reports import content
from plant.reports.month import gather
from plant.works import actions as works
from tests import people
from tests.reports import plan
from tests.reports.test_content import table_of

pytestmark = pytest.mark.django_db

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)
LOW = {
    "kind": "held_below", "level": "regulatory", "sample_point": "ENTRY", "parameter": "free_chlorine", "limit": 200.0, "hours": 4.0,
    "unit": "µg/L", "source": "stated by the works",
}  # fmt: skip


def state(book, subject: str, value: dict, *, since: str = "2026-01-01T07:00", withdrawn: bool = False) -> None:
    works.state(
        book=book, kind="limit", subject=subject, value=value, effective_from=plan.local(since).astimezone(dt.UTC), reason="test",
        by=people.person("sam"), now=NOW, withdrawn=withdrawn,
    )  # fmt: skip


@pytest.fixture
def book(tmp_path: Path):
    found = people.small_works()
    rows = [
        ("ENTRY", "2026-03-03T08:00", "free_chlorine", "0.50", "mg/L", ""),
        ("ENTRY", "2026-03-03T10:00", "free_chlorine", "0.19", "mg/L", ""),
        ("ENTRY", "2026-03-03T11:00", "free_chlorine", "0.12", "mg/L", ""),
        ("ENTRY", "2026-03-03T14:30", "free_chlorine", "0.20", "mg/L", ""),
        ("ENTRY", "2026-03-20T08:00", "free_chlorine", "0.19", "mg/L", ""),
        ("ENTRY", "2026-03-20T12:00", "free_chlorine", "0.40", "mg/L", ""),
        *(
            ("FILTERED", f"2026-03-{day:02d}T08:00", "turbidity", "0.31" if day == 5 else "0.30", "NTU", "")
            for day in range(1, 21)
        ),
    ]
    plan.bring(found, list(rows), tmp_path, now=NOW)
    return found


def printed(book) -> dict[tuple[str, str, str], dict[str, str]]:
    return table_of(content.draft(gather(book, 2026, 3, now=NOW)))


def test_a_dip_runs_from_the_first_reading_below_to_the_first_back_in_the_limits_own_unit(book) -> None:
    state(book, "residual", LOW)
    lines = printed(book)
    regulatory = [row for (table, row, quantity), line in lines.items() if table == "dips" and line["text"] == "regulatory"]
    assert len(regulatory) == 2
    assert [lines["dips", row, "hours"]["value"] for row in regulatory] == ["4.50", "4.00"]
    assert [lines["dips", row, "lowest"]["value"] for row in regulatory] == ["0.12", "0.19"]
    assert [lines["dips", row, "below"]["text"] for row in regulatory] == ["200 µg/L"] * 2


def test_each_reading_is_held_against_the_limit_of_its_time(book) -> None:
    state(book, "residual", LOW)
    state(book, "residual", LOW | {"limit": 150.0}, since="2026-03-10T07:00")
    lines = printed(book)
    regulatory = [row for (table, row, quantity), line in lines.items() if table == "dips" and line["text"] == "regulatory"]
    # 0.19 mg/L of the 20th is above the 150 µg/L in force by then.
    assert [lines["dips", row, "hours"]["value"] for row in regulatory] == ["4.50"]


def test_the_share_is_counted_and_what_lay_above_is_named(book) -> None:
    state(book, "turbidity", {
        "kind": "share_of_month", "level": "regulatory", "sample_point": "FILTERED", "parameter": "turbidity", "limit": 0.3,
        "at_least_pct": 95.0, "unit": "NTU", "source": "stated by the works",
    })  # fmt: skip
    lines = printed(book)
    row = next(row for (table, row, _) in lines if table == "shares")
    assert [lines["shares", row, quantity]["value"] for quantity in ("measured", "at or below", "share")] == [
        "20",
        "19",
        "95.0",
    ]
    assert lines["shares", row, "above the limit: when, value"]["text"] == "03-05 08:00 0.31"


def test_a_share_counts_only_while_its_limit_is_stated(book) -> None:
    state(book, "turbidity", {
        "kind": "share_of_month", "level": "regulatory", "sample_point": "FILTERED", "parameter": "turbidity", "limit": 0.3,
        "at_least_pct": 95.0, "unit": "NTU", "source": "stated by the works",
    }, since="2026-03-11T07:00")  # fmt: skip
    lines = printed(book)
    row = next(row for (table, row, _) in lines if table == "shares")
    assert lines["shares", row, "measured"]["value"] == "10"
