"""The mistakes a naive reckoning makes in this job, each with the number that exposes it, worked out by hand."""

import datetime as dt

import pytest

from plant.dosing import queries
from plant.works import actions as works
from tests.dosing import build
from tests.dosing.build import count, delivery, enter, level, point, read, tank, transfer

pytestmark = pytest.mark.django_db
DAY = dt.date(2026, 3, 10)


def dose(book, day=DAY, last=None):
    rows = queries.comparison(book, day, last or day)
    return rows[0] if last is None else rows


class TestDutyAndStandby:
    def test_both_tanks_count_and_a_changeover_splits_the_use(self):
        """130 L from duty, then 170 L from standby: 300 L, not 130. 300 × 1.2 × 0.25 ÷ 12 ML = 7.5 mg/L."""
        book = build.book(tank("A"), tank("B"), point("A", "B"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            level("B", "2026-03-10T07:00", 1000),
            level("A", "2026-03-10T17:00", 870),
            level("B", "2026-03-10T17:00", 1000),
            level("A", "2026-03-11T07:00", 870),
            level("B", "2026-03-11T07:00", 830),
        )
        assert dose(book).used_mg_l.value == pytest.approx(7.5)


class TestDayTankTransfer:
    def test_a_transfer_is_not_consumption(self):
        """500 L go over to the day tank; 320 L leave it. The dose is of 320 L, not of 820."""
        book = build.book(tank("BULK"), tank("DAYTANK", role="day"), point("DAYTANK"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("BULK", "2026-03-10T07:00", 3000),
            level("DAYTANK", "2026-03-10T07:00", 200),
            transfer("BULK", "DAYTANK", "2026-03-10T09:00", 500),
            level("BULK", "2026-03-11T07:00", 2500),
            level("DAYTANK", "2026-03-11T07:00", 380),
        )
        assert dose(book).product_kg.value == pytest.approx(320 * 1.2)
        assert dose(book).used_mg_l.value == pytest.approx(320 * 1.2 * 0.25 / 12)


class TestCarrierWater:
    def test_made_one_to_four_and_200_litres_drawn_is_40_litres_of_product(self):
        """100 L of product and 400 L of water; the day tank was empty. 200 L drawn hold 40 L × 1.2 kg/L × 0.25 = 12 kg NaOH."""
        book = build.book(tank("BULK"), tank("DAYTANK", role="day"), point("DAYTANK"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("BULK", "2026-03-10T07:00", 3000),
            level("DAYTANK", "2026-03-10T07:00", 0),
            transfer("BULK", "DAYTANK", "2026-03-10T07:00", 100, water_l=400),
            level("BULK", "2026-03-11T07:00", 2900),
            level("DAYTANK", "2026-03-11T07:00", 300),
        )
        row = dose(book)
        assert row.active_kg.value == pytest.approx(12.0)
        assert row.used_mg_l.value == pytest.approx(1.0)


class TestHeelAndUllage:
    def test_the_heel_is_not_usable(self):
        """1,000 L held, 200 L of them below the suction: 800 × 1.2 × 0.25 = 240 kg usable of 300."""
        book = build.book(tank("A", heel=200), point("A"))
        enter(book, level("A", "2026-03-10T07:00", 1000))
        (row,) = queries.stock(book, build.at("2026-03-10T08:00"))
        assert row.active_kg == pytest.approx(300)
        assert row.usable_active_kg == pytest.approx(240)


class TestNullIsNotZero:
    def test_a_reading_not_taken_does_not_empty_the_tank(self):
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            read("A", "2026-03-10T19:00", "level", None),
            level("A", "2026-03-11T07:00", 700),
        )
        assert dose(book).product_kg.value == pytest.approx(360)

    def test_without_a_closing_dip_nothing_is_claimed(self):
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            read("A", "2026-03-11T07:00", "level", None),
        )
        row = dose(book)
        assert row.used_mg_l.value is None
        assert any(remark.startswith("A:") for remark in row.remarks)


class TestOperatingDayFromSeven:
    def test_the_night_shift_belongs_to_the_day_before(self):
        """A dip at 03:00 on 1 April is March's; the month ends at 07:00 on 1 April, not at midnight."""
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-31T07:00", 1000),
            count("2026-04-01T07:00", 13000),
            count("2026-04-02T07:00", 25000),
            level("A", "2026-03-31T07:00", 1000),
            level("A", "2026-04-01T03:00", 800),
            level("A", "2026-04-01T07:00", 700),
            level("A", "2026-04-02T07:00", 400),
        )
        march, april = dose(book, dt.date(2026, 3, 31), dt.date(2026, 4, 1))
        assert march.product_kg.value == pytest.approx(300 * 1.2)
        assert april.product_kg.value == pytest.approx(300 * 1.2)


