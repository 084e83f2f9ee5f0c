"""The rules at their boundaries. The published rule stands beside each; where there is none, it says so."""

from __future__ import annotations

import datetime as dt
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.deviations.rules import (
    bounds,
    doses,
    due_dates,
    durations,
    inactivation,
    lateness,
    rounding,
    running,
    shape,
    shares,
    stocks,
)
from plant.deviations.rules.observed import Observed

START = dt.datetime(2026, 3, 2, 6, 0, tzinfo=dt.UTC)


def values(*pairs: tuple[float, str]) -> list[Observed]:
    """(hours after START, value as written)."""
    return [
        Observed(
            START + dt.timedelta(hours=hours),
            Decimal(text.lstrip("<>")),
            text[0] if text[0] in "<>" else "",
            ref=f"1.{n}",
        )
        for n, (hours, text) in enumerate(pairs, start=1)
    ]


def held(pairs: list[tuple[float, str]], *, until: float = 24.0, hours: float = 4.0) -> list[str]:
    found = durations.held(values(*pairs), limit=Decimal("0.2"), hours=hours, low=True, until=START + dt.timedelta(hours=until))
    return [breach.value for breach in found]


class TestHeld:
    """40 CFR 141.72(b)(2): not below 0.2 mg/L for more than 4 hours."""

    def test_exactly_four_hours_passes(self) -> None:
        assert held([(0, "0.19"), (2, "0.15"), (4, "0.20")]) == []

    def test_four_hours_and_a_minute_does_not(self) -> None:
        assert held([(0, "0.19"), (4 + 1 / 60, "0.20")]) == ["4.02 h"]

    def test_a_reading_in_between_does_not_restart_it(self) -> None:
        assert held([(0, "0.19"), (3, "0.10"), (5, "0.3")]) == ["5.00 h"]

    def test_back_at_the_limit_ends_it(self) -> None:
        assert held([(0, "0.19"), (3, "0.2"), (4, "0.19"), (7, "0.21")]) == []

    def test_not_back_yet_runs_to_now(self) -> None:
        assert held([(0, "0.1")], until=4.0) == []
        assert held([(0, "0.1")], until=4.5) == ["4.50 h"]

    def test_the_night_the_clocks_change_counts_elapsed_hours(self) -> None:
        # 01:30 CET to 05:30 CEST on 29 March 2026 is three hours, though the wall clock says four.
        zone = dt.UTC
        start, back = dt.datetime(2026, 3, 29, 0, 30, tzinfo=zone), dt.datetime(2026, 3, 29, 3, 30, tzinfo=zone)
        found = [Observed(start, Decimal("0.1")), Observed(back, Decimal("0.3"))]
        assert durations.held(found, limit=Decimal("0.2"), hours=3, low=True, until=back) == []
        assert len(durations.held(found, limit=Decimal("0.2"), hours=2.9, low=True, until=back)) == 1

    def test_held_above(self) -> None:
        found = durations.held(
            values((0, "5.1"), (6, "4.0")), limit=Decimal("5"), hours=4, low=False, until=START + dt.timedelta(days=1)
        )
        assert [item.value for item in found] == ["6.00 h"]

    def test_no_readings_no_finding(self) -> None:
        assert held([]) == []


