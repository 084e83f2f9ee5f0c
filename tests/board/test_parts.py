"""Parts of the board's pages that need no page: numbers in words, what is missing, the store, the answers, files."""

from __future__ import annotations

import csv
import datetime as dt
import io
import zipfile
from zoneinfo import ZoneInfo

import pytest

from plant import clock
from plant.board import dosing_point, exports, missing, pictures, rows, shown, store
from plant.dosing.figures import DayDose, Figure, VesselStock
from plant.readings.queries import Point
from plant.scene import column, window
from plant.supply import queries as supply
from plant.works import described, parameters
from plant.works import queries as works
from tests import people
from tests.board import books

CALENDAR = clock.Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))
NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
SI = described.Works("TST", "Testing Ford", "Europe/Berlin", "07:00", "si")
US = described.Works("TST", "Testing Ford", "Europe/Berlin", "07:00", "us")


def point(**changes) -> Point:
    given = {
        "ref": "1.1", "site": "ENTRY", "parameter": "free_chlorine", "at": NOW, "value": 0.5, "text": "0.50", "unit": "mg/L",
        "qualifier": "", "state": "taken", "typed": "0.50", "typed_unit": "mg/L", "statistic": "reading", "sample": "", "note": "",
        "marks": (), "settled": "", "corrected": False, "date_only": False, "pk": 1,
    } | changes  # fmt: skip
    return Point(**given)


class TestShown:
    @pytest.mark.parametrize(
        ("back", "words"),
        [
            (dt.timedelta(hours=3), "07:00"),
            (dt.timedelta(hours=11), "yesterday 23:00"),
            (dt.timedelta(days=3), "7 Mar 10:00"),
            (dt.timedelta(days=100), "30 Nov 2025 10:00"),
        ],
    )
    def test_a_moment_is_local_and_as_short_as_it_can_be_told_apart(self, back, words):
        assert shown.moment(NOW - back, NOW, CALENDAR) == words

    @pytest.mark.parametrize(
        ("changes", "words"),
        [
            ({}, "0.50 mg/L"),
            ({"typed": "0,50"}, "0,50 mg/L"),
            ({"qualifier": "<", "typed": "< 0.05", "value": 0.05}, "<0.05 mg/L"),
            ({"typed": "500", "typed_unit": "µg/L"}, "0.50 mg/L"),
            ({"state": "not_taken", "value": None, "typed": ""}, "not taken"),
            ({"state": "words", "value": None, "typed": "absent"}, "absent"),
        ],
    )
    def test_a_reading_is_shown_as_typed_where_the_unit_is_the_same(self, changes, words):
        assert str(shown.reading(point(**changes), parameters.PARAMETERS["free_chlorine"], SI)) == words

    def test_a_works_in_us_units_sees_them(self):
        warm = point(parameter="temperature", value=20.0, typed="20.0", unit="°C", typed_unit="°C")
        assert str(shown.reading(warm, parameters.PARAMETERS["temperature"], US)) == "68.0 °F"
        assert str(shown.amount(1000.0, "kg", US)) == "2\u202f205 lb"

    def test_an_uncertainty_goes_with_its_unit(self):
        mass = Figure(1000.0, "kg", sd=10.0)
        assert str(shown.figure(mass, SI, spread=True)) == "1\u202f000 ± 20 kg"
        assert str(shown.figure(mass, US, spread=True)) == "2\u202f205 ± 44 lb"

    def test_what_is_not_known_is_not_zero(self):
        assert str(shown.figure(Figure(None, "mg/L"), SI)) == "not known"


class TestMissing:
    """The small works is walked each shift, at 07:00 and 19:00 local; it is 09:00 UTC, 10:00 local, on 10 March."""

    def found(self, points: list[Point]) -> list[tuple[str, str, str]]:
        stated = works.stated(people.small_works())
        return [(one.site, one.parameter, one.slot.label) for one in missing.missing(stated, points, NOW)]

    def readings(self, *hours_ago: int) -> list[Point]:
        stated = works.stated(people.small_works())
        return [
            point(site=line.site, parameter=line.parameter, at=NOW - dt.timedelta(hours=hours))
            for line in stated.round_lines(NOW)
            for hours in hours_ago
        ]

    def test_a_whole_round_walked_leaves_nothing(self, db):
        # Yesterday 10:00 local in the day shift, 22:00 in the night shift.
        assert self.found(self.readings(24, 12)) == []

    def test_a_shift_without_a_reading_names_each_line_in_walking_order(self, db):
        found = self.found(self.readings(24))
        assert found[:2] == [("RAW", "temperature", "night"), ("ENTRY", "free_chlorine", "night")]
        assert len(found) == 7

    def test_the_running_shift_is_not_missing_yet(self, db):
        assert all(label != "day" for _, _, label in self.found(self.readings(24)))

    def test_not_taken_is_an_answer(self, db):
        points = [
            point(site=one.site, parameter=one.parameter, at=one.at, state="not_taken", value=None)
            for one in self.readings(24, 12)
        ]
        assert self.found(points) == []

    def test_what_is_off_is_not_expected(self, db):
        from plant.works import actions

        book = people.small_works()
        actions.state(
            book=book, kind="state", subject="vessel:PEROX-IBC", value={"is": "off"}, effective_from=people.OPENED, reason="empty",
            by=None, now=NOW,
        )  # fmt: skip
        found = missing.missing(works.stated(book), [], NOW)
        assert "PEROX-IBC" not in {one.site for one in found}
        assert "HYPO-BULK" in {one.site for one in found}


