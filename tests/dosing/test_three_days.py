"""The three days by hand, through the doors a works would use: files in, comparison out."""

import csv
import datetime as dt
import io

import pytest
from django.core.management import call_command

from plant.dosing import queries, states
from plant.ledger.models import Book
from tests.dosing import three_days

pytestmark = pytest.mark.django_db
FIRST, LAST = dt.date(2026, 3, 28), dt.date(2026, 3, 30)


@pytest.fixture
def book(tmp_path, settings):
    settings.WEIRBOOK_ALLOW_NOW = True
    for name, text in (("works.toml", three_days.WORKS), ("r.csv", three_days.RECORDS), ("d.csv", three_days.DELIVERIES)):
        (tmp_path / name).write_text(text, encoding="utf-8")
    now = ["--now", "2026-04-01T06:00:00Z"]
    call_command("load_works", str(tmp_path / "works.toml"), *now, stdout=io.StringIO())
    call_command("import_records", str(tmp_path / "r.csv"), "--works", "TRI", *now, stdout=io.StringIO())
    call_command("import_deliveries", str(tmp_path / "d.csv"), "--works", "TRI", *now, stdout=io.StringIO())
    return Book.objects.get(code="TRI")


def by_key(rows):
    return {(str(row.day), row.dosing_point): row for row in rows}


@pytest.mark.parametrize("ask", ["reckoned", "kept", "as known"])
def test_every_figure_is_the_one_reckoned_by_hand(book, ask):
    known = book.head_seq if ask == "as known" else None
    if ask == "kept":
        queries.comparison(book, FIRST, LAST)
    rows = by_key(queries.comparison(book, FIRST, LAST, known=known))
    assert rows.keys() == three_days.BY_HAND.keys()
    for key, (volume, _, product, active, dose) in three_days.BY_HAND.items():
        row = rows[key]
        assert row.volume_ml.value == pytest.approx(volume, rel=1e-6)
        assert row.product_kg.value == pytest.approx(product, rel=1e-6)
        # Peroxide loses 1 % a year in store: up to 0.01 % over the three days.
        assert row.active_kg.value == pytest.approx(active, rel=2e-4)
        assert row.used_mg_l.value == pytest.approx(dose, rel=2e-4)


def test_uncertainty_is_the_one_reckoned_by_hand(book):
    rows = by_key(queries.comparison(book, FIRST, LAST))
    for key, sd in three_days.SD_BY_HAND.items():
        assert rows[key].used_mg_l.sd == pytest.approx(sd, rel=0.005)


def test_the_delivery_day_counts_the_weighbridge_too(book):
    """30 March: √50 = 7.071 L of two dips and 0.5 % of 1,000 L delivered: √(50 + 25) = 8.660 of 300 L = 2.887 %;
    with 1 % and 0.5 %: 3.096 % of 7.9563 = 0.246."""
    row = by_key(queries.comparison(book, FIRST, LAST))["2026-03-30", "CAUSTIC"]
    assert row.used_mg_l.sd == pytest.approx(0.246, rel=0.005)


def test_remarks_say_what_was_done(book):
    rows = by_key(queries.comparison(book, FIRST, LAST))
    assert "interpolated" in rows["2026-03-28", "CAUSTIC"].remarks
    assert "totaliser rolled over" in rows["2026-03-28", "CAUSTIC"].remarks
    assert "interpolated" not in rows["2026-03-30", "CAUSTIC"].remarks
    # 272 L of 3,000 L is 9 %: not weak.
    assert not any(row.weak for row in rows.values())


def test_the_period_is_mass_over_volume(book):
    """(86.564 + 96.748 + 95.475) kg ÷ 35 ML = 7.96534 mg/L; the mean of the three doses would be 7.96270."""
    total = {row.dosing_point: row for row in queries.period(queries.comparison(book, FIRST, LAST))}
    assert total["CAUSTIC"].used_mg_l.value == pytest.approx(278.787 / 35, rel=1e-6)
    assert total["CAUSTIC"].volume_ml.value == pytest.approx(35)


