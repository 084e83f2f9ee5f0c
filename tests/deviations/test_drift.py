"""The drift test on made-up series: how often it cries out for nothing, how soon it sees a change, what it shrugs off."""

from __future__ import annotations

import math
import random

import pytest

from plant.deviations.rules import drift, response


def series(
    rng: random.Random, days: int, *, noise: float = 0.035, gauge: float = 0.01, shift: object = None
) -> list[drift.Day]:
    """Used over expected less one, with a gauge read once a day whose error is given back the next."""
    errors = [rng.gauss(0, gauge) for _ in range(days + 1)]
    out = []
    for n in range(days):
        change = shift(n) if callable(shift) else 0.0
        out.append(drift.Day(math.exp(rng.gauss(0, noise) + change) - 1 + errors[n] - errors[n + 1], gauge * math.sqrt(2)))
    return out


def on_days(days: list[drift.Day], accepted: float = 730.0, window: int = 60) -> list[int]:
    out = []
    for n in range(len(days)):
        state = drift.watch(days[max(0, n - window + 1) : n + 1], mean_days_between_false_alarms=accepted, lasting_sd=0.02)
        if state is not None and state.on:
            out.append(n)
    return out


@pytest.mark.parametrize("scatter", [0.045, 0.07, math.inf])
def test_the_thresholds_by_simulation(scatter: float) -> None:
    """One false alarm in 365 days, whatever the scatter; endless scatter is a change of any size."""
    least = drift.LEAST_SIZE / scatter
    numpy = pytest.importorskip("numpy")
    rng = numpy.random.default_rng(11)
    series_count, longest = 1500, 2400
    wanted = drift.threshold_for(365.0, least)
    sums = numpy.zeros((longest + 1, series_count))
    first = numpy.full(series_count, numpy.inf)
    for day in range(1, longest + 1):
        sums[day] = sums[day - 1] + numpy.clip(rng.standard_normal(series_count), -drift.CLIP, drift.CLIP)
        lengths = numpy.arange(1, min(drift.WINDOW, day) + 1)
        seen = numpy.abs(sums[day] - sums[day - lengths])
        size = numpy.maximum(seen / lengths[:, None], least)
        ratio = (size * (seen - size * lengths[:, None] / 2)).max(axis=0)
        largest = numpy.sqrt(2 * numpy.maximum(ratio, 0.0))
        first[(largest > wanted) & numpy.isinf(first)] = day
    seen = numpy.isfinite(first)
    mean = numpy.where(seen, first, longest).sum() / seen.sum()
    assert mean == pytest.approx(365.0, rel=0.15)


def test_threshold_between_and_beyond_the_table() -> None:
    assert drift.threshold(1) == drift.THRESHOLDS[0][1]
    assert drift.threshold(1e9) == drift.THRESHOLDS[-1][1]
    assert drift.threshold(365) < drift.threshold(500) < drift.threshold(730)


def test_few_false_alarms_with_fine_and_coarse_gauges() -> None:
    rng = random.Random(21)
    episodes = 0
    for gauge in (0.005, 0.02, 0.06) * 3:
        hits = on_days(series(rng, 360, gauge=gauge))
        episodes += sum(1 for n in hits if n - 1 not in hits)
    # 9 points of 4 quarters: 0.36 a point and 90 days at most.
    assert episodes <= 13


@pytest.mark.parametrize("size", [0.12, -0.12, 0.2])
def test_a_step_is_seen_within_three_days(size: float) -> None:
    late = []
    for seed in range(10):
        hits = on_days(series(random.Random(seed), 70, shift=lambda n: size if n >= 50 else 0.0))
        late.append(next(n for n in hits if n >= 50) - 50)
    assert sorted(late)[5] <= 2


def test_a_ramp_of_a_tenth_over_ten_days_is_seen() -> None:
    late = []
    for seed in range(10):
        days = series(random.Random(100 + seed), 80, shift=lambda n: min(max(n - 50, 0) / 10, 1.0) * 0.15)
        hits = [n for n in on_days(days) if n >= 50]
        late.append(hits[0] - 50 if hits else 99)
    assert sorted(late)[5] <= 8


