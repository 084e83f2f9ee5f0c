"""Use ahead: what goes on, what a season and a stated change do, and an honest band."""

import datetime as dt
import math
import random

import pytest

from plant.supply.forecast import DayUse, forecast, naive

TODAY = dt.date(2026, 6, 30)


def history(days: int, dose=lambda day: 2.0, water=lambda day: 10.0, noise: float = 0.0, seed: int = 1):
    rng = random.Random(seed)
    out = {}
    for back in range(days):
        day = TODAY - dt.timedelta(days=back)
        volume = water(day) * (1 + rng.gauss(0, noise))
        out[day] = DayUse(dose(day) * volume * (1 + rng.gauss(0, noise)), volume)
    return out


def season(day: dt.date) -> float:
    return 10 * (1 + 0.3 * math.sin(2 * math.pi * (day.timetuple().tm_yday - 100) / 365))


def test_an_even_past_goes_on():
    made = forecast(history(60), TODAY)
    assert made.total(30) == pytest.approx(600)
    assert made.lasts_days(200) == pytest.approx(10)


def test_nothing_is_said_of_too_short_a_past():
    assert forecast(history(2), TODAY) is None


def test_a_stated_change_of_design_scales_the_use():
    change = TODAY + dt.timedelta(days=10)
    made = forecast(history(60), TODAY, design=lambda day: 4.0 if day > change else 2.0)
    assert made.per_day_kg[9] == pytest.approx(20)
    assert made.per_day_kg[10] == pytest.approx(40)


def test_a_change_within_the_recent_past_does_not_linger():
    """Half of the last 28 days ran at the old design: the forecast is of the new one."""
    change = TODAY - dt.timedelta(days=14)
    made = forecast(
        history(60, dose=lambda day: 3.0 if day > change else 2.0), TODAY, design=lambda day: 3.0 if day > change else 2.0
    )
    assert made.per_day_kg[0] == pytest.approx(30)


def test_last_year_tells_of_the_season():
    past = history(500, water=season)
    made = forecast(past, TODAY)
    came = sum(2 * season(TODAY + dt.timedelta(days=n)) for n in range(1, 43))
    assert made.season_used
    assert abs(made.total(42) / came - 1) < abs(naive(past, TODAY, 42) / came - 1)


def test_the_band_holds_about_nine_times_in_ten():
    """Walking through a noisy year and a half, week by week: what came lies within the band of four weeks ahead."""
    past = history(560, water=season, noise=0.06, seed=5)
    held = tried = 0
    for weeks in range(5, 27):
        then = TODAY - dt.timedelta(days=7 * weeks)
        made = forecast({day: use for day, use in past.items() if day <= then}, then)
        low, high = made.band(28)
        came = sum(past[then + dt.timedelta(days=n)].active_kg for n in range(1, 29))
        held += low <= came <= high
        tried += 1
    assert held / tried >= 0.75
