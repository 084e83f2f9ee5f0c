"""What the report prints against what pandas makes of the same record file, in months that are long, short, odd and empty."""

from __future__ import annotations

import csv
import datetime as dt
import io
from pathlib import Path

import pandas as pd
import pypdf
import pytest

from plant import clock
from plant.ledger import actions as ledger
from plant.reports import content, facts
from plant.reports.month import NoSuchMonth, gather
from plant.reports.pdf.document import Document
from plant.stock.models import Delivery
from plant.works import actions as works_actions
from tests import people
from tests.reports import plan, reckoned

pytestmark = pytest.mark.django_db


def made(folder: Path, year: int, month: int, *, begin: dt.date | None = None) -> tuple[Document, list[tuple[str, ...]]]:
    """A draft of a month of the plan, which begins a fortnight before it."""
    first, last = clock.month_days(year, month)
    now = dt.datetime.combine(last + dt.timedelta(days=2), dt.time(10), dt.UTC)
    book, rows = plan.works(folder, begin or first - dt.timedelta(days=14), last, now=now)
    return content.draft(gather(book, year, month, now=now)), rows


def table_of(document: Document) -> dict[tuple[str, str, str], dict[str, str]]:
    """The CSV read back: (table, row, quantity) to its line."""
    return {(row["table"], row["row"], row["quantity"]): row for row in csv.DictReader(io.StringIO(facts.to_csv(document)))}


def printed(value: float, like: str) -> str:
    """A number rounded to the decimals that were printed."""
    return f"{value:.{len(like.partition('.')[2])}f}"


def same(line: dict[str, str], value: float) -> None:
    """Equal as printed, and to the last digit that a float in two orders of adding can promise."""
    assert line["value"] == printed(value, line["value"])
    assert float(line["full_value"]) == pytest.approx(value, rel=1e-9)


@pytest.mark.parametrize(("year", "month"), [(2026, 3), (2026, 2), (2026, 5)], ids=["clock change", "February", "plain"])
def test_every_day_equals_the_reckoning_from_the_record_file(tmp_path: Path, year: int, month: int) -> None:
    document, rows = made(tmp_path, year, month)
    first, last = clock.month_days(year, month)
    frame = reckoned.frame(rows)
    days = reckoned.days(frame, first, last)
    lines = table_of(document)
    assert len(days) == (last - first).days + 1
    for day, truth in days.iterrows():
        label = f"{day:%d %b}"
        same(lines["doses", label, "Treated FT-TREATED"], truth["volume_ml"])
        same(lines["doses", label, "CAUSTIC-PH product"], truth["caustic_kg"])
        same(lines["doses", label, "CAUSTIC-PH used"], truth["caustic_mg_l"])
        same(lines["doses", label, "PEROX-PRE product"], truth["peroxide_kg"])
        # Peroxide loses under 1 % a year in store, which the record file alone does not show.
        assert float(lines["doses", label, "PEROX-PRE used"]["full_value"]) == pytest.approx(truth["peroxide_mg_l"], rel=5e-3)
    total = days.sum()
    same(lines["doses", "Month", "CAUSTIC-PH product"], total["caustic_kg"])
    # Mass over volume; a mean of the daily doses would be another number.
    same(lines["use-month", "CAUSTIC-PH, NAOH", "used"], total["caustic_kg"] * plan.CAUSTIC_SHARE / total["volume_ml"])
    same(lines["use-month", "PEROX-PRE, PEROX", "product"], total["peroxide_kg"])
    same(lines["use-month", "PEROX-PRE, PEROX", "product per volume"], total["peroxide_kg"] / total["volume_ml"])
    assert days["caustic_mg_l"].mean() != pytest.approx(total["caustic_kg"] * plan.CAUSTIC_SHARE / total["volume_ml"], rel=1e-9)


def test_the_day_of_23_hours_holds_what_was_read_and_is_named(tmp_path: Path) -> None:
    document, _ = made(tmp_path, 2026, 3)
    notes = [note for section in document.sections for block in section.blocks for note in getattr(block, "notes", ())]
    assert any("28 Mar has 23 hours" in note for note in notes)


def test_year_to_date_runs_from_the_first_record_of_the_year(tmp_path: Path) -> None:
    document, rows = made(tmp_path, 2026, 3, begin=dt.date(2026, 2, 10))
    days = reckoned.days(reckoned.frame(rows), dt.date(2026, 2, 10), dt.date(2026, 3, 31))
    line = table_of(document)["use-year", "CAUSTIC-PH, NAOH", "used"]
    same(line, days["caustic_kg"].sum() * plan.CAUSTIC_SHARE / days["volume_ml"].sum())
    captions = [getattr(block, "caption", "") for section in document.sections for block in section.blocks]
    assert "Year to date, 2026-02-10 to 2026-03-31" in captions