def test_one_bad_value_whatever_its_size_raises_nothing() -> None:
    for bad in (5.0, -0.95, 0.6):
        days = series(random.Random(5), 60)
        days[50:55] = [drift.Day(0.0, day.gauge_sd) for day in days[50:55]]  # a usual week, neither high nor low
        clean = on_days(days)
        days[55] = drift.Day(bad, days[55].gauge_sd)
        assert [n for n in on_days(days) if n == 55] == [n for n in clean if n == 55]


def test_a_wrong_level_given_back_the_next_day_raises_nothing() -> None:
    days = series(random.Random(6), 60, gauge=0.03)
    before = on_days(days)
    days[54] = drift.Day(days[54].off + 0.5, days[54].gauge_sd)
    days[55] = drift.Day(days[55].off - 0.5, days[55].gauge_sd)
    assert set(on_days(days)) - set(before) == set()


def test_a_change_that_is_over_is_not_carried_on() -> None:
    hits = on_days(series(random.Random(8), 110, shift=lambda n: 0.2 if 40 <= n < 60 else 0.0))
    assert {42, 50, 58} <= set(hits)
    assert not [n for n in hits if 64 <= n < 100]


def test_a_stated_change_starts_it_anew() -> None:
    days = series(random.Random(9), 60, shift=lambda n: 0.2 if n >= 40 else 0.0)
    assert on_days(days)
    days[40] = drift.Day(days[40].off, days[40].gauge_sd, reset=True)
    shifted = [
        drift.Day(day.off - 0.2 if n >= 40 else day.off, day.gauge_sd, day.follows, day.reset) for n, day in enumerate(days)
    ]
    assert on_days(shifted) == []


def test_too_few_days_give_no_answer() -> None:
    assert drift.watch([drift.Day(0.0)] * 4) is None


def test_the_answer_in_the_water_sees_a_weak_lot() -> None:
    rng = random.Random(3)
    values = [0.5 + rng.gauss(0, 0.04) - (0.16 if n >= 45 else 0.0) for n in range(52)]
    seen = [
        n
        for n in range(20, 52)
        if (found := response.watch(values[: n + 1], mean_days_between_false_alarms=2920)) is not None and found[0].on
    ]
    assert seen
    assert min(seen) >= 45
    found = response.watch(values, mean_days_between_false_alarms=2920)
    assert found is not None
    assert found[1] == pytest.approx(-0.16, abs=0.06)


def test_a_series_that_does_not_vary_is_not_judged() -> None:
    assert response.watch([0.5] * 40, mean_days_between_false_alarms=365) is None
    assert response.watch([0.5, 0.6] * 5, mean_days_between_false_alarms=365) is None


def test_memory_of_independent_and_of_lasting_values() -> None:
    rng = random.Random(4)
    free = [rng.gauss(0, 1) for _ in range(400)]
    assert response.memory(free) < 0.2
    lasting = [0.0]
    for _ in range(400):
        lasting.append(0.6 * lasting[-1] + rng.gauss(0, 1))
    assert response.memory(lasting) == pytest.approx(0.6, abs=0.15)


def test_what_one_wrong_reading_took_is_shared_evenly() -> None:
    days = [drift.Day(0.0, 0.01) for _ in range(6)]
    days[2], days[3] = drift.Day(0.4, 0.01), drift.Day(-0.36, 0.01)
    assert [round(day.off, 3) for day in drift.evened(days, 0.0, 0.035)] == [0, 0, 0.02, 0.02, 0, 0]
    # A real change of that size gives nothing back.
    days[3] = drift.Day(0.38, 0.01)
    assert drift.evened(days, 0.0, 0.035) == days


def test_a_fine_gauge_and_a_steady_feeder_still_show_a_large_change() -> None:
    rng = random.Random(2)
    days = [drift.Day(rng.gauss(0, 0.008) + (0.18 if n >= 50 else 0.0)) for n in range(53)]
    assert {51, 52} <= set(on_days(days))
