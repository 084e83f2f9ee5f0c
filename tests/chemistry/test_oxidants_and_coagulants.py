"""Oxidants, peroxide, coagulants, fluoride: what the ratios are used for, and what is refused."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import coagulants, errors, fluoride, oxidants, peroxide

amounts = st.floats(0.0, 50.0)


def test_demands_add_up():
    demand = oxidants.demand_mg_l("Cl2", iron_mg_l=1.0, manganese_mg_l=0.5, ammonia_mg_l_n=0.2)
    assert demand == pytest.approx(0.63479 + 0.5 * 1.2905 + 0.2 * 7.5926, rel=1e-4)
    assert oxidants.demand_mg_l("KMnO4", manganese_mg_l=1.0, ammonia_mg_l_n=5.0) == pytest.approx(1.9177, rel=1e-4)
    sulfur = oxidants.demand_mg_l("Cl2", sulfide_mg_l_s=1.0, sulfide_to_sulfate=False)
    assert oxidants.demand_mg_l("Cl2", sulfide_mg_l_s=1.0) == pytest.approx(4 * sulfur)
    many = oxidants.demand_mg_l("O3", iron_mg_l=np.array([0.0, 1.0]))
    np.testing.assert_allclose(many, [0.0, 0.42973], rtol=1e-4)


@settings(deadline=None)
@given(dose=st.floats(0.0, 100.0))
def test_equivalent_oxidants_invert(dose):
    for other in oxidants.OXIDANT_ELECTRONS:
        there = oxidants.equivalent_mg_l(dose, "Cl2", other)
        assert oxidants.equivalent_mg_l(there, other, "Cl2") == pytest.approx(dose, rel=1e-12, abs=1e-300)


@settings(deadline=None)
@given(demand=amounts, residual=amounts)
def test_dose_demand_and_residual_hang_together(demand, residual):
    dose = oxidants.dose_for_residual_mg_l(demand, residual)
    assert oxidants.observed_demand_mg_l(dose, residual) == pytest.approx(demand, abs=1e-12)
    assert oxidants.expected_residual_mg_l(dose, demand) == pytest.approx(residual, abs=1e-12)


def test_demand_over_days_is_weighted_by_flow():
    """5 mg/L demand at 2 ML and 2 mg/L at 10 ML: 2.5, not 3.5."""
    assert oxidants.flow_weighted_demand_mg_l([5.5, 2.5], [0.5, 0.5], [2.0, 10.0]) == pytest.approx(2.5)
    with pytest.raises(errors.ChemistryError):
        oxidants.flow_weighted_demand_mg_l([1.0], [0.5], [0.0])
    with pytest.raises(errors.OutOfRange):
        oxidants.flow_weighted_demand_mg_l([0.4], [0.5], [1.0])


@settings(deadline=None)
@given(
    start=st.floats(0.1, 10.0), k=st.floats(1e-4, 0.1), slow=st.floats(1e-5, 1e-4), share=st.floats(0, 1),
    minutes=st.floats(0.1, 60.0),
)  # fmt: skip
def test_residual_decays_between_its_two_rates(start, k, slow, share, minutes):
    fast_only = oxidants.residual_after_mg_l(start, minutes, k)
    both = oxidants.residual_after_parallel_mg_l(start, minutes, share, k, slow)
    assert fast_only - 1e-12 <= both <= oxidants.residual_after_mg_l(start, minutes, slow) + 1e-12
    assert oxidants.first_order_rate_per_min(start, fast_only, minutes) == pytest.approx(k, rel=1e-6)


def test_the_breakpoint_curve_has_three_stages():
    stages = [oxidants.chlorine_to_nitrogen_stage(ratio, 1.0) for ratio in (4.0, 6.0, 8.0)]
    assert stages == ["monochloramine", "breakpoint", "free chlorine"]
    assert oxidants.chlorine_to_nitrogen_stage(1.0, 0.0) == "free chlorine"


def test_field_figures_of_dechlorination_are_a_tenth_above_theory():
    for chemical in ("NaHSO3", "Na2S2O5", "Na2SO3"):
        ratio = oxidants.dechlorination_mg_l(chemical, 1.0, field=True) / oxidants.dechlorination_mg_l(chemical, 1.0)
        assert ratio == pytest.approx(1.10, abs=0.01)
    with pytest.raises(errors.ChemistryError):
        oxidants.dechlorination_mg_l("SO2", 1.0, field=True)
    with pytest.raises(errors.ChemistryError):
        oxidants.dechlorination_mg_l("NaCl", 1.0)


def test_half_the_chlorine_is_hocl_at_its_pka():
    """Morris: pKa 7.537 at 25 °C; 7.75 at 5 °C, where more stays HOCl."""
    assert oxidants.hocl_fraction(7.537, 25.0) == pytest.approx(0.5, abs=1e-3)
    assert oxidants.hocl_fraction(7.537, 5.0) > 0.6
    assert np.all(np.diff(oxidants.hocl_fraction(np.linspace(5, 10, 20), 15.0)) < 0)
    with pytest.raises(errors.OutOfRange):
        oxidants.hocl_fraction(3.0, 20.0)


def test_unknown_oxidants_and_reductants_are_refused_by_name():
    for call in (
        lambda: oxidants.oxidant_per_reductant_mg_mg("Br2", "iron"),
        lambda: oxidants.oxidant_per_reductant_mg_mg("Cl2", "copper"),
        lambda: oxidants.demand_mg_l("Cl2", iron_mg_l=-1.0),
    ):
        with pytest.raises(errors.ChemistryError):
            call()
    five = oxidants.oxidant_per_reductant_mg_mg("ClO2", "iron", oxidant_electrons=5)
    assert five == pytest.approx(1.2078 / 5, rel=1e-4)


@pytest.mark.parametrize(
    ("organic", "moles"),
    [("phenol", 14), ("formaldehyde", 2), ("methanol", 3), ("acetone", 8), ("oxalic acid", 1), ("glucose", 12)],
)
def test_peroxide_for_organics_follows_the_balanced_reaction(organic, moles):
    """e.g. C6H5OH + 14 H2O2 = 6 CO2 + 17 H2O."""
    from chemistry.constants import molar_mass

    expected = moles * molar_mass("H2O2") / molar_mass(peroxide.NAMED_ORGANICS[organic])
    assert peroxide.organic_demand_mg_mg(organic) == pytest.approx(expected)


@pytest.mark.parametrize("what", ["water", "H2O", "CO2", "C2Cl4", "NH3"])
def test_what_is_no_oxidisable_organic_is_refused(what):
    with pytest.raises(errors.ChemistryError):
        peroxide.organic_demand_mg_mg(what)


def test_quenching_both_ways_is_one_reaction():
    there = peroxide.dose_to_quench_chlorine_mg_l(1.0)
    assert peroxide.chlorine_to_quench_mg_l(there) == pytest.approx(1.0)


def test_peroxide_warns():
    assert peroxide.dpd_remark(0.0) == ""
    assert "falsely high" in peroxide.dpd_remark(0.3)
    assert peroxide.contamination_remark(0.009) == ""
    assert "contamination" in peroxide.contamination_remark(0.06)
    assert "contamination" in peroxide.contamination_remark(0.0, 3.5)
    assert peroxide.oxygen_released_l(0.5) == pytest.approx(176.8, abs=0.5)  # 1 kg of 50 %: 24.06 L/mol x 7.35 mol
    for ratio in (0.05, 1.5):
        with pytest.raises(errors.OutOfRange):
            peroxide.dose_with_ozone_mg_l(1.0, ratio)


def test_chlorine_takes_an_equivalent_more_from_ferrous_sulfate():
    air = coagulants.alkalinity_used_mg_l("FeSO4.7H2O", 10.0)
    chlorine = coagulants.alkalinity_used_mg_l("FeSO4.7H2O", 10.0, oxidised_by_chlorine=True)
    assert chlorine == pytest.approx(1.5 * air)
    with pytest.raises(errors.ChemistryError):
        coagulants.alkalinity_used_mg_l("FeCl3", 10.0, oxidised_by_chlorine=True)


def test_a_dose_beyond_the_alkalinity_is_refused():
    assert coagulants.alkalinity_left_mg_l("Al2(SO4)3.14H2O", 40.0, 60.0) == pytest.approx(39.79, abs=0.01)
    with pytest.raises(errors.OutOfRange):
        coagulants.alkalinity_left_mg_l("Al2(SO4)3.14H2O", 200.0, 60.0)
    with pytest.raises(errors.ChemistryError):
        coagulants.metal_mg_l("NaCl", 1.0)


def test_sludge_adds_its_parts():
    total = coagulants.sludge_mg_l(
        calcium_removed_mg_l_caco3=100.0, magnesium_removed_mg_l_caco3=10.0, alum_mg_l=20.0, iron_mg_l=1.0,
        suspended_solids_mg_l=coagulants.suspended_solids_mg_l(4.0), additives_mg_l=0.5,
    )  # fmt: skip
    assert total == pytest.approx(200 + 26 + 8.8 + 1.9 + 6.0 + 0.5)
    exact = coagulants.hydroxide_sludge_mg_l("Al2(SO4)3.14H2O", 20.0)
    assert exact == pytest.approx(8.8, rel=0.012)  # the equation's 0.44 is 0.444 rounded


@settings(deadline=None)
@given(target=st.floats(0.0, 2.0), natural=st.floats(0.0, 2.0))
def test_fluoride_counts_what_nature_gives(target, natural):
    added = fluoride.fluoride_to_add_mg_l(target, natural)
    assert added == pytest.approx(max(target - natural, 0.0))
    acid = fluoride.additive_mg_l(added, "H2SiF6", 0.23)
    assert fluoride.fluoride_added_mg_l(acid, "H2SiF6", 0.23) == pytest.approx(added, abs=1e-12)


def test_forgetting_content_or_purity_would_be_far_off():
    whole = fluoride.additive_mg_l(0.5, "H2SiF6", 0.23, content=0.792)
    assert 0.5 / 0.23 / whole == pytest.approx(0.79, abs=0.005)  # content forgotten: 21 % low
    assert 0.5 / 0.792 / whole == pytest.approx(0.23, abs=0.005)  # purity forgotten: 77 % low
    for call in (
        lambda: fluoride.additive_mg_l(0.5, "CaF2"),
        lambda: fluoride.fluoride_added_mg_l(0.5, "CaF2"),
        lambda: fluoride.additive_mg_l(0.5, "NaF", 23.0),
        lambda: fluoride.fluoride_to_add_mg_l(0.7, -0.1),
    ):
        with pytest.raises(errors.ChemistryError):
            call()