class TestBound:
    """40 CFR 141.173(a)(2): the limit is "exceed 1 NTU"; equality passes."""

    def test_equal_is_inside(self) -> None:
        assert bounds.outside(values((0, "1.0"))[0], bounds.Bound(high=Decimal("1"))) == ""
        assert bounds.outside(values((0, "1.001"))[0], bounds.Bound(high=Decimal("1"))) == "high"
        assert bounds.outside(values((0, "0.30"))[0], bounds.Bound(low=Decimal("0.3"))) == ""

    def test_4_04_against_4_0_exceeds_raw_and_complies_rounded(self) -> None:
        # Pitfall of rounding: the usual United States convention rounds to the limit's own digits first (from memory).
        observed = values((0, "4.04"))[0]
        assert bounds.outside(observed, bounds.Bound(high=Decimal("4.0"))) == "high"
        assert bounds.outside(observed, bounds.Bound(high=Decimal("4.0"), rounds=True)) == ""
        assert bounds.outside(values((0, "4.05"))[0], bounds.Bound(high=Decimal("4.0"), rounds=True)) == "high"

    def test_decimals_are_exact_where_floats_are_not(self) -> None:
        # 0.1 + 0.2 as floats lies above 0.3.
        assert bounds.outside(values((0, "0.3"))[0], bounds.Bound(high=Decimal("0.1") + Decimal("0.2"))) == ""

    @pytest.mark.parametrize(
        ("text", "low", "high", "verdict"),
        [
            ("<0.05", "0.30", None, "low"),
            ("<0.50", "0.30", None, "open"),
            ("<0.30", "0.30", None, "low"),
            ("<0.05", None, "0.30", ""),
            ("<0.50", None, "0.30", "open"),
            (">200", None, "100", "high"),
            (">200", None, "500", "open"),
            (">200", "100", None, ""),
        ],
    )
    def test_censored_values_count_where_they_are_certain(
        self, text: str, low: str | None, high: str | None, verdict: str
    ) -> None:
        bound = bounds.Bound(Decimal(low) if low else None, Decimal(high) if high else None)
        assert bounds.outside(values((0, text))[0], bound) == verdict

    def test_censored_values_as_stated(self) -> None:
        observed = values((0, "<0.50"))[0]
        assert bounds.outside(observed, bounds.Bound(low=Decimal("0.3"), censored="half")) == "low"
        assert bounds.outside(observed, bounds.Bound(low=Decimal("0.3"), censored="as_bound")) == ""
        assert bounds.outside(observed, bounds.Bound(low=Decimal("0.3"), censored="zero")) == "low"
        with pytest.raises(ValueError, match="censored"):
            bounds.Bound(low=Decimal(1), censored="guess")

    def test_one_breach_a_side_with_the_worst(self) -> None:
        found = bounds.judge(values((0, "0.25"), (1, "0.10"), (2, "0.35")), bounds.Bound(low=Decimal("0.3")))
        assert [(item.value, item.refs) for item in found] == [("0.1", ("1.1", "1.2"))]
        assert found[0].until == START + dt.timedelta(hours=2)


class TestRounding:
    @pytest.mark.parametrize(
        ("value", "decimals", "expected"),
        [("0.25", 1, "0.3"), ("0.35", 1, "0.4"), ("2.5", 0, "3"), ("-0.25", 1, "-0.3"), ("0.2449999", 1, "0.2")],
    )
    def test_half_up_and_away_from_zero(self, value: str, decimals: int, expected: str) -> None:
        assert rounding.half_up(Decimal(value), decimals) == Decimal(expected)

    @given(st.decimals(min_value=-1000, max_value=1000, places=4), st.integers(0, 3))
    def test_never_off_by_more_than_half_a_digit(self, value: Decimal, decimals: int) -> None:
        assert abs(rounding.half_up(value, decimals) - value) <= Decimal("0.5").scaleb(-decimals)


