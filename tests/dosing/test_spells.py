"""What passed between readings. The numbers of the named traps are reckoned by hand in each test."""

import datetime as dt
import math
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.clock import Calendar
from plant.dosing.spells import Mark, Movement, content_spells, counter_spells, used_between

START = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)


def at(hours: float) -> dt.datetime:
    return START + dt.timedelta(hours=hours)


def mark(hours: float, amount: float, sd: float = 0.0, **more) -> Mark:
    return Mark(at(hours), amount, sd, **more)


class TestTankRefilledDuringTheShift:
    """1,200 + 5,000 − 5,900 = 300 L, not −4,700 (trap of the trade: a delivery between two dips)."""

    def test_use_counts_the_delivery(self):
        spells = content_spells([mark(0, 1200), mark(12, 5900)], [Movement(at(5), 5000)])
        assert [spell.used for spell in spells] == [300]

    def test_negative_use_is_named_never_clipped(self):
        (spell,) = content_spells([mark(0, 1200, 5), mark(12, 5900, 5)])
        assert spell.used == -4700
        assert spell.remarks == ("negative use",)

    def test_a_fall_within_the_gauge_is_no_negative_use(self):
        (spell,) = content_spells([mark(0, 1200, 5), mark(12, 1206, 5)])
        assert spell.used == -6
        assert spell.remarks == ()


class TestDeliveryAtTheVeryTimeOfADip:
    def test_the_dip_shows_it_already(self):
        spells = content_spells([mark(0, 1000), mark(12, 5900), mark(24, 5800)], [Movement(at(12), 5000)])
        assert [spell.used for spell in spells] == [100, 100]

    def test_the_dip_was_taken_before_it(self):
        spells = content_spells([mark(0, 1000), mark(12, 900), mark(24, 5800)], [Movement(at(12), 5000)])
        assert [spell.used for spell in spells] == [100, 100]


class TestDipNotAtTheDayBoundary:
    """Dips at 06:10 and next day 09:40 span 27.5 h: as a day they would be 14.6 % too much."""

    def test_the_share_of_the_day_is_taken(self):
        day = Calendar(ZoneInfo("UTC"), dt.time(6)).bounds(dt.date(2026, 3, 1))
        spells = content_spells([mark(-18, 1180), mark(1 / 6, 1000), mark(27 + 4 / 6, 725)])
        used = used_between(spells, *day)
        # 275 L in 27.5 h is 10 L/h over the last 23 h 50 min; the 10 min before at 180/18.1667 L/h.
        assert used.amount == pytest.approx(10 * (24 - 1 / 6) + 180 / (18 + 1 / 6) / 6)
        assert used.interpolated
        assert 275 / used.amount == pytest.approx(1.146, abs=0.001)

    def test_readings_too_far_apart_say_nothing_of_a_boundary(self):
        spells = content_spells([mark(-3, 1000), mark(28, 700)])
        used = used_between(spells, at(0), at(24))
        assert used.amount is None
        assert "31 h apart" in used.remarks[0]

    def test_thirty_hours_exactly_still_do(self):
        spells = content_spells([mark(-3, 1000), mark(27, 700)])
        assert used_between(spells, at(0), at(24)).amount == pytest.approx(240)

    def test_nothing_after_the_last_reading(self):
        spells = content_spells([mark(0, 1000), mark(12, 900)])
        assert used_between(spells, at(0), at(24)).amount is None


class TestMissedReading:
    """A missed reading is not a zero: taken as 0 L it would make the use equal to the whole tank."""

    def test_the_span_is_bridged_by_its_neighbours(self):
        spells = content_spells([mark(0, 1000), mark(24, 800)])
        assert used_between(spells, at(0), at(24)).amount == 200

    def test_a_stopped_feeder_is_a_true_zero(self):
        spells = content_spells([mark(0, 1000, 5), mark(24, 1000, 5)])
        assert used_between(spells, at(0), at(24)).amount == 0


class TestDaysOf23And25Hours:
    """At a constant 500 m3/h the days hold 11.5 and 12.5 ML; over 24 h they would be 4.2 % off."""

    @pytest.mark.parametrize(("date", "hours"), [(dt.date(2026, 3, 28), 23), (dt.date(2026, 10, 24), 25)])
    def test_elapsed_hours_count(self, date, hours):
        calendar = Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))
        start, end = calendar.bounds(date)
        assert calendar.hours_in(date) == hours
        begin = start - dt.timedelta(hours=5)
        marks = [Mark(begin + dt.timedelta(hours=11 * n), 5500.0 * n) for n in range(5)]
        used = used_between(counter_spells(marks, digits=7, most_per_hour=None), start, end)
        assert used.amount == pytest.approx(500 * hours)