def test_counts_and_statistics_of_the_residual(tmp_path: Path) -> None:
    document, rows = made(tmp_path, 2026, 3)
    lines = table_of(document)
    found = reckoned.of(reckoned.frame(rows), "ENTRY", "free_chlorine", dt.date(2026, 3, 1), dt.date(2026, 3, 31))
    row = "Free chlorine, mg/L"
    taken = found[found["value"] != ""]

    def number(quantity: str) -> str:
        return lines["quality-ENTRY", row, quantity]["value"]

    assert number("due") == str(31 * 2)
    assert number("present") == str(len(taken))
    assert number("missing") == str(62 - len(taken)) != "0"
    assert number("below/ above") == str(int(taken["below"].sum())) != "0"
    halved = taken["number"].where(~taken["below"], taken["number"] / 2)
    same(lines["quality-ENTRY", row, "mean"], halved.mean())
    # The lowest is below detection and says so: it is words, not the number 0.05.
    assert lines["quality-ENTRY", row, "lowest"]["text"] == "<0.05"
    assert number("highest") == printed(taken[~taken["below"]]["number"].max(), number("highest"))
    assert lines["quality-ENTRY", "pH", "mean"]["text"] == "not averaged"


def test_the_lowest_of_a_day_says_of_how_many_grab_readings(tmp_path: Path) -> None:
    document, rows = made(tmp_path, 2026, 3)
    lines = table_of(document)
    frame = reckoned.frame(rows)
    for day in (dt.date(2026, 3, 5), dt.date(2026, 3, 6), dt.date(2026, 3, 20)):
        found = reckoned.of(frame, "ENTRY", "free_chlorine", day, day)
        count = int((found["value"] != "").sum())
        words = f"lowest of {count} grab reading{'s' if count != 1 else ''}"
        assert lines["lowest-ENTRY", f"{day:%d %b}", "Free chlorine rests on"]["text"] == words


def test_missing_values_are_listed_with_the_reason_given_or_its_lack(tmp_path: Path) -> None:
    document, _ = made(tmp_path, 2026, 3)
    words = table_of(document)["missing-values", "ENTRY, Free chlorine", "When, and the reason given"]["text"]
    assert "analyser being cleaned" in words
    assert "reason not stated" in words


def test_a_month_without_records_says_so_and_invents_nothing(tmp_path: Path) -> None:
    now = dt.datetime(2026, 5, 3, tzinfo=dt.UTC)
    book, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 5), now=now)
    document = content.draft(gather(book, 2026, 4, now=now))
    lines = table_of(document)
    assert lines["doses", "Month", "CAUSTIC-PH used"]["text"] == "–"
    measured = ("Treated", "product", "used")
    found = [row for row in lines.values() if row["table"] == "doses" and row["quantity"].rpartition(" ")[2] in measured]
    assert found
    assert not any(row["value"] for row in found)
    assert lines["missing-values", "ENTRY, Free chlorine", "missing"]["value"] == "60"
    assert pypdf.PdfReader(io.BytesIO(content.render(document))).pages


def test_a_month_that_has_not_begun_is_refused(tmp_path: Path) -> None:
    now = dt.datetime(2026, 3, 3, tzinfo=dt.UTC)
    book, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 2, 25), now=now)
    with pytest.raises(NoSuchMonth, match="has not begun"):
        gather(book, 2026, 4, now=now)


def test_what_the_pdf_prints_is_what_the_figures_say(tmp_path: Path) -> None:
    """Every number of the daily table, read back from the printed page, line by line."""
    document, rows = made(tmp_path, 2026, 3)
    pages = pypdf.PdfReader(io.BytesIO(content.render(document))).pages
    text = "\n".join(page.extract_text(extraction_mode="layout") for page in pages)
    days = reckoned.days(reckoned.frame(rows), dt.date(2026, 3, 1), dt.date(2026, 3, 31))
    lines = table_of(document)
    printed_lines = [line.split() for line in text.splitlines()]
    for day, truth in days.iterrows():
        label = f"{day:%d %b}"
        start = label.split()
        of_day = [line[2:] for line in printed_lines if line[:2] == start and len(line) > 3]
        for quantity, value in (
            ("Treated FT-TREATED", truth["volume_ml"]),
            ("CAUSTIC-PH used", truth["caustic_mg_l"]),
            ("PEROX-PRE product", truth["peroxide_kg"]),
        ):
            wanted = printed(value, lines["doses", label, quantity]["value"])
            assert any(wanted == cell.rstrip("wco") for line in of_day for cell in line), (label, quantity, wanted)


