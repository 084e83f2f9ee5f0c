"""Real readings, from files to the board, the comparison and the signed page. Sources: tests/data/SOURCES.md."""

import csv
import datetime as dt
import io
import statistics
from pathlib import Path

import pypdf
import pytest
from django.core.management import call_command

from plant.accounts.models import Person
from plant.deviations import queries as deviations
from plant.dosing import queries as dosing
from plant.ledger import verify
from plant.ledger.models import Book
from plant.readings.models import Reading
from tests import people

pytestmark = pytest.mark.django_db
OPEN = Path(__file__).resolve().parents[1] / "data" / "open"


def load(name, code, records, *options):
    out = io.StringIO()
    call_command("load_works", str(OPEN / name), stdout=out)
    call_command(
        "import_records", str(OPEN / records), "--works", code, "--units", str(OPEN / "units.csv"), *options, stdout=out
    )
    return Book.objects.get(code=code), out.getvalue()


def published(name):
    with (OPEN / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


class TestAMonthOfACity:
    """16 stations in August 2015: free chlorine, turbidity, fluoride and coliforms as the city published them."""

    @pytest.fixture
    def city(self):
        return load("city.toml", "CITY", "city_network_2015_08.csv")

    def test_every_row_is_there_and_what_is_no_plain_number_is_counted(self, city):
        book, said = city
        rows = published("city_network_2015_08.csv")
        less = sum(row["value"].strip().startswith("<") for row in rows)
        more = sum(row["value"].strip().startswith(">") for row in rows)
        kept = Reading.objects.filter(book=book)
        assert kept.filter(qualifier="<").count() == less == 747
        assert kept.filter(qualifier=">").count() == more == 4
        assert f"{less + more} with < or >" in said
        assert kept.count() == len({tuple(row.values()) for row in rows})
        assert list(verify.everything()) == []

    def test_the_review_finds_what_a_plain_count_finds(self, city):
        book, _ = city
        call_command("review", "--works", "CITY", "--from", "2015-08-01", "--to", "2015-08-31", stdout=io.StringIO())
        low = {
            row["site"].strip()
            for row in published("city_network_2015_08.csv")
            if row["parameter"] == "free_chlorine" and float(row["value"]) < 0.20
        }
        found = deviations.between(book, dt.date(2015, 8, 1), dt.date(2015, 8, 31))
        assert {item.subject for item in found if item.kind == "bound" and item.parameter == "free_chlorine"} == low
        assert low
        coliform = [item for item in found if item.parameter == "coliform" and item.kind == "bound"]
        assert {item.subject for item in coliform} == {
            row["site"].strip()
            for row in published("city_network_2015_08.csv")
            if row["parameter"] == "coliform" and "<" not in row["value"] and float(row["value"].strip(" >")) > 1
        }

    def test_board_and_report_show_it(self, city, tmp_path):
        book, _ = city
        people.join(book, "sam", now=dt.datetime(2026, 1, 1, tzinfo=dt.UTC))
        client = people.signed_in("sam")
        assert client.get("/w/CITY/").status_code == 200
        call_command(
            "issue_report", "--works", "CITY", "--month", "2015-08", "--output", str(tmp_path / "m.pdf"), stdout=io.StringIO()
        )
        text = "\n".join(page.extract_text() for page in pypdf.PdfReader(tmp_path / "m.pdf").pages)
        chlorine = [
            float(row["value"])
            for row in published("city_network_2015_08.csv")
            if row["parameter"] == "free_chlorine" and row["site"].strip() == "1S07"
        ]
        assert "rules govern" in text
        assert f"{min(chlorine):.2f}" in text
        assert f"{statistics.median(chlorine):.2f}" in text
        assert Person.objects.filter(username="sam").exists()


class TestARiver:
    """One station, 2010 and 2011: what softening its water would need, day by day."""

    @pytest.fixture
    def river(self):
        return load("river.toml", "RIVER", "river_2010_2011.csv")

    def test_minus_999_is_not_a_temperature(self, river):
        book, _ = river
        odd = Reading.objects.get(book=book, parameter="temperature", value__lt=-100)
        assert odd.marks

    def test_lime_and_soda_follow_the_published_formulas(self, river):
        """Lime, CaO lb/Mgal = 10.6 CO2 + 4.7 (carbonate hardness + magnesium + excess), soda 8.8 × non-carbonate hardness: ASCE/AWWA
        Water Treatment Plant Design, ch. 11, eq. 11.10 and 11.18; the coefficients are rounded by up to 0.9 %. CO2 by the shortcut
        1.6 × 10^(6 − pH) × HCO3 of USGS TWRI 5-A1 (second-hand), with HCO3 = 1.22 × alkalinity; it holds for 25 °C, and this river is
        colder, which makes up to 4 % of the lime."""
        book, _ = river
        by_day: dict[str, dict[str, float]] = {}
        for row in published("river_2010_2011.csv"):
            by_day.setdefault(row["timestamp"], {})[row["parameter"]] = float(row["value"])
        days = {
            day: values
            for day, values in by_day.items()
            if {"hardness", "alkalinity", "magnesium", "calcium", "pH", "temperature"} <= values.keys()
            and values["temperature"] > -100
        }
        assert len(days) > 35
        checked = 0
        for day, water in days.items():
            on = dt.date.fromisoformat(day)
            rows = {row.dosing_point: row for row in dosing.comparison(book, on, on)}
            magnesium, calcium = water["magnesium"] * 4.118, water["calcium"] * 2.497
            hardness = magnesium + calcium
            carbonate = min(water["alkalinity"], hardness)
            co2 = 1.6 * 10 ** (6 - water["pH"]) * water["alkalinity"] * 1.22
            lime = (10.6 * co2 + 4.7 * (carbonate + magnesium + 62.5)) / 8.345
            soda = 8.8 * (hardness - carbonate) / 8.345
            assert rows["LIME-IN"].need_mg_l.value == pytest.approx(lime, rel=0.04)
            assert rows["SODA-IN"].need_mg_l.value == pytest.approx(soda, rel=0.02, abs=0.05)
            checked += 1
        assert checked == len(days)

    def test_a_day_long_after_the_last_sample_says_how_old_it_is(self, river):
        book, _ = river
        rows = dosing.comparison(book, dt.date(2010, 3, 6), dt.date(2010, 3, 6))
        assert all(row.need_mg_l.value is None for row in rows)
        assert all(any(remark.startswith("need:") for remark in row.remarks) for row in rows)
