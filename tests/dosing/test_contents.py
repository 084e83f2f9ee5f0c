"""Lots, strength and mass, against hand reckoning and against an independent simple one."""

import datetime as dt

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plant.dosing.contents import Contents, Pour, StrengthTest, no_decay
from plant.dosing.spells import Mark, Movement, content_spells
from plant.dosing.vessel_walk import walk

START = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)


def at(hours: float) -> dt.datetime:
    return START + dt.timedelta(hours=hours)


def contents(fraction: float, density: float | None = 1.2, lot: str = "") -> Contents:
    return Contents(START, fraction, fraction, density, (lot,) if lot else ())


def test_lots_mix_by_mass():
    """1,000 kg at 10 % and 500 kg at 13 % make 1,500 kg at 11 %."""
    mixed = contents(0.10, lot="A").mixed(1000, contents(0.13, lot="B"), 500)
    assert mixed.fraction == pytest.approx(0.11)
    assert mixed.lots == ("A", "B")


def test_carrier_water_thins_and_is_no_product():
    """A day tank made 1:4 by volume, 200 L drawn, is 40 L of product (the trade's trap: carrier water counted as product)."""
    made = contents(0.0).mixed(0.0, contents(0.125, 1.25), 100 * 1.25, water_l=400)
    drawn_kg = 200 * made.density_kg_l
    assert drawn_kg * made.fraction == pytest.approx(40 * 1.25 * 0.125)


def test_an_empty_vessel_takes_the_lot_as_it_is():
    assert contents(0.1).mixed(0.0, contents(0.13), 500).fraction == 0.13


class TestWalk:
    def test_use_before_a_delivery_leaves_at_the_old_strength(self):
        """100 L/h from 1,000 L of 10 %; at 5 h 500 L of 16 % into 500 L left: 13 %; then 100 L/h for 5 h more."""
        marks = [Mark(at(0), 1000), Mark(at(10), 500)]
        spells = content_spells(marks, [Movement(at(5), 500)])
        out = walk(
            spells=spells,
            first=contents(0.10, 1.0),
            pours=[Pour(at(5), 500, contents(0.16, 1.0))],
            tests=[],
            decay=no_decay,
            in_kg=False,
            cuts=[at(0), at(10)],
        )
        drawn = out.drawn[at(0), at(10)]
        assert drawn.kg == pytest.approx(1000)
        assert drawn.active_kg == pytest.approx(500 * 0.10 + 500 * 0.13)

    def test_a_strength_test_sets_it_anew(self):
        spells = content_spells([Mark(at(0), 1000), Mark(at(10), 0)])
        out = walk(
            spells=spells,
            first=contents(0.10, 1.0),
            pours=[],
            tests=[StrengthTest(at(5), 0.08)],
            decay=no_decay,
            in_kg=False,
            cuts=[at(0), at(10)],
        )
        assert out.drawn[at(0), at(10)].active_kg == pytest.approx(500 * 0.10 + 500 * 0.08)

    def test_amount_between_readings(self):
        spells = content_spells([Mark(at(0), 1000), Mark(at(10), 1000)], [Movement(at(5), 500)])
        out = walk(spells=spells, first=contents(0.1), pours=[], tests=[], decay=no_decay, in_kg=True, cuts=[at(0), at(10)])
        assert out.amount_at(at(4)) == pytest.approx(1000 - 500 * 0.4)
        assert out.amount_at(at(6)) == pytest.approx(1500 - 500 * 0.6)
        assert out.amount_at(at(11)) is None


@settings(max_examples=60)
@given(
    rates=st.lists(st.floats(0, 40), min_size=4, max_size=20),
    loads=st.dictionaries(st.integers(0, 19), st.tuples(st.floats(50, 900), st.floats(0.05, 0.16)), max_size=4),
)
def test_product_and_chemical_are_conserved(rates, loads):
    """Against an independent reckoning in small even steps: what was there and came in, less what is left, is what left."""
    steps_per_spell = 40
    kg, chemical = 4000.0, 4000.0 * 0.12
    marks = [Mark(at(0), kg)]
    movements, pours, used_chemical = [], [], 0.0
    for index, rate in enumerate(rates):
        for step in range(steps_per_spell):
            if step == steps_per_spell // 2 and index in loads:
                load, fraction = loads[index]
                movements.append(Movement(at(12 * index + 6), load))
                pours.append(Pour(at(12 * index + 6), load, contents(fraction, None)))
                kg += load
                chemical += load * fraction
            out = rate * 12 / steps_per_spell
            used_chemical += out * chemical / kg
            chemical -= out * chemical / kg
            kg -= out
        marks.append(Mark(at(12 * (index + 1)), kg))
        if kg < 600:
            rates = rates[: index + 1]
            break
    end = at(12 * len(rates))
    pours = [pour for pour in pours if pour.at < end]
    spells = content_spells(marks[: len(rates) + 1], [item for item in movements if item.at < end])
    result = walk(
        spells=spells, first=contents(0.12, None), pours=pours, tests=[], decay=no_decay, in_kg=True, cuts=[at(0), end]
    )
    drawn = result.drawn[at(0), end]
    assert drawn.kg == pytest.approx(sum(rate * 12 for rate in rates), rel=1e-9, abs=1e-6)
    assert drawn.active_kg == pytest.approx(used_chemical, rel=1e-9, abs=1e-6)