def day_dose(**changes) -> DayDose:
    given = {
        "day": dt.date(2026, 3, 9), "dosing_point": "HYPO-POST", "product": "HYPO", "dose_basis": "Cl2",
        "volume_ml": Figure(6.0, "ML"), "product_kg": Figure(67.0, "kg"), "active_kg": Figure(7.0, "kg"),
        "used_mg_l": Figure(1.17, "mg/L", 0.04), "design_mg_l": Figure(1.10, "mg/L"), "need_mg_l": Figure(1.05, "mg/L"),
    } | changes  # fmt: skip
    return DayDose(**given)


class TestAnswers:
    def test_the_three_answers_are_one_sentence(self):
        assert dosing_point.answers(day_dose()) == (
            "On 9 March 1.17 mg/L was used, 6 % above the design of 1.10; the chemistry asks for 1.05."
        )

    def test_as_designed_is_said_so(self):
        row = day_dose(used_mg_l=Figure(1.101, "mg/L"))
        assert "1.10 mg/L was used, as the design of 1.10" in dosing_point.answers(row)

    def test_what_is_not_known_says_why(self):
        row = day_dose(
            used_mg_l=Figure(None, "mg/L", remarks=("HYPO-BULK: no level near the end",)),
            need_mg_l=Figure(None, "mg/L", remarks=("pH at FILTERED is missing",)),
        )
        words = dosing_point.answers(row)
        assert "the dose used is not known (HYPO-BULK: no level near the end)" in words
        assert "is not known (pH at FILTERED is missing)" in words

    def test_a_weak_day_says_what_to_judge_instead(self):
        assert "judge seven days" in dosing_point.answers(day_dose(weak=True))

    def test_nothing_is_expected_of_what_is_not_in_service(self):
        assert "nothing was expected" in dosing_point.answers(day_dose(expected=False))

    def test_a_change_of_design_starts_a_new_band(self):
        days = [day_dose(day=dt.date(2026, 3, n), design_mg_l=Figure(1.1 if n < 4 else 1.2, "mg/L")) for n in range(1, 7)]
        picture = pictures.dose_run(days, name="x", calendar=CALENDAR, tolerance=20, flags=[], levels={}, width=800)
        assert len([one for one in picture.shapes if getattr(one, "fill", "") == "band"]) == 2


class TestRemarks:
    def test_what_every_day_says_is_said_once(self):
        days = [day_dose(remarks=("need: closed to air", *(("weak",) if n % 2 else ()))) for n in range(8)]
        assert rows.said_every_day(days) == ["need: closed to air"]
        shown_rows = rows.doses(
            days, works=SI, now=NOW, calendar=CALENDAR, code="TST", spread=True, leave_out=rows.said_every_day(days)
        )
        assert [row["remarks"] for row in shown_rows[:2]] == ["", "weak"]

    def test_a_few_days_say_it_themselves(self):
        assert rows.said_every_day([day_dose(remarks=("x",))] * 6) == []


TODAY = dt.date(2026, 3, 10)


def window_of(name: str, first: int | None, last: int | None, *, late: bool = False) -> window.Window:
    def on(days: int | None) -> dt.date | None:
        return None if days is None else TODAY + dt.timedelta(days=days)

    return window.Window(name, on(first), on(last), late)