class TestWorksOff:
    def test_the_dose_is_mass_over_treated_water_however_long_it_stood(self):
        """Twelve hours off: 150 L into 6 ML is 7.5 mg/L. Spread over 24 h of the usual flow it would be 3.75."""
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-10T19:00", 7000),
            count("2026-03-11T07:00", 7000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-10T19:00", 850),
            level("A", "2026-03-11T07:00", 850),
        )
        assert dose(book).used_mg_l.value == pytest.approx(7.5)

    def test_chemical_gone_while_off_is_said(self):
        book = build.book(tank("A"), point("A"))
        works.state(
            book=book,
            kind="state",
            subject="dosing_point:CAUSTIC",
            value={"is": "off"},
            effective_from=build.at("2026-03-09T07:00"),
            reason="overhaul",
            by=None,
            now=build.at("2026-03-09T07:00"),
        )
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 700),
        )
        row = dose(book)
        assert not row.expected
        assert any("while not in service" in remark for remark in row.remarks)

    def test_no_water_gives_no_dose(self):
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 1000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 1000),
        )
        row = dose(book)
        assert row.used_mg_l.value is None
        assert "no water treated" in row.remarks


class TestDenominator:
    def test_each_point_uses_the_flow_at_its_own_point(self):
        """The same 300 L into 12 ML raw or into 11.4 ML treated: 7.5 or 7.89 mg/L."""
        raw = '\n[[meter]]\ncode = "RAWFT"\nname = "Raw"\nunit = "m3"\ndigits = 7\n'
        book = build.book(raw, tank("A"), point("A", meter="RAWFT"))
        enter(
            book,
            count("2026-03-10T07:00", 0, "RAWFT"),
            count("2026-03-11T07:00", 12000, "RAWFT"),
            count("2026-03-10T07:00", 0),
            count("2026-03-11T07:00", 11400),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 700),
        )
        assert dose(book).used_mg_l.value == pytest.approx(7.5)


class TestDesignDoseChangedMidMonth:
    def change(self, book, when, value):
        works.state(
            book=book,
            kind="design_dose",
            subject="CAUSTIC",
            value={"dose_mg_per_L": value},
            effective_from=build.at(when),
            reason="raw water",
            by=None,
            now=build.at(when),
        )

    def test_each_day_is_held_against_the_dose_then_in_force(self):
        book = build.book(tank("A"), point("A"))
        self.change(book, "2026-03-11T07:00", 6.0)
        rows = queries.comparison(book, DAY, DAY + dt.timedelta(days=1))
        assert [row.design_mg_l.value for row in rows] == [8.0, 6.0]

    def test_a_change_within_the_day_is_weighted_by_time(self):
        """8 mg/L for 6 of 24 hours, then 6 mg/L: 6.5 mg/L."""
        book = build.book(tank("A"), point("A"))
        self.change(book, "2026-03-10T13:00", 6.0)
        (row,) = queries.comparison(book, DAY, DAY)
        assert row.design_mg_l.value == pytest.approx(6.5)
        assert any("design changed" in remark for remark in row.remarks)

    def test_the_month_is_weighted_by_its_water(self):
        """10 ML at 8 and 30 ML at 6 mg/L: 6.5 mg/L, not 7."""
        book = build.book(tank("A"), point("A"))
        self.change(book, "2026-03-11T07:00", 6.0)
        enter(
            book,
            count("2026-03-10T07:00", 0),
            count("2026-03-11T07:00", 10000),
            count("2026-03-12T07:00", 40000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 700),
            level("A", "2026-03-12T07:00", 200),
        )
        (total,) = queries.period(queries.comparison(book, DAY, DAY + dt.timedelta(days=1)))
        assert total.design_mg_l.value == pytest.approx(6.5)
        # Likewise the dose used: 800 L × 0.3 kg/L ÷ 40 ML, not the mean of 9 and 5 mg/L.
        assert total.used_mg_l.value == pytest.approx(6.0)


