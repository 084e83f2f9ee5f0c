"""Softening by stoichiometry, in stages and by heat. Agreement with PHREEQC: agreement.py."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import carbonate, errors, hardness, softening
from tests.chemistry import random_waters, tables

AMOUNT = st.floats(0.0, 500.0)
LB_PER_MGAL = 8.3454
RAW = carbonate.Water(
    temperature_c=12.0, ph=7.4, alkalinity_mg_l_caco3=250.0, calcium_mg_l=110.0, magnesium_mg_l=25.0, sodium_mg_l=20.0,
    chloride_mg_l=60.0, sulfate_mg_l=90.0,
)  # fmt: skip


def _dose(calcium, magnesium, alkalinity, co2, **options):
    return softening.lime_soda_dose(
        calcium_hardness_mg_l_caco3=calcium, magnesium_hardness_mg_l_caco3=magnesium,
        alkalinity_mg_l_caco3=alkalinity, co2_mg_l=co2, **options,
    )  # fmt: skip


RATIOS = {
    "R08": lambda: _dose(1.0, 0.0, 1.0, 0.0).lime_ca_oh_2_mg_l,
    "R09": lambda: _dose(1.0, 0.0, 1.0, 0.0).lime_cao_mg_l,
    "R10": lambda: _dose(1.0, 0.0, 1.0, 0.0).lime_cao_mg_l * LB_PER_MGAL,
    "R11": lambda: (_dose(1.0, 0.0, 1.0, 1.0).lime_cao_mg_l - _dose(1.0, 0.0, 1.0, 0.0).lime_cao_mg_l) * LB_PER_MGAL,
    "R12": lambda: _dose(1.0, 0.0, 1.0, 1.0).lime_ca_oh_2_mg_l - _dose(1.0, 0.0, 1.0, 0.0).lime_ca_oh_2_mg_l,
    "R13": lambda: _dose(1.0, 0.0, 0.0, 0.0).soda_na2co3_mg_l,
    "R14": lambda: _dose(1.0, 0.0, 0.0, 0.0).soda_na2co3_mg_l * LB_PER_MGAL,
    "R15": lambda: _dose(0.0, 1.0, 1.0, 0.0, remove_magnesium=True, excess_mg_l_caco3=0.0).lime_ca_oh_2_mg_l,
    "R17": lambda: (
        _dose(0.0, 1.0, 0.0, 0.0, remove_magnesium=True, excess_mg_l_caco3=1.25 * hardness.CACO3_MG_MEQ).lime_cao_mg_l
        - _dose(0.0, 1.0, 0.0, 0.0, remove_magnesium=True, excess_mg_l_caco3=0.0).lime_cao_mg_l
    ),
    "R18": lambda: softening.two_stage_hand_dose(0.0, 1.0).total_mg_l * LB_PER_MGAL,
    "R19": lambda: softening.two_stage_hand_dose(1.0, 0.0).total_mg_l,
    "R20": lambda: softening.solids_mg_l(softening.Removal(1.0, 0.0, 0.0, 0.0)),
    "R21": lambda: softening.solids_mg_l(softening.Removal(0.0, 1.0, 0.0, 0.0)),
}


@pytest.mark.parametrize("key", RATIOS)
def test_ratios_from_the_books(key):
    """Derived values to 0.1 %, published ones to 1 %; sources in the table."""
    table = tables.columns("stoichiometric-ratios")
    row = table["id"].index(key)
    found = RATIOS[key]()
    assert found == pytest.approx(float(table["derived"][row]), rel=1e-3)
    assert found == pytest.approx(float(table["published"][row]), rel=1e-2)


def test_the_formula_of_full_softening():
    """lime = 2 CO2 + CaCH + 2 MgCH + MgNCH + excess, soda = CaNCH + MgNCH, in meq/L; key WTPD-11."""
    found = _dose(200.0, 100.0, 240.0, 22.0, remove_magnesium=True)
    lime_meq = 2 * 22.0 / 44.009 + (200.0 + 2 * 40.0 + 60.0 + 62.5) / 50.0435
    assert found.lime_ca_oh_2_mg_l == pytest.approx(lime_meq * 74.092 / 2, rel=1e-5)
    assert found.soda_na2co3_mg_l == pytest.approx(60.0 / 50.0435 * 105.988 / 2, rel=1e-5)
    assert found.hardness_after_mg_l_caco3 == pytest.approx(0.0, abs=1e-9)
    assert found.below_practical_floor
    sodium = _dose(100.0, 50.0, 250.0, 0.0, remove_magnesium=True, convert_sodium_alkalinity=True)
    without = _dose(100.0, 50.0, 250.0, 0.0, remove_magnesium=True)
    more = sodium.lime_ca_oh_2_mg_l - without.lime_ca_oh_2_mg_l
    assert more == pytest.approx(100.0 * 0.74028, rel=1e-4)


def test_partial_softening_takes_calcium_carbonate_first_then_non_carbonate():
    first = _dose(200.0, 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=140.0)
    assert first.removal == softening.Removal(100.0, 0.0, 0.0, 0.0)
    assert first.soda_na2co3_mg_l == 0.0
    second = _dose(200.0, 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=90.0)
    assert second.removal == softening.Removal(120.0, 0.0, 30.0, 0.0)
    assert second.excess_meq_l == 0.0
    last = _dose(200.0, 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=30.0, remove_magnesium=True)
    assert last.removal == softening.Removal(120.0, 0.0, 80.0, 10.0)
    assert last.excess_meq_l * 50.0435 == pytest.approx(62.5, rel=1e-4)
    untouched = _dose(200.0, 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=80.0, remove_magnesium=True)
    assert untouched.excess_meq_l == 0.0, "no magnesium, no excess"


def test_soft_enough_needs_nothing():
    found = _dose(50.0, 20.0, 60.0, 10.0, target_hardness_mg_l_caco3=100.0)
    assert (found.lime_ca_oh_2_mg_l, found.soda_na2co3_mg_l, found.hardness_after_mg_l_caco3) == (0.0, 0.0, 70.0)


def test_a_target_below_the_magnesium_is_refused():
    with pytest.raises(errors.ChemistryError, match="magnesium"):
        _dose(200.0, 100.0, 120.0, 10.0, target_hardness_mg_l_caco3=80.0)


@given(AMOUNT, AMOUNT, AMOUNT, st.floats(0.0, 60.0), st.booleans())
def test_lime_and_soda_add_up_for_any_water(calcium, magnesium, alkalinity, co2, remove_magnesium):
    found = _dose(calcium, magnesium, alkalinity, co2, remove_magnesium=remove_magnesium)
    more = _dose(calcium, magnesium, alkalinity, co2 + 1.0, remove_magnesium=remove_magnesium)
    assert found.lime_ca_oh_2_mg_l >= 0.0
    assert found.soda_na2co3_mg_l >= 0.0
    assert found.lime_cao_mg_l * 1.32125 == pytest.approx(found.lime_ca_oh_2_mg_l, rel=1e-3)
    assert more.lime_ca_oh_2_mg_l >= found.lime_ca_oh_2_mg_l
    assert found.removal.total + found.hardness_after_mg_l_caco3 == pytest.approx(calcium + magnesium)
    caustic = softening.caustic_dose(
        calcium_hardness_mg_l_caco3=calcium, magnesium_hardness_mg_l_caco3=magnesium,
        alkalinity_mg_l_caco3=alkalinity, co2_mg_l=co2, remove_magnesium=remove_magnesium,
    )  # fmt: skip
    assert caustic.caustic_naoh_mg_l / 39.997 == pytest.approx(found.lime_ca_oh_2_mg_l / 37.046, rel=1e-4)
    assert caustic.soda_na2co3_mg_l <= found.soda_na2co3_mg_l + 1e-9


def test_arrays_as_numbers():
    calcium = np.array([50.0, 200.0, 300.0])
    found = _dose(calcium, 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=100.0)
    for index, value in enumerate(calcium):
        alone = _dose(float(value), 40.0, 120.0, 10.0, target_hardness_mg_l_caco3=100.0)
        assert found.lime_ca_oh_2_mg_l[index] == pytest.approx(alone.lime_ca_oh_2_mg_l)
        assert found.soda_na2co3_mg_l[index] == pytest.approx(alone.soda_na2co3_mg_l)
        assert isinstance(alone.lime_ca_oh_2_mg_l, float)


def test_the_hand_dose_comes_close_to_the_equilibrium():
    """At the stoichiometric dose the equilibrium leaves little hardness; twice as much lime leaves more."""
    hand = _dose(274.7, 102.9, 250.0, carbonate.co2_mg_l(12.0, 7.4, 250.0), remove_magnesium=True)
    found = softening.soften(RAW, lime_ca_oh_2_mg_l=hand.lime_ca_oh_2_mg_l, soda_na2co3_mg_l=hand.soda_na2co3_mg_l)
    assert found.hardness_mg_l_caco3 < 75.0
    assert found.magnesium_hardness_mg_l_caco3 < 3.0
    assert found.solids_mg_l == pytest.approx(hand.solids_mg_l, rel=0.02)
    over = softening.soften(RAW, lime_ca_oh_2_mg_l=hand.lime_ca_oh_2_mg_l * 1.5, soda_na2co3_mg_l=hand.soda_na2co3_mg_l)
    assert over.hardness_mg_l_caco3 > found.hardness_mg_l_caco3 + 50.0


@settings(max_examples=40, deadline=None)
@given(random_waters.WATER, st.floats(0.0, 400.0), st.floats(0.0, 200.0), random_waters.MODEL)
def test_what_falls_out_is_missing_from_the_water(water, lime, soda, model):
    found = softening.soften(water, lime_ca_oh_2_mg_l=lime, soda_na2co3_mg_l=soda, activity=model)
    calcium = water.calcium_mg_l / 40.078 + lime / 74.092 - found.calcite_mg_l / 100.086
    assert found.calcium_hardness_mg_l_caco3 / 100.086 == pytest.approx(calcium, rel=1e-6, abs=1e-6)
    magnesium = water.magnesium_mg_l / 24.305 - found.brucite_mg_l / 58.319
    assert found.magnesium_hardness_mg_l_caco3 / 100.086 == pytest.approx(magnesium, rel=1e-6, abs=1e-6)
    after = carbonate.speciate(found.water, activity=model)
    assert after.ph == pytest.approx(found.ph, abs=1e-5)
    assert after.si_calcite < 1e-5
    assert after.si_brucite < 1e-5
    if found.calcite_mg_l > 0.01:
        assert after.si_calcite == pytest.approx(0.0, abs=1e-5)
    if found.brucite_mg_l > 0.01:
        assert after.si_brucite == pytest.approx(0.0, abs=1e-5)


def test_softening_many_waters_as_one_by_one():
    table = tables.columns("softening")
    doses = {key: table[key] for key in ("lime_ca_oh_2_mg_l", "soda_na2co3_mg_l")}
    together = softening.soften(tables.waters(table), **doses)
    for index in range(len(table["case"])):
        alone = softening.soften(tables.waters(table, index), **{key: float(value[index]) for key, value in doses.items()})
        assert together.ph[index] == pytest.approx(alone.ph, abs=1e-6)
        assert together.brucite_mg_l[index] == pytest.approx(alone.brucite_mg_l, abs=1e-3)


def test_lime_for_a_hardness_by_equilibrium():
    lime = softening.lime_for_hardness(RAW, 200.0)
    assert softening.soften(RAW, lime_ca_oh_2_mg_l=lime).hardness_mg_l_caco3 == pytest.approx(200.0, abs=1e-3)
    hand = _dose(274.7, 102.9, 250.0, carbonate.co2_mg_l(12.0, 7.4, 250.0), target_hardness_mg_l_caco3=200.0)
    assert lime == pytest.approx(hand.lime_ca_oh_2_mg_l, rel=0.1)
    several = softening.lime_for_hardness(RAW, np.array([500.0, 250.0, 200.0]))
    assert several[0] == 0.0
    assert several[2] == pytest.approx(lime, abs=1e-4)
    with pytest.raises(errors.ChemistryError, match="it reaches about"):
        softening.lime_for_hardness(RAW, 50.0)


def test_recarbonation_lands_on_its_ph():
    softened = softening.soften(RAW, lime_ca_oh_2_mg_l=345.0, soda_na2co3_mg_l=135.0)
    for stages in (softening.single_stage, softening.two_stage):
        found = stages(softened.water)
        assert carbonate.speciate(found.water).ph == pytest.approx(8.5, abs=1e-5)
    one, two = softening.single_stage(softened.water), softening.two_stage(softened.water)
    assert two.total_co2_mg_l < one.total_co2_mg_l
    assert two.calcium_hardness_mg_l_caco3 < one.calcium_hardness_mg_l_caco3 - 20.0
    assert two.calcite_mg_l == pytest.approx(one.calcium_hardness_mg_l_caco3 - two.calcium_hardness_mg_l_caco3, rel=1e-4)
    by_hand = softening.single_stage_hand_dose(softened.alkalinity_mg_l_caco3 - 2.0, 2.0)
    assert one.total_co2_mg_l == pytest.approx(by_hand.total_mg_l, rel=0.05)
    with pytest.raises(errors.ChemistryError):
        softening.two_stage(RAW)


def test_split_treatment_meets_its_magnesium():
    found = softening.split_treatment(
        calcium_hardness_mg_l_caco3=200.0, magnesium_hardness_mg_l_caco3=100.0, alkalinity_mg_l_caco3=220.0,
        co2_mg_l=10.0, target_magnesium_mg_l_caco3=40.0,
    )  # fmt: skip
    assert found.bypass_share == pytest.approx(30.0 / 90.0)
    assert found.magnesium_after_mg_l_caco3 == pytest.approx(40.0)
    assert found.whole_lime_ca_oh_2_mg_l == pytest.approx(found.treated_lime_ca_oh_2_mg_l * 2.0 / 3.0)
    assert softening.bypass_share(30.0, 40.0) == 1.0
    assert softening.bypass_share(np.array([30.0, 100.0]), 40.0) == pytest.approx([1.0, 1.0 / 3.0])
    with pytest.raises(errors.ChemistryError, match="below what"):
        softening.bypass_share(100.0, 5.0)


def test_heat_takes_temporary_hardness_and_leaves_the_permanent():
    found = softening.after_heating(RAW, np.array([20.0, 40.0, 60.0, 80.0]))
    assert np.all(np.diff(found.scale_mg_l_caco3) > 0.0)
    assert np.all(found.scale_mg_l_caco3 <= 250.0), "no more than the carbonate hardness"
    assert found.calcium_hardness_mg_l_caco3 + found.scale_mg_l_caco3 == pytest.approx(274.6986, rel=1e-4)
    closed = softening.after_heating(RAW, 80.0, co2_escapes=False)
    assert 0.0 < closed.scale_mg_l_caco3 < found.scale_mg_l_caco3[-1]
    assert closed.is_estimate
    aggressive = RAW.change(ph=6.0)
    assert softening.after_heating(aggressive, 20.0, co2_escapes=False).scale_mg_l_caco3 == 0.0
    with pytest.raises(errors.OutOfRange):
        softening.after_heating(RAW, 100.0)
