"""What must hold for every water: balances, both ways in, numbers as arrays, the slow way as the quick one."""

from dataclasses import fields, replace

import numpy as np
import pytest
from hypothesis import given, settings

from chemistry import carbonate, errors, softening
from chemistry.carbonate import apparent, bracketing, constants_of_equilibrium, dosing, equilibrium, waters
from tests.chemistry import random_waters, tables

SETTINGS = settings(max_examples=60, deadline=None)


def _many(several):
    """One Water of arrays from several of numbers."""
    return carbonate.Water(
        **{
            field.name: None if getattr(several[0], field.name) is None
            else np.array([getattr(one, field.name) for one in several])
            for field in fields(carbonate.Water)
        }
    )  # fmt: skip


@SETTINGS
@given(random_waters.ACID_TO_LIME, random_waters.MODEL)
def test_mass_and_charge_balance(water, model):
    found = carbonate.speciate(water, activity=model).solved
    total = waters.totals(water)
    calcium = found.ca + found.cahco3 + found.caco3 + found.caso4 + found.caoh
    magnesium = found.mg + found.mghco3 + found.mgco3 + found.mgso4 + found.mgoh
    sodium = found.na + found.nahco3 + found.naco3 + found.naso4
    sulfate = found.so4 + found.caso4 + found.mgso4 + found.naso4 + found.kso4 + found.hso4
    carbon = (
        found.co2 + found.hco3 + found.co3 + found.cahco3 + found.caco3 + found.mghco3 + found.mgco3
        + found.nahco3 + found.naco3
    )  # fmt: skip
    assert calcium == pytest.approx(total.calcium, rel=1e-9)
    assert magnesium == pytest.approx(total.magnesium, rel=1e-9, abs=1e-20)
    assert sodium == pytest.approx(total.sodium, rel=1e-9, abs=1e-20)
    assert found.k + found.kso4 == pytest.approx(total.potassium, rel=1e-9, abs=1e-20)
    assert sulfate == pytest.approx(total.sulfate, rel=1e-6, abs=1e-12)
    assert carbon == pytest.approx(total.carbon, rel=1e-6)
    charge = (
        found.hydrogen - found.hydroxide + 2 * (found.ca + found.mg) + found.na + found.k
        + found.cahco3 + found.caoh + found.mghco3 + found.mgoh
        - found.hco3 - 2 * found.co3 - found.naco3 - found.naso4 - found.kso4 - found.hso4 - 2 * found.so4
    )  # fmt: skip
    strong = 2 * (total.calcium + total.magnesium - total.sulfate) + total.sodium + total.potassium
    assert charge == pytest.approx(strong - found.alkalinity, abs=2e-9 + 1e-6 * total.carbon)


@SETTINGS
@given(random_waters.ACID_TO_LIME, random_waters.MODEL)
def test_alkalinity_and_carbon_give_the_ph_back(water, model):
    first = carbonate.speciate(water, activity=model)
    again = carbonate.speciate(water.change(ph=None, alkalinity_mg_l_caco3=first.alkalinity_mg_l_caco3), activity=model)
    assert again.ph == pytest.approx(water.ph, abs=1e-5)


@SETTINGS
@given(random_waters.WATER, random_waters.WATER, random_waters.MODEL)
def test_a_number_and_an_array_agree(one, other, model):
    together = carbonate.speciate(_many([one, other]), activity=model)
    for index, water in enumerate((one, other)):
        alone = carbonate.speciate(water, activity=model)
        assert isinstance(alone.ph, float)
        assert isinstance(alone.si_calcite, float)
        for name in ("ph", "si_calcite", "ionic_strength_mol_l", "dic_mmol_l", "co3_mmol_l", "log_pco2"):
            assert getattr(together, name)[index] == pytest.approx(getattr(alone, name), rel=1e-6, abs=1e-7)


@settings(max_examples=12, deadline=None)
@given(random_waters.ACID_TO_LIME, random_waters.MODEL)
def test_the_slow_way_finds_the_same(water, model):
    total = dosing.carbon_totals(water, model)
    quick = equilibrium.solve(total, model)
    slow = bracketing.bracketed(_problem(total, model))
    assert np.log10(slow.h) == pytest.approx(np.log10(quick.h), abs=1e-6)
    balanced = equilibrium.solve(total, model, calcite=True, start=quick)
    slow = bracketing.bracketed(_problem(total, model, calcite=True))
    assert slow.calcium == pytest.approx(balanced.calcium, rel=1e-5, abs=1e-9)


def _problem(total, model, calcite=False):
    constants = constants_of_equilibrium.at(total.temperature_c)
    return equilibrium.Problem(equilibrium._SCALAR, constants, apparent.OF_MODEL[model], total, calcite, False, None)


def test_waters_that_fail_are_mended_one_by_one():
    table = tables.columns("speciation")
    total = dosing.carbon_totals(tables.waters(table), "davies")
    constants = constants_of_equilibrium.at(total.temperature_c)
    problem = equilibrium.Problem(equilibrium._ARRAY, constants, apparent.OF_MODEL["davies"], total, False, False, None)
    right, _ = problem.newton(None)
    wrong = replace(right, h=right.h * 3.0)
    failed = np.zeros(total.carbon.shape, dtype=bool)
    failed[[0, 7]] = True
    mended = bracketing.mend(wrong, failed, problem, equilibrium._SCALAR)
    assert mended.h[failed] == pytest.approx(right.h[failed], rel=1e-6)
    assert mended.h[~failed] == pytest.approx(wrong.h[~failed])