class TestPressureGauge:
    """Trap: a pressure gauge set for water reads a third too high in liquid alum of 1.335 kg/L."""

    def use(self, factor: str):
        gauged = tank("A").replace("heel_L = 0\n", f"heel_L = 0\n{factor}")
        book = build.book(gauged, point("A"))
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1335),
            level("A", "2026-03-11T07:00", 1335 - 400.5),
        )
        return dose(book)

    def test_the_setting_belongs_to_the_instrument(self):
        """1.335 m shown are 1.000 m: 300 L, not 400.5 L, go into 12 ML at 0.3 kg/L: 7.5 mg/L, not 10.0."""
        assert self.use("level_factor = 0.74906367\n").used_mg_l.value == pytest.approx(7.5, rel=1e-6)

    def test_without_it_the_dose_is_a_third_too_high(self):
        assert self.use("").used_mg_l.value == pytest.approx(7.5 * 1.335, rel=1e-6)


class TestHorizontalTank:
    """Trap: a linear gauge on a horizontal cylinder: a quarter of the depth is a fifth of the contents."""

    def test_a_quarter_of_the_depth_is_19_6_percent(self):
        lying = (
            '[[vessel]]\ncode = "A"\nname = "Lying"\nproduct = "NAOH"\nshape = "horizontal_cylinder"\n'
            'diameter_m = 2.0\nlength_m = 5.0\nheads = "flat"\n'
        )
        book = build.book(lying, point("A"))
        whole = 3.141592653589793 * 5 * 1000
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            read("A", "2026-03-10T07:00", "level", 0.5),
            read("A", "2026-03-11T07:00", "level", 0.2),
        )
        # 25 % of the depth holds 19.55 %, 10 % holds 5.20 %: 14.35 % of 15,708 L, not 15 %.
        used_l = (0.1955 - 0.0520) * whole
        assert dose(book).product_kg.value == pytest.approx(used_l * 1.2, rel=1e-3)


class TestLateEntry:
    def test_monday_for_friday_counts_on_friday_and_is_known_from_monday(self):
        """The closing dip of Friday is entered on Monday: Friday's dose comes out then, and was unknown before."""
        book = build.book(tank("A"), point("A"))
        enter(
            book,
            count("2026-03-13T07:00", 1000),
            count("2026-03-14T07:00", 13000),
            level("A", "2026-03-13T07:00", 1000),
            now="2026-03-14T08:00",
        )
        friday = dt.date(2026, 3, 13)
        known = book.head_seq
        assert dose(book, friday).used_mg_l.value is None
        enter(book, level("A", "2026-03-14T07:00", 700), now="2026-03-16T09:00")
        assert dose(book, friday).used_mg_l.value == pytest.approx(7.5)
        assert queries.comparison(book, friday, friday, known=known)[0].used_mg_l.value is None