class TestTotaliser:
    def test_rollover(self):
        """9,998,750 to 0,001,250 on seven digits is 2,500 m3, not −9,997,500."""
        (spell,) = counter_spells([mark(0, 9_998_750), mark(12, 1250)], digits=7, most_per_hour=1200)
        assert spell.used == 2500
        assert spell.remarks == ("totaliser rolled over",)

    def test_a_fall_that_no_flow_explains_is_no_rollover(self):
        """A reset without its event: 500,000 to 1,250 would need 9,501,250 m3 in 12 h."""
        marks = [mark(0, 499_000), mark(12, 500_000), mark(24, 1250), mark(36, 2250)]
        spells = counter_spells(marks, digits=7, most_per_hour=1200)
        assert [spell.used for spell in spells] == [1000, 1000]
        assert used_between(spells, at(0), at(36)).amount is None

    def test_a_reset_with_its_event(self):
        marks = [mark(0, 500_000), mark(11, 500_900), mark(11, 0, begins=True), mark(24, 1100)]
        spells = counter_spells(marks, digits=7, most_per_hour=1200)
        assert used_between(spells, at(0), at(24)).amount == 2000

    def test_one_impossible_reading_is_passed_over_and_named(self):
        marks = [mark(0, 1000), mark(12, 61_000), mark(24, 3000)]
        (spell,) = counter_spells(marks, digits=7, most_per_hour=1200)
        assert spell.used == 2000
        assert "passed over" in spell.remarks[0]


class TestContainerChange:
    def test_weighed_when_it_left(self):
        marks = [mark(0, 30), mark(6, 12), mark(6, 50, begins=True), mark(24, 20)]
        assert used_between(content_spells(marks), at(0), at(24)).amount == 18 + 30

    def test_not_weighed_when_it_left_is_estimated_and_said(self):
        used = used_between(content_spells([mark(0, 30), mark(6, 50, begins=True), mark(24, 20)]), at(0), at(24))
        assert used.amount == pytest.approx(30 / 18 * 6 + 30)
        assert "estimated" in used.remarks[0]


class TestUncertainty:
    def test_a_boundary_between_readings_has_its_share(self):
        """An error of 5 L a reading: at a boundary 11/12 of the way, √(1/144 + 121/144) × 5 = 4.602 L."""
        spells = content_spells([mark(0, 1500, 5), mark(12, 1360, 5), mark(24, 1216, 5)])
        used = used_between(spells, at(0), at(23))
        assert used.amount == pytest.approx(140 + 144 * 11 / 12)
        assert used.sd == pytest.approx(math.hypot(5, 4.602), abs=0.001)

    def test_small_drop_from_a_big_tank(self):
        """±5 mm in a 3 m tank is ±35 L a reading, 50 L on a difference: a day of 200 L is known to 25 %."""
        per_reading = math.pi * 1.5**2 * 0.005 * 1000
        (spell,) = content_spells([mark(0, 9000, per_reading), mark(24, 8800, per_reading)])
        used = used_between([spell], at(0), at(24))
        assert used.sd / used.amount == pytest.approx(0.25, abs=0.002)


@given(
    uses=st.lists(st.floats(0, 500), min_size=2, max_size=12),
    gaps=st.lists(st.floats(0.5, 29), min_size=12, max_size=12),
    cut=st.floats(0, 1),
)
def test_what_two_spans_used_is_what_both_used_together(uses, gaps, cut):
    """Splitting a span loses nothing and makes nothing."""
    level, hours, marks = 10_000.0, 0.0, [mark(0, 10_000)]
    for used, gap in zip(uses, gaps, strict=False):
        hours += gap
        level -= used
        marks.append(mark(hours, level))
    spells = content_spells(marks)
    middle = at(hours * cut)
    parts = [used_between(spells, at(0), middle), used_between(spells, middle, at(hours))]
    total = sum(part.amount or 0.0 for part in parts)
    assert total == pytest.approx(sum(uses[: len(marks) - 1]), abs=1e-6)
