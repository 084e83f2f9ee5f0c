"""Doses: way and way back, direction, mixtures, the air, refusals. Agreement with PHREEQC: agreement.py."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import carbonate, errors
from chemistry.carbonate import chemicals
from tests.chemistry import agreement, random_waters, tables

SETTINGS = settings(max_examples=50, deadline=None)
RAISE = ("Ca(OH)2", "NaOH", "CaO", "Mg(OH)2")
LOWER = ("H2SO4", "HCl", "CO2", "Cl2", "Al2(SO4)3.14H2O", "FeCl3", "Fe2(SO4)3", "H2SiF6", "FeSO4.7H2O")
WATER = carbonate.Water(
    temperature_c=12.0, ph=7.4, alkalinity_mg_l_caco3=140.0, calcium_mg_l=50.0, magnesium_mg_l=8.0, sodium_mg_l=15.0,
    chloride_mg_l=25.0, sulfate_mg_l=20.0, nitrate_mg_l=9.0,
)  # fmt: skip


@SETTINGS
@given(random_waters.WATER, st.sampled_from(RAISE + LOWER), st.floats(0.0, 30.0), st.floats(0.5, 10.0), random_waters.MODEL)
def test_alkalis_raise_and_acids_lower_the_ph(water, chemical, dose, more, model):
    less = carbonate.speciation_after_doses(water, {chemical: dose / 4}, activity=model).ph
    after = carbonate.speciation_after_doses(water, {chemical: dose / 4 + more}, activity=model).ph
    assert after > less if chemical in RAISE else after < less


@SETTINGS
@given(random_waters.WATER, st.sampled_from(RAISE + LOWER), st.floats(0.5, 12.0), random_waters.MODEL)
def test_the_dose_for_a_ph_is_found_again(water, chemical, dose, model):
    target = carbonate.ph_after_dose(water, chemical, dose, activity=model)
    found = carbonate.dose_for_target_ph(water, chemical, target, activity=model)
    again = carbonate.ph_after_dose(water, chemical, found, activity=model)
    assert isinstance(found, float)
    assert again == pytest.approx(target, abs=2e-6)


def test_no_dose_where_the_ph_is_right_already():
    assert carbonate.dose_for_target_ph(WATER, "NaOH", 7.4) == 0.0
    assert carbonate.dose_for_target_ph(WATER, "HCl", 7.4) == 0.0


@pytest.mark.parametrize(("chemical", "target"), [("NaOH", 7.0), ("CO2", 8.0), ("HCl", 7.6), ("NaHCO3", 9.5), ("NaF", 8.0)])
def test_out_of_reach_is_said(chemical, target):
    with pytest.raises(errors.ChemistryError, match="no dose of"):
        carbonate.dose_for_target_ph(WATER, chemical, target)
    with pytest.raises(errors.ChemistryError, match="no dose of"):
        carbonate.dose_for_target_ph(WATER, chemical, np.array([7.4, target]))


def test_targets_as_an_array():
    targets = np.array([7.4, 8.0, 8.5, 9.5])
    doses = carbonate.dose_for_target_ph(WATER, "Ca(OH)2", targets)
    assert doses == pytest.approx(
        [carbonate.dose_for_target_ph(WATER, "Ca(OH)2", float(target)) for target in targets], rel=1e-6, abs=1e-6
    )
    assert np.all(np.diff(doses) > 0.0)


@SETTINGS
@given(random_waters.WATER, st.sampled_from(sorted(chemicals.EFFECTS)), st.floats(0.0, 8.0))
def test_what_is_dosed_is_found_in_the_water(water, chemical, dose):
    effect = chemicals.EFFECTS[chemical]
    mmol = dose / effect.g_mol
    before = carbonate.speciate(water)
    after = carbonate.water_after_doses(water, {chemical: dose})
    assert after.alkalinity_mg_l_caco3 / 50.0435 == pytest.approx(
        before.alkalinity_meq_l + effect.alkalinity * mmol, rel=1e-4, abs=1e-6
    )
    assert after.dic_mmol_l == pytest.approx(before.dic_mmol_l + effect.carbon * mmol, rel=1e-7)
    assert after.calcium_mg_l == pytest.approx(water.calcium_mg_l + 40.078 * effect.calcium * mmol, rel=1e-9)
    assert after.sulfate_mg_l == pytest.approx(water.sulfate_mg_l + 96.056 * effect.sulfate * mmol, rel=1e-9)
    charge = 2 * (effect.calcium + effect.magnesium - effect.sulfate) + effect.sodium - effect.chloride - effect.other_charge
    assert charge == effect.alkalinity, "a dose must be neutral: alkalinity is what the strong ions leave over"


def test_doses_add_up_in_any_order():
    both = carbonate.speciation_after_doses(WATER, {"NaOH": 10.0, "FeCl3": 20.0}).ph
    one = carbonate.water_after_doses(WATER, {"FeCl3": 20.0})
    assert carbonate.ph_after_dose(one, "NaOH", 10.0) == pytest.approx(both, abs=1e-7)


def test_alkalinity_and_carbon_after_each_dose_as_phreeqc():
    table = tables.columns("doses")
    for index, found in agreement.doses_after(table, "phreeqc"):
        if table["chemical"][index] not in ("Al2(SO4)3.14H2O", "FeCl3"):
            assert found.alkalinity_mg_l_caco3 == pytest.approx(table["alkalinity_after_mg_l_caco3"][index], abs=0.02)
            assert found.dic_mmol_l == pytest.approx(table["dic_after_mmol_l"][index], rel=5e-4)
            assert found.si_calcite == pytest.approx(table["si_calcite_after_phreeqc"][index], abs=0.002)


def test_open_to_air_ends_in_balance_with_it():
    found = carbonate.speciation_after_doses(WATER, {"NaOH": 20.0}, open_to_air_ppm_co2=420.0)
    assert found.log_pco2 == pytest.approx(np.log10(420e-6), abs=1e-6)
    assert found.alkalinity_mg_l_caco3 == pytest.approx(140.0 + 20.0 * 1.2512, rel=1e-4)
    air = np.array([400.0, 1000.0, 10000.0])
    several = carbonate.ph_after_dose(WATER, "NaOH", 20.0, open_to_air_ppm_co2=air)
    assert np.all(np.diff(several) < 0.0)


def test_used_up_chlorine_takes_twice_the_alkalinity():
    standing = carbonate.water_after_doses(WATER, {"Cl2": 2.0}).alkalinity_mg_l_caco3
    spent = carbonate.water_after_doses(WATER, {"Cl2, used up": 2.0}).alkalinity_mg_l_caco3
    assert 140.0 - standing == pytest.approx(2.0 * 0.70583, rel=1e-3)
    assert 140.0 - spent == pytest.approx(2.0 * 1.4117, rel=1e-3)


@pytest.mark.parametrize("dose", [-1.0, 2001.0, float("nan"), np.array([1.0, np.nan])])
def test_a_dose_outside_its_range_is_refused(dose):
    with pytest.raises(errors.OutOfRange, match="dose of NaOH"):
        carbonate.ph_after_dose(WATER, "NaOH", dose)


def test_an_unknown_chemical_is_refused():
    with pytest.raises(errors.ChemistryError, match="known: "):
        carbonate.ph_after_dose(WATER, "vinegar", 1.0)


def test_a_field_analysis_gives_the_same_carbon_dioxide_within_a_few_per_cent():
    full = carbonate.speciate(WATER).co2_mmol_l * 44.009
    assert carbonate.co2_mg_l(12.0, 7.4, 140.0) == pytest.approx(full, rel=0.04)
    shape = carbonate.co2_mg_l(np.array([5.0, 12.0]), 7.4, 140.0)
    assert shape[1] == pytest.approx(carbonate.co2_mg_l(12.0, 7.4, 140.0), rel=1e-7)
    assert carbonate.co2_mg_l_usgs_shortcut(7.4, 140.0 * 1.2192) == pytest.approx(full, rel=0.35)
    assert carbonate.co2_mg_l(12.0, 7.4, 140.0, ionic_strength_mol_l=0.02) < carbonate.co2_mg_l(12.0, 7.4, 140.0)