def test_two_units_systems_print_the_same_water(tmp_path: Path) -> None:
    toml = people.SMALL.read_text().replace('units = "si"', 'units = "us"')
    now = dt.datetime(2026, 4, 3, tzinfo=dt.UTC)
    book = people.open_works(toml)
    people.join(book)
    rows = plan.lines(dt.date(2026, 2, 20), dt.date(2026, 3, 31))
    plan.bring(book, list(rows), tmp_path, now=now)
    plan.deliver(book, now=now)
    document = content.draft(gather(book, 2026, 3, now=now))
    lines = table_of(document)
    days = reckoned.days(reckoned.frame(list(rows)), dt.date(2026, 3, 1), dt.date(2026, 3, 31))
    assert document.page == "Letter"
    line = lines["doses", "05 Mar", "Treated FT-TREATED"]
    assert line["unit"] == "MG"
    same(line, days["volume_ml"][dt.date(2026, 3, 5)] / 3.785411784)
    line = lines["doses", "05 Mar", "CAUSTIC-PH product"]
    assert line["unit"] == "lb"
    same(line, days["caustic_kg"][dt.date(2026, 3, 5)] / 0.45359237)
    same(lines["doses", "05 Mar", "CAUSTIC-PH used"], days["caustic_mg_l"][dt.date(2026, 3, 5)])


def test_characters_without_a_form_are_named_not_hidden(tmp_path: Path) -> None:
    toml = people.SMALL.read_text().replace('name = "Works outlet"', 'name = "Works outlet 水"')
    now = dt.datetime(2026, 4, 3, tzinfo=dt.UTC)
    book = people.open_works(toml)
    plan.bring(book, [("ENTRY", "2026-03-05T08:00", "pH", "8.10", "", "")], tmp_path, now=now)
    document = content.draft(gather(book, 2026, 3, now=now))
    assert any("U+6C34" in words for _, words in document.closing)


LATE = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)


def test_flow_is_the_sum_of_its_days_with_the_highest_and_the_lowest(tmp_path: Path) -> None:
    book, _ = plan.works(tmp_path, dt.date(2026, 3, 1), dt.date(2026, 3, 31), now=LATE)
    made = content.draft(gather(book, 2026, 3, now=LATE))
    frame = pd.read_csv(io.StringIO(facts.to_csv(made)), keep_default_na=False)
    flow = frame[frame["table"] == "flow"].set_index("quantity")["full_value"]
    days = frame[(frame["table"] == "doses") & frame["quantity"].str.startswith("Treated") & (frame["row"] != "Month")]
    daily = days["full_value"].astype(float)
    assert float(flow["month"]) == pytest.approx(daily.sum(), rel=1e-9)
    assert float(flow["highest day volume"]) == pytest.approx(daily.max())
    assert float(flow["lowest day volume"]) == pytest.approx(daily.min())
    assert float(flow["mean of a day"]) == pytest.approx(daily.mean(), rel=1e-9)


def test_cost_prints_only_where_it_is_chosen_and_is_price_times_mass(tmp_path: Path) -> None:
    book, _ = plan.works(tmp_path, dt.date(2026, 3, 1), dt.date(2026, 3, 31), now=LATE)
    made = content.draft(gather(book, 2026, 3, now=LATE))
    assert "cost" not in [section.key for section in made.sections]
    load = Delivery(
        taken_at=plan.local("2026-02-20T10:00").astimezone(dt.UTC), vessel="NAOH-BULK", product="NAOH", quantity=1000.0, unit="kg",
        strength=25.0, strength_basis="weight_pct", cost=300.0, currency="EUR",
    )  # fmt: skip
    ledger.append(book=book, client_id="priced", kind="line", received={}, rows=[load], by=people.person("olga"), now=LATE)
    works_actions.state(
        book=book, kind="report", subject="form", effective_from=plan.local("2026-03-01T00:00"), by=people.person("adam"),
        value={"sections": ["summary", "cost"]}, now=LATE, reason="the council asks",
    )  # fmt: skip
    made = content.draft(gather(book, 2026, 3, now=LATE))
    assert [section.key for section in made.sections] == ["summary", "cost", *content.ALWAYS]
    frame = pd.read_csv(io.StringIO(facts.to_csv(made)), keep_default_na=False)
    cost = frame[(frame["table"] == "cost") & (frame["row"] == "CAUSTIC-PH, NAOH")].set_index("quantity")["full_value"]
    # 1,000 kg at 25 % for 300.00 is 1.20 a kilogram of NaOH.
    assert float(cost["price"]) == pytest.approx(1.20)
    assert float(cost["cost"]) == pytest.approx(1.20 * float(cost["used, as dosed"]), rel=1e-9)