class TestShares:
    """40 CFR 141.173(a)(1), 141.551: at least 95 % of the month's measurements, by count."""

    @pytest.mark.parametrize(("met", "of", "passes"), [(171, 180, True), (170, 180, False), (19, 20, True), (94, 99, False)])
    def test_171_of_180_passes_and_170_fails(self, met: int, of: int, passes: bool) -> None:
        assert shares.Share(met, of).at_least(95) is passes

    def test_no_measurement_is_neither(self) -> None:
        assert shares.Share(0, 0).at_least(95) is None
        assert shares.Share(0, 0).pct is None

    def test_a_value_that_cannot_be_told_does_not_count_as_met(self) -> None:
        assert shares.share_met([False, None, True]) == shares.Share(1, 3)

    def test_the_five_per_cent_rule_needs_two_months_above(self) -> None:
        # 40 CFR 141.72(b)(3)(i).
        assert shares.undetectable_breach(5.1, 5.1)
        assert not shares.undetectable_breach(5.1, 5.0)
        assert not shares.undetectable_breach(None, 9.0)

    def test_nine_days_of_excursion_pass_and_ten_do_not(self) -> None:
        # 40 CFR 141.82(g): more than nine days in six months.
        assert not shares.excursion_breach(9)
        assert shares.excursion_breach(10)

    def test_a_day_without_a_reading_carries_the_last_value(self) -> None:
        # 40 CFR 141.82(g)(3).
        assert shares.daily_values({2: [7.0, 7.4]}, [1, 2, 3]) == {1: None, 2: pytest.approx(7.2), 3: pytest.approx(7.2)}

    @pytest.mark.parametrize(
        ("method", "expected"),
        [("linear", 9.55), ("hazen", 10.0), ("weibull", 10.0), ("nearest_rank", 10.0), ("inverted_cdf", 10.0)],
    )
    def test_95th_of_one_to_ten_by_method(self, method: str, expected: float) -> None:
        assert shares.percentile(list(range(1, 11)), 95, method=method) == pytest.approx(expected)

    @pytest.mark.parametrize("method", ["linear", "hazen", "weibull", "inverted_cdf"])
    def test_methods_agree_with_numpy(self, method: str) -> None:
        import numpy

        data = [3.1, 0.2, 7.7, 5.0, 5.0, 1.9, 8.4]
        for pct in (5, 25, 50, 90, 95, 100):
            want = float(numpy.percentile(data, pct, method={"inverted_cdf": "inverted_cdf"}.get(method, method)))
            assert shares.percentile(data, pct, method=method) == pytest.approx(want)

    def test_below_the_least_count_none_is_given(self) -> None:
        assert shares.percentile([1, 2, 3], 95, method="linear", least=4) is None
        assert shares.ninetieth([1, 2, 3, 4]) is None

    def test_a_fractional_rank_is_rounded_or_interpolated_as_stated(self) -> None:
        seven = [1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0]
        assert shares.ninetieth(seven, method="rank_rounded") == 6.0
        assert shares.ninetieth(seven, method="rank_interpolated") == pytest.approx(6.3)

    def test_days_in_a_row(self) -> None:
        assert shares.in_a_row([5, 1, 2, 3, 9]) == 3
        assert shares.in_a_row([]) == 0


class TestRunning:
    def test_a_missing_quarter_is_left_out_and_counted(self) -> None:
        # 40 CFR 141.133(a)(1): a breach of monitoring; the mean is taken of what there is.
        assert running.annual([2.0, None, 4.0, 3.0]) == running.RunningMean(3.0, 3, 1)

    def test_no_data_at_all_gives_no_mean(self) -> None:
        assert running.annual([None, None, None, None]).value is None

    def test_only_the_last_four_quarters_count(self) -> None:
        assert running.annual([100.0, 1.0, 1.0, 1.0, 1.0]).value == 1.0

    @pytest.mark.parametrize(("quarters", "breach"), [([16.0], False), ([16.1], True), ([8.0, 8.1], True), ([8.0, 8.0], False)])
    def test_the_first_year_is_lost_when_zeros_cannot_save_it(self, quarters: list[float], breach: bool) -> None:
        # 40 CFR 141.133(a)(3).
        assert running.certain_breach(quarters, 4.0) is breach

    def test_mean_by_volume_not_of_doses(self) -> None:
        assert running.mean_by_volume([10.0, 20.0], [2.0, 10.0]) == pytest.approx(2.5)
        assert running.mean_by_volume([], []) is None


