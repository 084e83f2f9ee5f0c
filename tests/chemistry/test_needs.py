"""Need models: hand-worked doses, readings named, reasons given."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import carbonate, constants, errors, need_models, needs, products, softening, sources

M = constants.molar_mass


def product(chemical, strength=100.0, basis="weight_pct", dose_basis="active", **more):
    return {
        "chemical": chemical, "strength": strength, "strength_basis": basis, "dose_basis": dose_basis, **more
    }  # fmt: skip


HYPO = product("NaOCl", 125.0, "g_per_L_available_chlorine", "Cl2", density_kg_per_L=1.2)
LIME = product("Ca(OH)2", 92.0, dose_basis="Ca(OH)2")
SODA = product("Na2CO3", 99.0, dose_basis="Na2CO3")
CAUSTIC = product("NaOH", 25.0, dose_basis="NaOH", density_kg_per_L=1.273)
PEROXIDE = product("H2O2", 35.0, dose_basis="product")
PERMANGANATE = product("KMnO4", 98.0, dose_basis="product")
ACID = product("H2SiF6", 23.0, dose_basis="product")
SALT = product("NaCl", 99.5, dose_basis="NaCl")
POLY = product("(NaPO3)n", 35.0, dose_basis="product", strength_as="PO4")
# Hard water, mg/L as CaCO3 and °C.
WATER = {"calcium_hardness": 200.0, "magnesium_hardness": 60.0, "alkalinity": 180.0, "pH": 7.2, "temperature": 12.0}
SOFTEN = {"target_hardness_mg_per_L_CaCO3": 120.0, "part": "lime"}


def test_no_model_says_so():
    answer = needs.need("none", {}, {}, product=HYPO)
    assert (answer.dose_mg_l, answer.sd_mg_l) == (None, None)
    assert answer.reason


def test_an_unknown_model_is_refused():
    with pytest.raises(errors.ChemistryError, match="guess"):
        needs.need("guess", {}, {}, product=HYPO)


def test_oxidant_demand_adds_the_residual():
    stated = {"demand_mg_per_L": 0.6, "target_residual_mg_per_L": 0.5}
    assert needs.need("oxidant_demand", stated, {}, product=HYPO).dose_mg_l == pytest.approx(1.1)
    tracked = {"demand_from": "last_7_days", "target_residual_mg_per_L": 0.5}
    answer = needs.need("oxidant_demand", tracked, {"demand_mg_per_L": 0.7}, product=HYPO, sds={"demand_mg_per_L": 0.1})
    assert answer.dose_mg_l == pytest.approx(1.2)
    assert answer.sd_mg_l == pytest.approx(0.1)
    assert answer.uses == ("demand_mg_per_L",)
    lacking = needs.need("oxidant_demand", tracked, {}, product=HYPO)
    assert lacking.dose_mg_l is None
    assert lacking.missing == ("demand_mg_per_L",)


def test_oxidant_demand_is_restated_in_the_products_own_basis():
    by_product = {**HYPO, "dose_basis": "product"}
    stated = {"demand_mg_per_L": 0.6, "target_residual_mg_per_L": 0.5}
    assert needs.need("oxidant_demand", stated, {}, product=by_product).dose_mg_l == pytest.approx(1.1 * 1.2 / 0.125)


@pytest.mark.parametrize("basis", ["product", "active", "NaOCl", "Cl2"])
def test_a_dose_restated_as_its_residual_gives_the_same_need_back(basis):
    bought = {**HYPO, "dose_basis": basis}
    stated = {"demand_mg_per_L": 0.6, "target_residual_mg_per_L": 0.5}
    dose = needs.need("oxidant_demand", stated, {}, product=bought).dose_mg_l
    assert need_models.dose_as_residual_mg_l(dose, bought) == pytest.approx(1.1)
    assert need_models.dose_as_residual_mg_l(3.0, POLY) == 3.0


def test_lime_by_hand():
    """CO2 (mmol/L) twice, and the calcium carbonate hardness removed: 140 of 180 mg/L; 140 to go from 260 to 120."""
    co2 = carbonate.co2_mg_l(12.0, 7.2, 180.0)
    answer = needs.need("lime_soda", SOFTEN, WATER, product=LIME)
    expected = (2 * co2 / M("CO2") + 140.0 / 50.043) * M("Ca(OH)2") / 2
    assert answer.dose_mg_l == pytest.approx(expected, rel=1e-4)
    assert set(answer.uses) == WATER.keys()
    assert answer.steps[-1].value == pytest.approx(expected, rel=1e-4)
    soda = needs.need("lime_soda", {**SOFTEN, "part": "soda_ash"}, WATER, product=SODA)
    assert soda.dose_mg_l == 0.0


def test_soda_ash_takes_what_lime_leaves():
    """To 70 mg/L: 190 to remove; lime takes 180 of carbonate hardness, soda the other 10 of calcium."""
    settings = {**SOFTEN, "target_hardness_mg_per_L_CaCO3": 70.0}
    soda = needs.need("lime_soda", {**settings, "part": "soda_ash"}, WATER, product=SODA)
    assert soda.dose_mg_l == pytest.approx(10.0 / 50.043 * M("Na2CO3") / 2, rel=1e-4)


def test_magnesium_takes_twice_the_lime_and_the_excess():
    settings = {
        "part": "lime", "target_hardness_mg_per_L_CaCO3": 0.0, "remove_magnesium": True,
        "excess_mg_per_L_CaCO3": 50.0,
    }  # fmt: skip
    co2 = carbonate.co2_mg_l(12.0, 7.2, 180.0)
    # Calcium pairs first: CaCH 180, CaNCH 20, MgNCH 60.
    expected = (2 * co2 / M("CO2") + (180.0 + 60.0 + 50.0) / 50.043) * M("Ca(OH)2") / 2
    assert needs.need("lime_soda", settings, WATER, product=LIME).dose_mg_l == pytest.approx(expected, rel=1e-4)


def test_lime_is_stated_as_the_product_is():
    pure = needs.need("lime_soda", SOFTEN, WATER, product=LIME).dose_mg_l
    as_oxide = needs.need("lime_soda", SOFTEN, WATER, product={**LIME, "dose_basis": "CaO"}).dose_mg_l
    bought = needs.need("lime_soda", SOFTEN, WATER, product={**LIME, "dose_basis": "product"}).dose_mg_l
    assert as_oxide == pytest.approx(pure * M("CaO") / M("Ca(OH)2"))
    assert bought == pytest.approx(pure / 0.92)
    quick = product("CaO", 90.0, dose_basis="CaO")
    assert needs.need("lime_soda", SOFTEN, WATER, product=quick).dose_mg_l == pytest.approx(as_oxide)


def test_caustic_part_asks_the_caustic_model():
    answer = needs.need("lime_soda", {**SOFTEN, "part": "caustic"}, WATER, product=CAUSTIC)
    asked = softening.caustic_dose(
        calcium_hardness_mg_l_caco3=200.0, magnesium_hardness_mg_l_caco3=60.0, alkalinity_mg_l_caco3=180.0,
        co2_mg_l=carbonate.co2_mg_l(12.0, 7.2, 180.0), target_hardness_mg_l_caco3=120.0,
    )  # fmt: skip
    assert answer.dose_mg_l == pytest.approx(asked.caustic_naoh_mg_l)


@pytest.mark.parametrize(
    "hardness",
    [
        {"calcium": 200.0 / 2.4973, "magnesium": 60.0 / 4.1179},
        {"calcium_hardness": 200.0, "hardness": 260.0},
        {"hardness": 260.0, "magnesium_hardness": 60.0},
        {"calcium": 200.0 / 2.4973, "magnesium_hardness": 60.0, "hardness": 250.0},
    ],
)
def test_any_two_of_calcium_magnesium_and_total_will_do(hardness):
    readings = {**hardness, "alkalinity": 180.0, "pH": 7.2, "temperature": 12.0}
    dose = needs.need("lime_soda", SOFTEN, WATER, product=LIME).dose_mg_l
    assert needs.need("lime_soda", SOFTEN, readings, product=LIME).dose_mg_l == pytest.approx(dose, rel=1e-3)


def test_a_hardness_that_contradicts_its_parts_is_shown_or_refused():
    readings = {**WATER, "hardness": 200.0}
    words = " ".join(step.words for step in needs.need("lime_soda", SOFTEN, readings, product=LIME).steps)
    assert "differ" in words
    wrong = {"hardness": 40.0, "magnesium_hardness": 60.0, "alkalinity": 180.0, "pH": 7.2, "temperature": 12.0}
    answer = needs.need("lime_soda", SOFTEN, wrong, product=LIME)
    assert answer.dose_mg_l is None
    assert "wrong" in answer.reason


@pytest.mark.parametrize("gone", ["alkalinity", "pH", "temperature"])
def test_what_softening_lacks_is_named(gone):
    readings = {name: value for name, value in WATER.items() if name != gone}
    answer = needs.need("lime_soda", SOFTEN, readings, product=LIME)
    assert answer.missing == (gone,)
    assert gone in answer.reason
    nan = needs.need("lime_soda", SOFTEN, {**WATER, gone: float("nan")}, product=LIME)
    assert nan.missing == (gone,)


def test_measured_carbon_dioxide_stands_in_for_ph():
    readings = {name: value for name, value in WATER.items() if name not in ("pH", "temperature")}
    answer = needs.need("lime_soda", SOFTEN, {**readings, "carbon_dioxide": 20.0}, product=LIME)
    expected = (2 * 20.0 / M("CO2") + 140.0 / 50.043) * M("Ca(OH)2") / 2
    assert answer.dose_mg_l == pytest.approx(expected, rel=1e-4)


def test_soft_water_needs_nothing_and_a_hard_target_takes_all_calcium():
    soft = needs.need("lime_soda", {**SOFTEN, "target_hardness_mg_per_L_CaCO3": 300.0}, WATER, product=LIME)
    assert soft.dose_mg_l == 0.0
    beyond = needs.need("lime_soda", {**SOFTEN, "target_hardness_mg_per_L_CaCO3": 30.0}, WATER, product=LIME)
    floor = needs.need("lime_soda", {**SOFTEN, "target_hardness_mg_per_L_CaCO3": 60.0}, WATER, product=LIME)
    assert beyond.dose_mg_l == floor.dose_mg_l
    assert any("can't be reached" in caution for caution in beyond.cautions)


def test_water_under_ice_counts_as_zero_degrees():
    at_zero = needs.need("lime_soda", SOFTEN, {**WATER, "temperature": 0.0}, product=LIME)
    under_ice = needs.need("lime_soda", SOFTEN, {**WATER, "temperature": -1.5}, product=LIME)
    assert under_ice.dose_mg_l == at_zero.dose_mg_l
    assert needs.need("lime_soda", SOFTEN, {**WATER, "temperature": -999.999}, product=LIME).dose_mg_l is None


def test_target_ph_reaches_the_ph():
    readings = {"pH": 7.2, "alkalinity": 100.0, "temperature": 12.0, "calcium": 40.0}
    answer = needs.need("target_ph", {"target_ph": 8.3}, readings, product=CAUSTIC)
    water = carbonate.Water(temperature_c=12.0, ph=7.2, alkalinity_mg_l_caco3=100.0, calcium_mg_l=40.0)
    assert carbonate.ph_after_dose(water, "NaOH", answer.dose_mg_l) == pytest.approx(8.3, abs=1e-6)
    assert answer.uses == ("pH", "alkalinity", "temperature", "calcium")
    assert answer.sd_mg_l > 0
    done = needs.need("target_ph", {"target_ph": 7.0}, readings, product=CAUSTIC)
    assert done.dose_mg_l == 0.0
    assert "only raises" in done.steps[-1].words
    gas = needs.need("target_ph", {"target_ph": 7.0}, readings, product=product("CO2", dose_basis="CO2"))
    assert carbonate.ph_after_dose(water, "CO2", gas.dose_mg_l) == pytest.approx(7.0, abs=1e-6)
    odd = needs.need("target_ph", {"target_ph": 7.0}, readings, product=product("polymer"))
    assert odd.dose_mg_l is None
    assert "polymer" in odd.reason


def test_quench_by_peroxide_and_of_peroxide():
    answer = needs.need("quench", {"of": "chlorine", "target_mg_per_L": 0.1}, {"free_chlorine": 1.1}, product=PEROXIDE)
    assert answer.dose_mg_l == pytest.approx(M("H2O2") / M("Cl2") / 0.35, rel=1e-6)
    back = needs.need("quench", {"of": "peroxide", "target_mg_per_L": 0.0}, {"hydrogen_peroxide": 2.0}, product=HYPO)
    assert back.dose_mg_l == pytest.approx(2.0 * M("Cl2") / M("H2O2"), rel=1e-6)
    bisulfite = product("NaHSO3", 38.0, dose_basis="NaHSO3")
    third = needs.need("quench", {"of": "peroxide"}, {"hydrogen_peroxide": 2.0}, product=bisulfite)
    assert third.dose_mg_l == pytest.approx(2.0 * M("NaHSO3") / M("H2O2"), rel=1e-6)
    below = needs.need("quench", {"of": "chlorine", "target_mg_per_L": 2.0}, {"free_chlorine": 1.1}, product=bisulfite)
    assert below.dose_mg_l == 0.0
    for stated, chemical in (({"of": "ozone"}, bisulfite), ({"of": "chlorine"}, LIME), ({"of": "peroxide"}, LIME)):
        readings = {"free_chlorine": 1.0, "hydrogen_peroxide": 1.0}
        assert needs.need("quench", stated, readings, product=chemical).reason


def test_oxidise_takes_stoichiometry_or_the_works_own_ratio():
    readings = {"iron": 1.0, "manganese": 0.5, "sulfide": 0.2}
    both = {"iron": True, "manganese": True}
    answer = needs.need("oxidise", both, readings, product=PERMANGANATE)
    assert answer.dose_mg_l == pytest.approx((0.94328 + 0.5 * 1.9177) / 0.98, rel=1e-4)
    own = needs.need("oxidise", {"iron": 1.0, "manganese": 2.0}, readings, product=PERMANGANATE)
    assert own.dose_mg_l == pytest.approx((1.0 + 1.0) / 0.98)
    everything = needs.need("oxidise", {}, readings, product=HYPO)
    assert everything.uses == ("iron", "manganese", "sulfide")
    sulfate = 0.2 * 8.3226 * M("H2S") / M("S")
    assert everything.dose_mg_l == pytest.approx(0.63479 + 0.5 * 1.2905 + sulfate, rel=1e-4)
    assert needs.need("oxidise", both, {"iron": 1.0}, product=PERMANGANATE).missing == ("manganese",)
    assert needs.need("oxidise", {}, {}, product=PERMANGANATE).missing == ("iron", "manganese", "sulfide")


def test_sequestrant_curve_fluoride_and_salt_by_hand():
    holds = {"base_mg_per_L": 1.0, "mg_per_mg_iron": 3.0, "mg_per_mg_manganese": 2.0}
    answer = needs.need("sequestrant", holds, {"iron": 0.9, "manganese": 0.3}, product=POLY)
    assert answer.dose_mg_l == pytest.approx(1.0 + 2.7 + 0.6)
    assert any("above 1.0" in caution for caution in answer.cautions)
    assert needs.need("sequestrant", {"base_mg_per_L": 1.5}, {}, product=POLY).dose_mg_l == 1.5
    line = {"parameter": "turbidity", "points": [[0, 5], [10, 20], [20, 30]]}
    for turbidity, dose in ((0.0, 5.0), (4.0, 11.0), (10.0, 20.0), (15.0, 25.0), (20.0, 30.0)):
        assert needs.need("curve", line, {"turbidity": turbidity}, product=POLY).dose_mg_l == pytest.approx(dose)
    assert "outside" in needs.need("curve", line, {"turbidity": 21.0}, product=POLY).reason
    fluoride = needs.need("fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.2}, product=ACID)
    assert fluoride.dose_mg_l == pytest.approx(0.5 / (0.23 * 0.7911), rel=1e-4)
    assert needs.need("fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.9}, product=ACID).dose_mg_l == 0.0
    assert needs.need("fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.2}, product=LIME).reason
    resin = {
        "resin_m3": 2.0, "capacity_kg_CaCO3_per_m3": 48.0, "salt_kg_per_m3": 96.0,
        "target_hardness_mg_per_L_CaCO3": 80.0,
    }  # fmt: skip
    salt = needs.need("ion_exchange_salt", resin, {"hardness": 250.0}, product=SALT)
    assert salt.dose_mg_l == pytest.approx(170.0 * 2.0)  # mg/L: 2 kg salt per kg of hardness
    cycle = next(step for step in salt.steps if step.unit == "ML")
    assert cycle.value == pytest.approx(2.0 * 48.0 / 170.0)  # 96 kg of hardness at 170 kg/ML
    starved = needs.need("ion_exchange_salt", {**resin, "salt_kg_per_m3": 40.0}, {"hardness": 250.0}, product=SALT)
    assert any("stoichiometric" in caution for caution in starved.cautions)


def test_uncertainty_of_a_stated_product_dose_holds_the_strengths():
    exact = needs.need("fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.2}, product=ACID, sds={"fluoride": 0.02})
    assert exact.sd_mg_l == pytest.approx(0.02 / (0.23 * 0.7911), rel=1e-4)
    loose = needs.need(
        "fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.2}, product={**ACID, "strength_sd_pct": 2.0},
        sds={"fluoride": 0.02},
    )  # fmt: skip
    assert loose.sd_mg_l == pytest.approx(math.hypot(exact.sd_mg_l, 0.02 * exact.dose_mg_l))


SETTINGS = {
    "none": {},
    "oxidant_demand": {"demand_mg_per_L": 0.6, "target_residual_mg_per_L": 0.5},
    "lime_soda": {**SOFTEN, "remove_magnesium": False, "excess_mg_per_L_CaCO3": 0.0},
    "ion_exchange_salt": {
        "resin_m3": 1.0, "capacity_kg_CaCO3_per_m3": 50.0, "salt_kg_per_m3": 100.0,
        "target_hardness_mg_per_L_CaCO3": 80.0,
    },
    "target_ph": {"target_ph": 8.0},
    "quench": {"of": "chlorine", "target_mg_per_L": 0.0},
    "oxidise": {"iron": True},
    "sequestrant": {"base_mg_per_L": 1.0, "mg_per_mg_iron": 2.0},
    "curve": {"parameter": "turbidity", "points": [[0, 1], [5, 2]]},
    "fluoride": {"target_mg_per_L": 0.7},
}  # fmt: skip
PRODUCTS = {
    "oxidant_demand": HYPO, "lime_soda": LIME, "ion_exchange_salt": SALT, "target_ph": CAUSTIC, "quench": PEROXIDE,
    "oxidise": PERMANGANATE, "sequestrant": POLY, "curve": POLY, "fluoride": ACID, "none": HYPO,
}  # fmt: skip
readings = st.fixed_dictionaries(
    {},
    optional={
        "pH": st.floats(6.0, 9.5), "temperature": st.floats(-2.0, 30.0), "alkalinity": st.floats(5.0, 400.0),
        "calcium": st.floats(0.0, 200.0), "magnesium": st.floats(0.0, 80.0), "hardness": st.floats(0.0, 800.0),
        "free_chlorine": st.floats(0.0, 5.0), "iron": st.floats(0.0, 10.0), "turbidity": st.floats(0.0, 50.0),
        "fluoride": st.floats(0.0, 3.0),
    },
)  # fmt: skip


@settings(deadline=None)
@given(model=st.sampled_from(sorted(SETTINGS)), water=readings)
def test_every_model_answers_or_says_why_and_never_with_nan(model, water):
    answer = needs.need(model, SETTINGS[model], water, product=PRODUCTS[model])
    if answer.dose_mg_l is None:
        assert answer.reason
        assert answer.sd_mg_l is None
    else:
        assert 0.0 <= answer.dose_mg_l < math.inf
        assert answer.sd_mg_l is None or 0.0 <= answer.sd_mg_l < math.inf
        assert set(answer.uses) <= set(needs.needed_parameters(model, SETTINGS[model]))
        assert answer.steps
    assert set(answer.missing) <= set(needs.needed_parameters(model, SETTINGS[model]))
    for step in answer.steps:
        assert math.isfinite(step.value)
        assert step.source in sources.SOURCES
        assert step.words


@pytest.mark.parametrize("model", SETTINGS)
def test_good_settings_have_no_fault_and_bad_ones_do(model):
    good = SETTINGS[model]
    assert needs.check_settings(model, {**good, "max_age_hours": 48, "model": model}) == ()
    assert needs.check_settings(model, {**good, "colour": "blue"})
    for key in needs.model_keys(model).required:
        assert any(key in fault for fault in needs.check_settings(model, {k: v for k, v in good.items() if k != key}))
    for key, value in good.items():
        if isinstance(value, float):
            assert needs.check_settings(model, {**good, key: "much"})
            assert needs.check_settings(model, {**good, key: -1.0})
            assert needs.check_settings(model, {**good, key: float("nan")})


@pytest.mark.parametrize(
    ("model", "stated"),
    [
        ("guess", {}),
        ("lime_soda", {**SOFTEN, "part": "potash"}),
        ("lime_soda", {**SOFTEN, "remove_magnesium": "yes"}),
        ("quench", {"of": "ozone"}),
        ("target_ph", {"target_ph": 14.0}),
        ("curve", {"parameter": "", "points": [[0, 1], [1, 2]]}),
        ("curve", {"parameter": "pH", "points": [[1, 1], [0, 2]]}),
        ("curve", {"parameter": "pH", "points": 7}),
        ("curve", {"parameter": "pH", "points": [[0, 1], [1, -2]]}),
        ("oxidant_demand", {"target_residual_mg_per_L": 0.5}),
        ("oxidant_demand", {"target_residual_mg_per_L": 0.5, "demand_from": "ever"}),
        ("oxidant_demand", {**SETTINGS["oxidant_demand"], "demand_from": "last_7_days"}),
    ],
)
def test_bad_settings_are_told(model, stated):
    assert needs.check_settings(model, stated)


def test_needed_parameters_follow_the_settings():
    assert needs.needed_parameters("quench", {"of": "peroxide"}) == ("hydrogen_peroxide",)
    assert needs.needed_parameters("curve", {"parameter": "colour"}) == ("colour",)
    assert needs.needed_parameters("oxidise", {"iron": True, "sulfide": False}) == ("iron",)
    assert needs.needed_parameters("oxidant_demand", {"demand_from": "last_7_days"}) == ("demand_mg_per_L",)
    assert needs.needed_parameters("none", {}) == ()


def test_a_hypochlorite_need_in_product_terms_can_be_fed():
    """From need to pump: 1.1 mg/L Cl2 on 500 m3/h is 4.4 L/h of 125 g/L hypochlorite."""
    from chemistry import feed

    dose = needs.need("oxidant_demand", SETTINGS["oxidant_demand"], {}, product=HYPO).dose_mg_l
    assert feed.feed_l_h(dose, 500.0, products.fraction_of_product(HYPO), 1.2) == pytest.approx(4.4)


def test_total_chlorine_stands_in_for_free():
    answer = needs.need("quench", {"of": "chlorine"}, {"total_chlorine": 1.0}, product=PEROXIDE)
    assert answer.uses == ("total_chlorine",)


@pytest.mark.parametrize(
    ("model", "stated"),
    [
        ("lime_soda", {**SOFTEN, "part": "potash"}),
        ("lime_soda", {**SOFTEN, "target_hardness_mg_per_L_CaCO3": "soft"}),
        ("ion_exchange_salt", {**SETTINGS["ion_exchange_salt"], "resin_m3": 0.0}),
        ("curve", {"parameter": "pH", "points": [[7, 1]]}),
    ],
)
def test_settings_that_slipped_through_give_a_reason_not_a_number(model, stated):
    answer = needs.need(model, stated, {**WATER, "hardness": 260.0}, product=PRODUCTS[model])
    assert answer.dose_mg_l is None
    assert answer.reason


def test_hardness_as_calcium_carbonate_serves_the_equilibrium_too():
    as_ion = {"pH": 7.2, "alkalinity": 100.0, "temperature": 12.0, "calcium": 40.078}
    as_caco3 = {**as_ion, "calcium_hardness": 100.086}
    del as_caco3["calcium"]
    doses = [needs.need("target_ph", {"target_ph": 8.3}, r, product=CAUSTIC).dose_mg_l for r in (as_ion, as_caco3)]
    assert doses[0] == pytest.approx(doses[1])


def test_usual_reading_uncertainties_stand_in_where_none_is_given():
    """Fluoride: 0.02 mg/L and 5 % together; hardness: 1 mg/L and 3 %; a reading not listed: 5 %."""
    fluoride = needs.need("fluoride", {"target_mg_per_L": 0.7}, {"fluoride": 0.2}, product=ACID)
    assert fluoride.sd_mg_l == pytest.approx(math.hypot(0.02, 0.05 * 0.2) / (0.23 * 0.7911), rel=1e-4)
    salt = needs.need("ion_exchange_salt", SETTINGS["ion_exchange_salt"], {"hardness": 250.0}, product=SALT)
    assert salt.sd_mg_l == pytest.approx(2.0 * math.hypot(1.0, 0.03 * 250.0))
    curve = needs.need("curve", SETTINGS["curve"], {"turbidity": 2.0}, product=POLY)
    assert curve.sd_mg_l == pytest.approx(0.05 * 2.0 * (2 - 1) / 5)


def test_uncertainty_of_softening_adds_up_from_its_readings():
    """Lime rises with the calcium to remove, and through pH with the carbon dioxide."""
    exact = dict.fromkeys(WATER, 0.0)
    assert needs.need("lime_soda", SOFTEN, WATER, product=LIME, sds=exact).sd_mg_l == pytest.approx(0.0, abs=1e-9)
    by_calcium = needs.need("lime_soda", SOFTEN, WATER, product=LIME, sds={**exact, "calcium_hardness": 4.0}).sd_mg_l
    assert by_calcium == pytest.approx(4.0 / 50.043 * M("Ca(OH)2") / 2, rel=1e-3)
    both = needs.need("lime_soda", SOFTEN, WATER, product=LIME, sds={**exact, "calcium_hardness": 4.0, "pH": 0.05})
    by_ph = needs.need("lime_soda", SOFTEN, WATER, product=LIME, sds={**exact, "pH": 0.05}).sd_mg_l
    assert both.sd_mg_l == pytest.approx(math.hypot(by_calcium, by_ph), rel=1e-9)