def test_reconciliation_of_the_three_days(book):
    """1,500 L there, 1,000 L came, 1,624 L left: 876 L or 1,115.148 kg used; nothing but the dips saw it."""
    rows = {row.product: row for row in queries.reconciliation(book, FIRST, LAST)}
    caustic = rows["NAOH"]
    assert caustic.opening_kg == pytest.approx(1500 * 1.273, rel=1e-6)
    assert caustic.received_kg == 1273
    assert caustic.closing_kg == pytest.approx(1624 * 1.273, rel=1e-6)
    assert caustic.used_by_dips_kg == pytest.approx(876 * 1.273, rel=1e-6)
    assert caustic.unexplained_kg is None
    assert "no second witness" in caustic.remarks


def test_the_trail_reaches_the_readings(book):
    found = queries.trail(book, "used:CAUSTIC:2026-03-28")
    assert found.figure.value == pytest.approx(7.8695, rel=1e-4)
    assert any("11.0000 ML" in step.formula for step in found.steps)
    assert sum(len(step.readings) for step in found.steps) >= 6


def test_the_command_prints_the_documented_columns(book):
    out = io.StringIO()
    call_command("comparison", "--works", "TRI", "--from", "2026-03-28", "--to", "2026-03-30", stdout=out)
    rows = list(csv.DictReader(io.StringIO(out.getvalue())))
    assert list(rows[0]) == [
        "operating_day",
        "dosing_point",
        "volume_ml",
        "product_kg",
        "active_kg",
        "used_mg_per_L",
        "used_sd_mg_per_L",
        "design_mg_per_L",
        "need_mg_per_L",
        "remarks",
    ]
    assert rows[0]["used_mg_per_L"] == "7.8695"
    assert rows[0]["design_mg_per_L"] == "8.0000"


def test_before_anything_was_known_there_is_nothing(book):
    rows = queries.comparison(book, FIRST, LAST, known=1)
    assert all(row.used_mg_l.value is None for row in rows)


class TestKeptDays:
    def test_a_late_entry_drops_what_it_touches(self, book, tmp_path, settings):
        before = by_key(queries.comparison(book, FIRST, LAST))
        (tmp_path / "late.csv").write_text(
            "site,timestamp,parameter,value,unit,note\nDRUM,2026-03-30T19:00,weight,800,kg,display back\n", encoding="utf-8"
        )
        call_command(
            "import_records",
            str(tmp_path / "late.csv"),
            "--works",
            "TRI",
            "--now",
            "2026-04-02T06:00:00Z",
            stdout=io.StringIO(),
        )
        after = by_key(queries.comparison(book, FIRST, LAST))
        assert after["2026-03-30", "PEROXIDE"].used_mg_l.value == pytest.approx(
            before["2026-03-30", "PEROXIDE"].used_mg_l.value, rel=1e-3
        )
        assert states.refresh(book) == Book.objects.get(pk=book.pk).head_seq

    def test_a_correction_changes_the_day_and_the_past_stays_askable(self, book, tmp_path, settings):
        head = book.head_seq
        queries.comparison(book, FIRST, LAST)
        (tmp_path / "fix.csv").write_text(
            "site,timestamp,parameter,value,unit,note,replaces\nTANK,2026-03-31T07:00,level,1.604,m,misread,yes\n",
            encoding="utf-8",
        )
        call_command(
            "import_records", str(tmp_path / "fix.csv"), "--works", "TRI", "--now", "2026-04-02T06:00:00Z", stdout=io.StringIO()
        )
        now = by_key(queries.comparison(book, FIRST, LAST))["2026-03-30", "CAUSTIC"]
        then = by_key(queries.comparison(book, FIRST, LAST, known=head))["2026-03-30", "CAUSTIC"]
        # 20 L more: 320 L × 1.273 × 0.25 ÷ 12 ML
        assert now.used_mg_l.value == pytest.approx(320 * 1.273 * 0.25 / 12, rel=1e-5)
        assert now.corrected
        assert then.used_mg_l.value == pytest.approx(7.9563, rel=1e-4)