class TestShape:
    def test_a_rate_exactly_at_the_limit_passes(self) -> None:
        assert shape.rate_of_change(values((0, "7.0"), (2, "8.0")), per_hour=Decimal("0.5")) == []
        assert len(shape.rate_of_change(values((0, "7.0"), (2, "8.01")), per_hour=Decimal("0.5"))) == 1

    def test_readings_too_far_apart_say_nothing(self) -> None:
        assert shape.rate_of_change(values((0, "1"), (40, "99")), per_hour=Decimal("0.5")) == []

    def test_stuck_needs_so_many_and_a_change_ends_it(self) -> None:
        still = values((0, "0.311"), (1, "0.311"), (2, "0.311"), (3, "0.312"))
        assert shape.stuck(still, readings=4) == []
        assert [item.value for item in shape.stuck(still, readings=3)] == ["3 × 0.311"]

    def test_the_qualifier_is_part_of_the_value(self) -> None:
        assert shape.stuck(values((0, "<0.1"), (1, "0.1"), (2, "<0.1")), readings=2) == []


class TestLateness:
    DAY = dt.date(2026, 3, 1)
    END = START + dt.timedelta(hours=24)

    def slots(self, due: object) -> list[lateness.Slot]:
        shifts = [("day", START), ("night", START + dt.timedelta(hours=12))]
        return lateness.slots(due, self.DAY, start=START, end=self.END, shifts=shifts)  # type: ignore[arg-type]

    def test_each_shift_has_its_slot(self) -> None:
        assert [(slot.label, slot.start) for slot in self.slots("shift")] == [
            ("day", START),
            ("night", START + dt.timedelta(hours=12)),
        ]

    def test_week_month_and_weekdays(self) -> None:
        assert self.DAY.strftime("%a") == "Sun"
        assert len(self.slots("week")) == 1
        assert self.slots("month") == []
        assert len(self.slots(["Sun"])) == 1
        assert self.slots(["Mon"]) == []
        with pytest.raises(ValueError, match="due is"):
            self.slots("hourly")

    def test_missing_only_after_the_stated_hours(self) -> None:
        slots = self.slots("shift")
        taken = [START + dt.timedelta(hours=1)]
        assert lateness.missing(slots, taken, hours=2, until=self.END + dt.timedelta(hours=1)) == []
        late = lateness.missing(slots, taken, hours=2, until=self.END + dt.timedelta(hours=2))
        assert [slot.label for slot in late] == ["night"]

    def test_a_value_of_the_next_slot_does_not_stand_for_this_one(self) -> None:
        late = lateness.missing(self.slots("shift"), [START + dt.timedelta(hours=12)], hours=0, until=self.END)
        assert [slot.label for slot in late] == ["day"]


def dosed(used: float | None, *, weak: bool = False, sd: float = 0.1, volume: float = 10.0) -> doses.Dosed:
    kg = None if used is None else used * volume
    return doses.Dosed(used, sd, 10.0, 8.0, volume, kg, kg, weak)


class TestDoses:
    def test_exactly_the_stated_per_cent_passes(self) -> None:
        found = doses.difference([dosed(12.0)], to="design")
        assert found is not None
        assert not doses.off_by(found, pct=20)
        above = doses.difference([dosed(12.01)], to="design")
        assert above is not None
        assert doses.off_by(above, pct=20)

    def test_a_coarse_gauge_alone_raises_nothing(self) -> None:
        found = doses.difference([dosed(13.0, sd=2.0)], to="design")
        assert found is not None
        assert not doses.off_by(found, pct=20, sds=2.0)

    def test_a_weak_day_is_judged_by_seven(self) -> None:
        rows = [dosed(10.0, weak=True) for _ in range(6)] + [dosed(17.0, weak=True)]
        found = doses.difference(rows, to="design")
        assert found is not None
        assert (found.days, found.pct) == (7, pytest.approx(10.0))
        assert doses.difference(rows[-3:], to="design") is None

    def test_unknown_is_not_judged(self) -> None:
        assert doses.difference([dosed(None)], to="design") is None
        assert doses.difference([], to="need") is None

    def test_against_need(self) -> None:
        found = doses.difference([dosed(10.0)], to="need")
        assert found is not None
        assert found.pct == pytest.approx(25.0)

    def test_seven_day_mean_by_mass_over_volume(self) -> None:
        # One day at 20 and six at 2 mg/L are 4.57: Saskatchewan EPB 432 (2014) averages over at most seven days.
        rows = [dosed(20.0), *[dosed(2.0) for _ in range(6)]]
        mean = doses.product_over(rows, days=7)
        assert mean == (pytest.approx(32 / 7), 7)
        assert doses.product_over([dosed(None)], days=7) is None