@SETTINGS
@given(random_waters.WATER, random_waters.MODEL)
def test_more_ph_means_more_supersaturation_and_less_carbon_dioxide(water, model):
    """At the same inorganic carbon: at the same alkalinity a hot, weak water runs out of carbonate instead."""
    here = carbonate.speciate(water, activity=model)
    same_carbon = water.change(ph=water.ph + 0.2, alkalinity_mg_l_caco3=None, dic_mmol_l=here.dic_mmol_l)
    higher = carbonate.speciate(same_carbon, activity=model)
    assert higher.si_calcite > here.si_calcite
    assert higher.co2_mmol_l < here.co2_mmol_l
    assert higher.alkalinity_meq_l > here.alkalinity_meq_l
    assert higher.si_aragonite < higher.si_calcite


def test_pure_water_is_neutral():
    found = carbonate.speciate(carbonate.Water(temperature_c=25.0, alkalinity_mg_l_caco3=0.0, dic_mmol_l=0.0))
    assert found.ph == pytest.approx(6.997, abs=0.002)
    assert found.si_calcite == -np.inf


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"temperature_c": -1.0}, "temperature"),
        ({"temperature_c": 81.0}, "temperature"),
        ({"ph": 2.9}, "pH"),
        ({"ph": float("nan")}, "pH"),
        ({"calcium_mg_l": -0.1}, "calcium"),
        ({"calcium_mg_l": float("nan")}, "calcium"),
        ({"sodium_mg_l": np.array([1.0, np.nan])}, "sodium"),
        ({"alkalinity_mg_l_caco3": 1e5}, "alkalinity"),
        ({"dic_mmol_l": 1.0}, "exactly two"),
        ({"alkalinity_mg_l_caco3": None}, "exactly two"),
    ],
)
def test_what_no_water_holds_is_refused(change, message):
    water = carbonate.Water(temperature_c=15.0, ph=7.5, alkalinity_mg_l_caco3=120.0)
    with pytest.raises(errors.ChemistryError, match=message):
        water.change(**change)


@pytest.mark.parametrize("several", [False, True])
def test_an_alkalinity_too_low_for_its_ph_is_refused(several):
    alkalinity = np.array([100.0, 0.5]) if several else 0.5
    with pytest.raises(errors.ChemistryError, match="too low"):
        carbonate.speciate(carbonate.Water(temperature_c=15.0, ph=11.0, alkalinity_mg_l_caco3=alkalinity))


def test_too_much_salt_is_refused():
    brine = carbonate.Water(
        temperature_c=15.0, ph=6.5, alkalinity_mg_l_caco3=10000.0, magnesium_mg_l=1000.0, calcium_mg_l=2000.0,
        sodium_mg_l=5000.0, potassium_mg_l=1000.0, chloride_mg_l=8000.0, nitrate_mg_l=1000.0,
    )  # fmt: skip
    with pytest.raises(errors.OutOfRange, match="ionic strength"):
        carbonate.speciation_after_doses(brine, {"CaCl2": 2000.0, "NaF": 2000.0, "HCl": 2000.0})


def test_a_result_outside_ph_3_to_13_is_refused():
    with pytest.raises(errors.ChemistryError):
        carbonate.speciate(carbonate.Water(temperature_c=15.0, alkalinity_mg_l_caco3=-900.0, dic_mmol_l=1.0))
    with pytest.raises(errors.ChemistryError):
        carbonate.speciate(carbonate.Water(temperature_c=5.0, alkalinity_mg_l_caco3=np.array([50.0, 9000.0]), dic_mmol_l=1.0))


def test_any_shape_passes_through():
    grid = carbonate.speciate(
        carbonate.Water(
            temperature_c=np.array([[5.0], [15.0]]), ph=np.array([7.0, 8.0, 9.0]), alkalinity_mg_l_caco3=100.0,
            calcium_mg_l=40.0,
        )
    )  # fmt: skip
    assert grid.si_calcite.shape == (2, 3)
    empty = carbonate.speciate(
        carbonate.Water(temperature_c=5.0, ph=np.array([]), alkalinity_mg_l_caco3=100.0, calcium_mg_l=40.0)
    )
    assert empty.si_calcite.shape == (0,)


@pytest.mark.parametrize("model", ["davies", "phreeqc"])
def test_nothing_is_ever_not_a_number(model):
    """3,000 waters from acid rain to brine, through everything; the quick way settles for all of them."""
    rng = np.random.default_rng(11)

    def spread(low, high):
        return np.exp(rng.uniform(np.log(low), np.log(high), 3000))

    water = carbonate.Water(
        temperature_c=rng.uniform(0.0, 60.0, 3000), ph=rng.uniform(4.5, 11.0, 3000), dic_mmol_l=spread(0.02, 30.0),
        calcium_mg_l=spread(0.1, 800.0), magnesium_mg_l=spread(0.1, 300.0), sodium_mg_l=spread(0.1, 1500.0),
        potassium_mg_l=spread(0.1, 50.0), chloride_mg_l=spread(0.1, 2000.0), sulfate_mg_l=spread(0.1, 1500.0),
    )  # fmt: skip
    found = carbonate.speciate(water, activity=model)
    potential = carbonate.precipitation_potential(water, activity=model)
    soft = softening.soften(water, lime_ca_oh_2_mg_l=rng.uniform(0.0, 400.0, 3000), activity=model)
    for result in (found, potential, soft):
        for field in fields(result):
            value = getattr(result, field.name)
            if isinstance(value, np.ndarray):
                assert np.isfinite(value).all(), field.name
                assert value.shape == (3000,)
    for name in ("co2_mmol_l", "hco3_mmol_l", "co3_mmol_l", "free_calcium_mmol_l", "caco3_aq_mmol_l"):
        assert (getattr(found, name) > 0.0).all()
