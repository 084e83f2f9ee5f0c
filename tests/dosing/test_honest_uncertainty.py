"""Is the stated uncertainty the real one? Over simulated works whose truth is known, the true dose must lie within two stated
standard uncertainties on 93 to 97 days of a hundred: fewer means that it is understated, more that it is padded."""

import datetime as dt
import itertools
import math
import random

import pytest

from plant.dosing.contents import Contents, Pour, no_decay
from plant.dosing.day import dose_mg_l
from plant.dosing.reckoning import Consumption
from plant.dosing.spells import Mark, Movement, Used, content_spells, counter_spells, used_between
from plant.dosing.vessel_walk import walk
from plant.works.described import Product

START = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)
DAYS = 12
WORKS = 300


def one_works(rng: random.Random) -> list[tuple[float, float, float]]:
    """(true dose, stated dose, stated sd) of each day of one invented works: its meter and its lots are each a little wrong,
    every dip has its own error, and the rounds are up to two hours off the boundary."""
    gauge_l, strength_pct, meter_pct, load_pct = rng.uniform(2, 20), rng.uniform(0.5, 3), rng.uniform(0.3, 2), 0.5
    density, stated_fraction = 1.2, 0.25
    true_fraction = stated_fraction * (1 + rng.gauss(0, strength_pct / 100))
    meter_factor = 1 / (1 + rng.gauss(0, meter_pct / 100))
    product = Product(
        "P", "P", "NaOH", 25.0, "weight_pct", density_kg_per_L=density, strength_sd_pct=strength_pct, dose_basis="NaOH"
    )
    litres_h, m3_h = rng.uniform(8, 40), rng.uniform(200, 900)
    level, count, at = 6000.0, 0.0, -2.0
    dips, counts, loads, truth = [], [], [], []
    times = [-2.0, *(12.0 * half + rng.uniform(-2, 2) for half in range(2 * DAYS + 1)), 24.0 * DAYS + 6]
    for hours in sorted(times):
        passed = hours - at
        level -= litres_h * passed
        count += m3_h * passed
        if level < 2500:
            brought = 3000.0
            when = START + dt.timedelta(hours=at + passed / 2)
            loads.append(Movement(when, brought * (1 + rng.gauss(0, load_pct / 100)), brought * load_pct / 100))
            level += brought
        at = hours
        moment = START + dt.timedelta(hours=hours)
        dips.append(Mark(moment, level + rng.gauss(0, gauge_l), gauge_l))
        counts.append(Mark(moment, count / meter_factor))
    cuts = [START + dt.timedelta(days=n) for n in range(DAYS + 1)]
    first = Contents(dips[0].at, stated_fraction, stated_fraction, density)
    spells = content_spells(dips, loads)
    pours = [Pour(load.at, load.amount * density, first) for load in loads]
    walked = walk(spells=spells, first=first, pours=pours, tests=[], decay=no_decay, in_kg=False, cuts=cuts)
    water = counter_spells(counts, digits=9, most_per_hour=None)
    for start, end in itertools.pairwise(cuts):
        used, drawn = used_between(spells, start, end), walked.drawn[start, end]
        passed = used_between(water, start, end)
        volume = Used(passed.amount / 1000, passed.amount / 1000 * meter_pct / 100)
        mass = Consumption(drawn.kg, drawn.active_kg, used.sd * density * stated_fraction)
        dose, sd = dose_mg_l(volume, mass, product)
        truth.append((litres_h * density * true_fraction / m3_h * 1000, dose, sd))
    return truth


def test_the_true_dose_lies_within_two_stated_uncertainties():
    rng = random.Random(20260301)
    days = [day for _ in range(WORKS) for day in one_works(rng)]
    within = sum(abs(true - stated) <= 2 * sd for true, stated, sd in days) / len(days)
    assert 0.93 <= within <= 0.97


def test_no_bias():
    """The mean relative error is nought within what so many works can show."""
    rng = random.Random(7)
    errors = [sum(stated / true - 1 for true, stated, _ in one_works(rng)) / DAYS for _ in range(WORKS)]
    mean = sum(errors) / len(errors)
    spread = math.sqrt(sum((error - mean) ** 2 for error in errors) / (len(errors) - 1))
    assert mean == pytest.approx(0, abs=4 * spread / math.sqrt(WORKS))
