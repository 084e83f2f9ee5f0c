"""Saturation, precipitation potential, temperature and blending. Agreement with PHREEQC and DIN: agreement.py."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import carbonate, errors
from tests.chemistry import random_waters, tables

SETTINGS = settings(max_examples=50, deadline=None)


@SETTINGS
@given(random_waters.WATER, random_waters.MODEL)
def test_the_potential_has_the_sign_of_the_index_and_ends_in_balance(water, model):
    found = carbonate.precipitation_potential(water, activity=model)
    before = carbonate.speciate(water, activity=model)
    if abs(before.si_calcite) > 1e-3:
        assert (found.ccpp_mg_l > 0.0) == (before.si_calcite > 0.0)
    balanced = carbonate.Water(
        temperature_c=water.temperature_c,
        alkalinity_mg_l_caco3=found.alkalinity_mg_l_caco3,
        dic_mmol_l=before.dic_mmol_l - found.ccpp_mg_l / 100.086,
        calcium_mg_l=found.calcium_hardness_mg_l_caco3 * 40.078 / 100.086,
        **{
            ion: getattr(water, ion)
            for ion in ("magnesium_mg_l", "sodium_mg_l", "potassium_mg_l", "chloride_mg_l", "sulfate_mg_l", "nitrate_mg_l")
        },
    )
    after = carbonate.speciate(balanced, activity=model)
    assert after.si_calcite == pytest.approx(0.0, abs=2e-4)
    assert after.ph == pytest.approx(found.ph_at_balance, abs=2e-4)
    # one mole of CaCO3 takes two equivalents
    assert before.alkalinity_mg_l_caco3 - found.alkalinity_mg_l_caco3 == pytest.approx(found.ccpp_mg_l, abs=1e-4, rel=1e-6)


def test_more_ph_more_potential():
    waters = carbonate.Water(temperature_c=10.0, ph=np.linspace(6.5, 9.5, 40), alkalinity_mg_l_caco3=150.0, calcium_mg_l=60.0)
    assert np.all(np.diff(carbonate.precipitation_potential(waters).ccpp_mg_l) > 0.0)


def test_a_water_without_calcium_dissolves_some():
    bare = carbonate.Water(temperature_c=10.0, ph=6.5, alkalinity_mg_l_caco3=20.0)
    assert carbonate.precipitation_potential(bare).ccpp_mg_l < -10.0
    with pytest.raises(errors.ChemistryError, match="without calcium"):
        carbonate.indices(bare)


@SETTINGS
@given(random_waters.WATER)
def test_indices_hang_together(water):
    found = carbonate.indices(water)
    assert found.si_calcite == pytest.approx(carbonate.speciate(water).si_calcite, abs=1e-9)
    assert found.ryznar == pytest.approx(2.0 * found.ph_s - water.ph, abs=1e-6)
    assert found.ph_s == pytest.approx(water.ph - found.si_calcite, abs=1e-6)


def test_the_hand_formula_stays_within_its_stated_error():
    table = tables.columns("speciation")
    keep = (table["ph_phreeqc"] if "ph_phreeqc" in table else table["ph"]) <= 8.5
    found = carbonate.langelier_hand_formula(
        table["temperature_c"][keep], table["ph"][keep], table["calcium_mmol_l"][keep] * 100.086,
        table["alkalinity_meq_l"][keep] * 50.043, table["ionic_strength_mol_l_phreeqc"][keep],
    )  # fmt: skip
    difference = found.si_calcite - table["si_calcite_phreeqc"][keep]
    assert difference.min() > -0.02
    assert difference.max() < 0.1
    with pytest.raises(errors.OutOfRange, match="pH"):
        carbonate.langelier_hand_formula(15.0, 9.0, 100.0, 100.0, 0.01)


@SETTINGS
@given(random_waters.WATER, st.floats(0.0, 60.0), random_waters.MODEL)
def test_there_and_back_in_temperature(water, temperature_c, model):
    there = carbonate.at_temperature(water, temperature_c, activity=model)
    back = carbonate.at_temperature(there, water.temperature_c, activity=model)
    assert carbonate.speciate(back, activity=model).ph == pytest.approx(water.ph, abs=1e-6)


@SETTINGS
@given(random_waters.WATER, random_waters.WATER, st.floats(0.0, 1.0))
def test_a_blend_holds_what_its_parts_held(one, other, share):
    mixed = carbonate.blend(one, other, share)
    for name in ("temperature_c", "calcium_mg_l", "sulfate_mg_l", "nitrate_mg_l", "alkalinity_mg_l_caco3"):
        expected = share * getattr(one, name) + (1.0 - share) * getattr(other, name)
        assert getattr(mixed, name) == pytest.approx(expected, rel=1e-6, abs=1e-9)
    carbon = share * carbonate.speciate(one).dic_mmol_l + (1.0 - share) * carbonate.speciate(other).dic_mmol_l
    assert mixed.dic_mmol_l == pytest.approx(carbon, rel=1e-6)
    swapped = carbonate.blend(other, one, 1.0 - share)
    assert carbonate.speciate(swapped).ph == pytest.approx(carbonate.speciate(mixed).ph, abs=1e-5)


@SETTINGS
@given(random_waters.WATER, st.floats(0.0, 1.0))
def test_blended_with_itself_a_water_stays(water, share):
    assert carbonate.speciate(carbonate.blend(water, water, share)).ph == pytest.approx(water.ph, abs=1e-6)


def test_two_balanced_waters_make_an_aggressive_one():
    """Tillmans' classic: hard and soft, each saturated, mix to a water that dissolves lime."""
    hard = carbonate.Water(temperature_c=10.0, ph=7.0, alkalinity_mg_l_caco3=350.0, calcium_mg_l=140.0)
    soft = carbonate.Water(temperature_c=10.0, ph=9.0, alkalinity_mg_l_caco3=35.0, calcium_mg_l=14.0)

    def balanced(water):
        ph = np.linspace(6.5, 10.0, 3501)
        index = carbonate.speciate(water.change(ph=ph)).si_calcite
        return water.change(ph=float(ph[abs(index).argmin()]))

    mixed = carbonate.blend(balanced(hard), balanced(soft), np.array([0.25, 0.5, 0.75]))
    assert np.all(carbonate.precipitation_potential(mixed).ccpp_mg_l < -1.0)


@pytest.mark.parametrize("share", [-0.1, 1.1, float("nan")])
def test_a_share_outside_0_to_1_is_refused(share):
    water = carbonate.Water(temperature_c=10.0, ph=7.0, alkalinity_mg_l_caco3=350.0)
    with pytest.raises(errors.OutOfRange, match="share"):
        carbonate.blend(water, water, share)