class TestStore:
    @pytest.mark.parametrize(
        ("windows", "words"),
        [
            ([window_of("Lime", -3, 5)], "May be ordered now: Lime (until 15 March)."),
            ([window_of("Lime", -3, 0)], "Order today, it is the last day: Lime."),
            ([window_of("Lime", 0, None, late=True)], "Order at once, the reserve will be touched: Lime."),
            ([window_of("Lime", 9, 4)], "No whole load fits before the reserve is reached: Lime. Ask for a part load."),
            ([window_of("Lime", None, 4)], "No whole load fits before the reserve is reached: Lime. Ask for a part load."),
            ([], "No product has a lead time and a load stated, so no order window is worked out."),
            ([window_of("Lime", 4, 9)], "Nothing to order today. Next is Lime, from 14 March."),
            ([window_of("Lime", None, None)], "No order window can be worked out for Lime."),
        ],
    )
    def test_what_to_order_today_is_a_sentence(self, windows, words):
        assert store.order_sentence(windows, TODAY) == words

    def test_the_picture_says_the_same(self):
        picture = window.order_window(title="When to order", rows=[window_of("Lime", 4, 9)], today=TODAY)
        assert picture.summary == "Lime: from 14 March to 19 March."
        late = window.order_window(title="When to order", rows=[window_of("Lime", 0, None, late=True)], today=TODAY)
        assert "order at once" in late.summary

    def test_heights_of_a_cone_are_not_shares_of_its_volume(self, monkeypatch):
        seen: dict[str, float] = {}
        monkeypatch.setattr(column, "level_column", lambda **given: seen.update(given))
        form = {"shape": "cone_bottom", "diameter_m": 2.0, "height_m": 2.0, "cone_height_m": 1.0}
        vessel = described.Vessel("V", "Silo", "P", form=form)
        stock = VesselStock("V", "P", NOW, None, 1000.0, NOW, None, None, None, None, None, "weight_pct", None, 1 / 7)
        pictures.vessel_column(stock, vessel, described.Product("P", "p", "x", 1, "weight_pct"), per_day_kg=None, contents="")
        # The cone, a third of the height, holds a third of a metre of the full width, of 2 1/3 m in all: a seventh.
        assert seen["level"] == pytest.approx(1 / 3, abs=1e-6)

    def test_the_use_of_a_shared_product_is_not_guessed(self):
        def one(vessel: str) -> VesselStock:
            return VesselStock(vessel, "P", NOW, None, 1000.0, NOW, None, None, 250.0, 200.0, 25.0, "weight_pct", 20.0)

        def product(*vessels: VesselStock) -> supply.ProductSupply:
            return supply.ProductSupply("P", "Lime", 200.0, 1000.0, 10.0, 20.0, None, None, None, None, vessels)

        # 10 kg active a day, and 4 kg of product hold 1 kg of active.
        assert store.per_day_kg(product(one("A"))) == pytest.approx(40.0)
        assert store.per_day_kg(product(one("A"), one("B"))) is None


class TestFiles:
    ROWS = (("HYPO", 1.5, "=1+1"), ("NAOH", None, "−3"))

    def test_csv_disarms_formulas_and_keeps_numbers(self):
        body = exports.answer("csv", "x", ("product", "kg", "note"), self.ROWS).content.decode()
        assert list(csv.reader(io.StringIO(body))) == [
            ["product", "kg", "note"], ["HYPO", "1.5", "'=1+1"], ["NAOH", "", "−3"],
        ]  # fmt: skip

    @pytest.mark.parametrize(
        "text", ["=1+1", "+1+cmd|' /C calc'!A0", "-1+1", "-2-SUM(A1:A9)", "@SUM(A1)", "  =1+1", "\t=1+1", "\r=1"]
    )
    def test_csv_disarms_whatever_a_spreadsheet_would_reckon(self, text):
        (row,) = list(csv.reader(io.StringIO(exports._csv(["note"], [[text]]).decode()), strict=True))[1:]
        assert row[0].startswith("'")

    @pytest.mark.parametrize("text", ["-8.6", "-0", "+3", "-1e-3", "−3", "a-b"])
    def test_csv_leaves_numbers_and_plain_words_alone(self, text):
        (row,) = list(csv.reader(io.StringIO(exports._csv(["note"], [[text]]).decode())))[1:]
        assert row == [text]

    def test_xlsx_holds_numbers_as_numbers_and_no_formula(self):
        answer = exports.answer("xlsx", "x", ("product", "kg", "note"), self.ROWS)
        sheet = zipfile.ZipFile(io.BytesIO(answer.content)).read("xl/worksheets/sheet1.xml").decode()
        assert '<c r="B2"><v>1.5</v></c>' in sheet
        assert "<f>" not in sheet
        assert answer["Content-Disposition"] == 'attachment; filename="x.xlsx"'


def test_the_builder_of_these_tests_tells_the_truth(db):
    """6 ML a day, 8 mg/L of caustic as NaOH within the wave of 4 % and the gauge's rounding."""
    from plant.dosing import queries as dosing

    book = books.with_history(days=12, now=NOW)
    found = dosing.comparison(book, TODAY - dt.timedelta(days=8), TODAY - dt.timedelta(days=2))
    caustic = [row for row in found if row.dosing_point == "CAUSTIC-PH"]
    assert [row.volume_ml.value for row in caustic] == [pytest.approx(6.0)] * 7
    for row in caustic:
        assert row.used_mg_l.value == pytest.approx(8.0, rel=0.06)