class TestCylinderOnItsOwnTare:
    def test_net_is_gross_less_its_own_tare(self):
        scale = """
[[product]]
code = "CL2"
name = "Chlorine"
chemical = "Cl2"
strength = 100.0
strength_basis = "weight_pct"
dose_basis = "Cl2"
[[vessel]]
code = "CYL"
name = "Cylinder on the scale"
product = "CL2"
role = "cylinder"
shape = "scale"
tare_kg = 61.0
weight_sd_kg = 0.2
[[dosing_point]]
code = "GAS"
name = "Chlorine gas"
product = "CL2"
vessels = ["CYL"]
meter = "FT"
need = { model = "none" }
"""
        book = build.book(scale)
        enter(
            book,
            count("2026-03-10T07:00", 0),
            count("2026-03-11T07:00", 12000),
            read("CYL", "2026-03-10T07:00", "weight", 90.0, "kg"),
            read("CYL", "2026-03-10T15:00", "weight", 66.0, "kg"),
            read("CYL", "2026-03-10T15:00", "container_change", 129.0, "kg"),
            read("CYL", "2026-03-11T07:00", "weight", 123.0, "kg"),
        )
        # 24 kg from the first; its last 5 kg leave with it; 6 kg from the second: 30 kg into 12 ML.
        assert dose(book).used_mg_l.value == pytest.approx(2.5)


class TestDeliveryInTheWrongTank:
    def test_reversed_and_entered_again_both_tanks_come_right(self):
        """A load booked to B that went into A: A's use looks negative until it is put right, and then is 300 L."""
        book = build.book(tank("A"), tank("B"), point("A"))
        wrong = delivery("B", "2026-03-10T10:00", 1200)
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 1700),
            level("B", "2026-03-10T07:00", 500),
            level("B", "2026-03-11T07:00", 500),
            wrong,
        )
        assert "A: negative use" in dose(book).remarks
        assert dose(book).product_kg.value == pytest.approx(-700 * 1.2)
        void = delivery("B", "2026-03-10T10:00", 1200)
        void.supersedes, void.voided, void.reason = wrong, True, "booked to the wrong tank"
        enter(book, void, delivery("A", "2026-03-10T10:00", 1200))
        assert dose(book).product_kg.value == pytest.approx(300 * 1.2)


class TestTwoDeliveriesThatContradictEachOther:
    def book(self):
        book = build.book(tank("A"), point("A"))
        first, second = delivery("A", "2026-03-10T10:00", 1200), delivery("A", "2026-03-10T10:00", 1440)
        second.marks = ["conflict"]
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 1700),
            first,
            second,
        )
        return book, first

    def test_count_once_and_are_named(self):
        """1,000 L came, not 1,000 and 1,200: 300 L were used, not 1,500."""
        book, _ = self.book()
        row = dose(book)
        assert row.product_kg.value == pytest.approx(300 * 1.2)
        assert any("contradicts an earlier one" in remark for remark in row.remarks)

    def test_when_the_first_is_reversed_the_second_counts(self):
        """1,200 L came after all: 500 L."""
        book, first = self.book()
        void = delivery("A", "2026-03-10T10:00", 1200)
        void.supersedes, void.voided, void.reason = first, True, "misread note"
        enter(book, void)
        assert dose(book).product_kg.value == pytest.approx(500 * 1.2)

    def test_one_that_no_vessel_could_hold_is_left_out(self):
        book = build.book(tank("A"), point("A"))
        absurd = delivery("A", "2026-03-10T10:00", 120000)
        absurd.marks = ["impossible"]
        enter(
            book,
            count("2026-03-10T07:00", 1000),
            count("2026-03-11T07:00", 13000),
            level("A", "2026-03-10T07:00", 1000),
            level("A", "2026-03-11T07:00", 700),
            absurd,
        )
        assert dose(book).product_kg.value == pytest.approx(300 * 1.2)
        assert any("more than the vessel can hold" in remark for remark in dose(book).remarks)


def test_design_of_a_point_never_stated_is_none():
    book = build.book(tank("A"), point("A").split("[[design_dose]]")[0])
    (row,) = queries.comparison(book, DAY, DAY)
    assert row.design_mg_l.value is None