class TestStocks:
    def test_loss_needs_more_than_the_sigmas(self) -> None:
        assert stocks.loss(1000, 940, 20, sigmas=3) is None
        found = stocks.loss(1000, 939, 20, sigmas=3)
        assert found is not None
        assert found.kg == 61
        assert stocks.loss(None, 939, 20, sigmas=3) is None
        assert stocks.loss(1000, 0, 0, sigmas=3) is None

    def test_supply_exactly_as_stated_passes(self) -> None:
        # Wis. Adm. Code NR 811.40(1)(a): at least 30 days.
        assert not stocks.supply_low(30.0, 30)
        assert stocks.supply_low(29.9, 30)
        assert not stocks.supply_low(None, 30)

    def test_a_threshold_is_reached_not_exceeded(self) -> None:
        assert stocks.holding_high(4536.0, 4536.0)
        assert not stocks.holding_high(4535.9, 4536.0)

    def test_a_lot_of_exactly_45_days_passes(self) -> None:
        start = dt.date(2026, 1, 1)
        assert stocks.lot_overdue(dt.date(2026, 2, 15), start, 45) is None
        assert stocks.lot_overdue(dt.date(2026, 2, 16), start, 45) == 1

    def test_strength_exactly_so_far_below_passes(self) -> None:
        assert stocks.strength_short(112.5, 125.0, 10) is None
        assert stocks.strength_short(112.4, 125.0, 10) == pytest.approx(10.08)


def test_a_ratio_of_exactly_one_is_adequate() -> None:
    # 40 CFR 141.74(b)(4): "equal to or greater than 1.0".
    assert inactivation.adequate(1.0)
    assert not inactivation.adequate(0.995)
    assert inactivation.total_ratio([]) is None


def test_next_business_day_passes_over_the_weekend_and_holidays() -> None:
    # 40 CFR 141.75(b)(3)(iii): by the end of the next business day.
    friday = dt.date(2026, 4, 3)
    assert due_dates.next_business_day(friday) == dt.date(2026, 4, 6)
    assert due_dates.next_business_day(friday, frozenset({dt.date(2026, 4, 6)})) == dt.date(2026, 4, 7)
    assert due_dates.monthly_report(2026, 12) == dt.date(2027, 1, 10)


def test_a_feeders_word_that_is_always_off_by_a_tenth_is_no_loss() -> None:
    # The feeder says 10 a day and 11 kg are used; in the last week as before.
    usual = [(11.0, 10.0)] * 25
    found = stocks.against_usual(usual, own_sd_kg=1.0)
    assert found is not None
    assert found == pytest.approx((0.0, 1.0))
    # 14 kg a day in the last four days: 12 kg beyond what its word usually means.
    found = stocks.against_usual([*usual[:21], *[(14.0, 10.0)] * 4], own_sd_kg=1.0)
    assert found is not None
    assert found[0] == pytest.approx(12.0)
    assert stocks.against_usual(usual[:16], own_sd_kg=1.0) is None


def test_a_wrong_day_does_not_spoil_the_mean_of_the_week_after() -> None:
    day = doses.Dosed(10.0, 0.1, 10.0, None, 1.0, 10.0, 40.0, True)
    wrong = doses.Dosed(-60.0, 0.1, 10.0, None, 1.0, -60.0, -240.0, True)
    found = doses.difference([wrong, *[day] * 6], to="design")
    assert found is not None
    assert (found.pct, found.days) == (0.0, 6)
    # On its own day it is what is looked at.
    found = doses.difference([*[day] * 6, wrong], to="design")
    assert found is not None
    assert found.pct == pytest.approx(-100.0)
