"""What products contain, how they mix, dilute and decay; feeding arithmetic."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate

from chemistry import constants, decay, errors, feed, products

DATA = Path(__file__).parent / "data"
HYPO = {
    "chemical": "NaOCl", "strength": 125.0, "strength_basis": "g_per_L_available_chlorine",
    "density_kg_per_L": 1.20, "dose_basis": "Cl2",
}  # fmt: skip


@pytest.mark.parametrize(
    ("strength", "basis", "density", "dose_basis", "chemical", "strength_as", "fraction"),
    [
        # 125 g/L at 1.20 kg/L holds 0.125 kg Cl2 in 1.20 kg; NaOCl is 74.44 / 70.90 of it.
        (125.0, "g_per_L_available_chlorine", 1.20, "Cl2", "NaOCl", None, 0.125 / 1.20),
        (12.5, "trade_pct", 1.20, "Cl2", "NaOCl", None, 0.125 / 1.20),
        (125.0, "g_per_L_available_chlorine", 1.20, "NaOCl", "NaOCl", None, 0.125 / 1.20 * 74.439 / 70.90),
        (10.0, "weight_pct_available_chlorine", None, "active", "NaOCl", None, 0.10),
        (10.5, "weight_pct", None, "Cl2", "NaOCl", None, 0.105 * 70.90 / 74.439),
        (65.0, "weight_pct_available_chlorine", None, "Cl2", "Ca(OCl)2", None, 0.65),
        (125.0, "g_per_L_available_chlorine", 1.20, "product", "NaOCl", None, 1.0),
        (25.0, "weight_pct", 1.273, "NaOH", "NaOH", None, 0.25),
        (25.0, "weight_pct", 1.273, "CaCO3", "NaOH", None, 0.25 * 50.043 / 39.997),
        (70.0, "weight_pct", None, "Ca(OH)2", "Ca(OH)2", "CaO", 0.70 * 74.092 / 56.077),
        (92.0, "weight_pct", None, "CaO", "Ca(OH)2", None, 0.92 * 56.077 / 74.092),
        (8.2, "weight_pct", 1.335, "Al", "Al2(SO4)3.14H2O", "Al2O3", 0.082 * 53.963 / 101.960),
        (10.0, "weight_pct", 1.2, "Al", "PACl", "Al2O3", 0.10 * 53.963 / 101.960),
        (12.0, "weight_pct", 1.5, "Fe", "Fe2(SO4)3", "Fe", 0.12),
        (40.0, "weight_pct", 1.42, "Fe", "FeCl3", None, 0.40 * 55.845 / 162.195),
        (75.0, "weight_pct", 1.58, "PO4", "H3PO4", None, 0.75 * 94.970 / 97.994),
        (23.0, "weight_pct", 1.21, "F", "H2SiF6", None, 0.23 * 113.990 / 144.091),
        (19.0, "weight_pct", 0.93, "N", "NH3", None, 0.19 * 14.007 / 17.031),
        (40.0, "weight_pct", 1.23, "NH3", "(NH4)2SO4", None, 0.40 * 2 * 17.031 / 132.134),
        (98.0, "weight_pct", None, "active", "KMnO4", None, 0.98),
    ],
)
def test_active_fraction_on_every_basis(strength, basis, density, dose_basis, chemical, strength_as, fraction):
    got = products.active_fraction(strength, basis, density, dose_basis, chemical, strength_as)
    assert got == pytest.approx(fraction, rel=2e-5)
    many = products.active_fraction(np.array([strength, strength / 2]), basis, density, dose_basis, chemical, strength_as)
    assert many[0] == pytest.approx(got, rel=1e-14)


@pytest.mark.parametrize(
    ("strength", "basis", "density", "dose_basis", "chemical"),
    [
        (125.0, "g_per_L_available_chlorine", None, "Cl2", "NaOCl"),
        (12.5, "trade_pct", None, "Cl2", "NaOCl"),
        (12.5, "percent", 1.2, "Cl2", "NaOCl"),
        (101.0, "weight_pct", 1.2, "NaOH", "NaOH"),
        (-1.0, "weight_pct", 1.2, "NaOH", "NaOH"),
        (1300.0, "g_per_L_available_chlorine", 1.2, "Cl2", "NaOCl"),
        (25.0, "weight_pct", 1.2, "Cl2", "NaOH"),
        (25.0, "weight_pct", 1.2, "Fe", "NaOH"),
        (12.0, "weight_pct_available_chlorine", 1.2, "Cl2", "NaOH"),
        (30.0, "weight_pct", 1.2, "Al", "polymer"),
        (25.0, "weight_pct", 1.2, "Cl2", "NaClO2"),
        (30.0, "weight_pct", 1.15, "Cl2", "HCl"),
        (float("nan"), "weight_pct", 1.2, "NaOH", "NaOH"),
    ],
)
def test_what_a_product_cannot_be_is_refused(strength, basis, density, dose_basis, chemical):
    with pytest.raises(errors.ChemistryError):
        products.active_fraction(strength, basis, density, dose_basis, chemical)


def test_trade_percent_is_not_weight_percent():
    """100 kg of chlorine from 12.5 trade % is 800 L; read as weight % at 1.16 kg/L it would be 690 L."""
    litres = 100.0 / products.active_fraction(12.5, "trade_pct", 1.16, "Cl2", "NaOCl") / 1.16
    assert litres == pytest.approx(800.0)
    wrong = 100.0 / products.active_fraction(12.5, "weight_pct_available_chlorine", 1.16, "Cl2", "NaOCl") / 1.16
    assert wrong == pytest.approx(690.0, abs=0.5)


def test_alum_on_its_bases():
    """20 mg/L dry alum is 41.5 mg/L of 48.2 % product and 1.8 mg/L Al."""
    product = {
        "chemical": "Al2(SO4)3.14H2O", "strength": 48.2, "strength_basis": "weight_pct",
        "density_kg_per_L": 1.33, "dose_basis": "product",
    }  # fmt: skip
    assert products.dose_in_basis_mg_l(20.0, "Al2(SO4)3.14H2O", product) == pytest.approx(41.5, abs=0.05)
    as_metal = {**product, "dose_basis": "Al"}
    assert products.dose_in_basis_mg_l(20.0, "Al2(SO4)3.14H2O", as_metal) == pytest.approx(1.816, abs=1e-3)
    assert products.dose_in_basis_mg_l(20.0, "Al2(SO4)3.14H2O", {**product, "dose_basis": "active"}) == 20.0


@settings(deadline=None)
@given(strength=st.floats(1.0, 200.0), density=st.floats(1.0, 1.4))
def test_strength_bases_round_trip(strength, density):
    for target in products.STRENGTH_BASES:
        there = products.convert_strength(strength, "g_per_L_available_chlorine", target, density, "NaOCl")
        back = products.convert_strength(there, target, "g_per_L_available_chlorine", density, "NaOCl")
        assert back == pytest.approx(strength, rel=1e-12)


@settings(deadline=None)
@given(lots=st.lists(st.tuples(st.floats(1, 9000), st.floats(20, 160), st.floats(1.0, 1.3)), min_size=1, max_size=5))
def test_mixing_keeps_mass_and_chlorine(lots):
    masses, strengths, densities = (list(column) for column in zip(*lots, strict=True))
    total, strength, density = products.mix_lots(masses, strengths, densities, "g_per_L_available_chlorine")
    assert total == pytest.approx(sum(masses))
    chlorine_kg = sum(m / d * s / 1000 for m, s, d in lots)
    assert total / density * strength / 1000 == pytest.approx(chlorine_kg, rel=1e-9)
    assert min(strengths) * (1 - 1e-9) <= strength <= max(strengths) * (1 + 1e-9)


def test_mixing_refuses_what_it_cannot_know():
    assert products.mix_lots([100.0, 300.0], [20.0, 40.0], [None, None], "weight_pct") == (400.0, 35.0, None)
    for bad in [([], [], []), ([0.0], [10.0], [1.1]), ([1.0], [10.0, 2.0], [1.1])]:
        with pytest.raises(errors.ChemistryError):
            products.mix_lots(*bad, "weight_pct")
    with pytest.raises(errors.ChemistryError):
        products.mix_lots([1.0], [100.0], [None], "g_per_L_available_chlorine")


def test_diluting_keeps_the_chlorine():
    """A day tank made 1:4 then drawn 200 L is 40 L of product."""
    litres, density, strength = products.dilute(100.0, 1.20, 125.0, "g_per_L_available_chlorine", 400.0)
    assert litres == 500.0
    assert strength == pytest.approx(25.0)
    assert density == pytest.approx((120.0 + 400 * 0.998) / 500)
    assert 200.0 * strength == pytest.approx(40.0 * 125.0)
    assert products.dilution_water_l(100.0, 125.0, 25.0) == pytest.approx(400.0)
    with pytest.raises(errors.OutOfRange):
        products.dilution_water_l(100.0, 25.0, 125.0)


def _losses():
    with (DATA / "hypochlorite-loss.csv").open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


@pytest.mark.parametrize("row", _losses(), ids=lambda row: f"{row['start_g_l']} g/L at {row['temperature_c']} C")
def test_hypochlorite_loss_meets_the_table(row):
    start, temperature = float(row["start_g_l"]), float(row["temperature_c"])
    for days in (7, 14, 30, 60, 90):
        left = decay.hypochlorite_strength_after(start, [temperature], [days], extrapolate=True)
        assert left == pytest.approx(float(row[f"day_{days}"]), rel=0.02)
        lost = start - float(row[f"day_{days}"])
        if lost > 0.5:
            assert start - left == pytest.approx(lost, rel=0.02)
    left = decay.hypochlorite_strength_after(start, [temperature], [30], extrapolate=True)
    assert decay.chlorate_formed_g_l(start - left) == pytest.approx(float(row["chlorate_day_30"]), rel=0.02, abs=0.001)
    if row["in_range"] == "no":
        with pytest.raises(errors.OutOfRange):
            decay.hypochlorite_strength_after(start, [temperature], [30])
        assert decay.hypochlorite_range_remarks(start, [temperature])
    else:
        assert decay.hypochlorite_range_remarks(start, [temperature]) == ()


def test_rules_of_the_industry_are_met():
    """3.5 to 4.1 times as fast per 10 °C; 200 g/L loses a share 5 times as fast as 100 g/L; halved strength, loss ÷ 8."""
    k = decay.hypochlorite_k2_per_m_s
    assert 3.4 < k(30.0, 3.0) / k(20.0, 3.0) < 4.2
    loss = [1 - decay.hypochlorite_strength_after(c, [20.0], [0.5]) / c for c in (100.0, 200.0)]
    assert loss[1] / loss[0] == pytest.approx(5.3, abs=0.3)
    lost = [c - decay.hypochlorite_strength_after(c, [20.0], [0.5]) for c in (71.0, 142.0)]
    assert lost[1] / lost[0] == pytest.approx(8.1, abs=0.3)


def test_a_temperature_history_is_integrated_exactly():
    """Against the differential equation, solved step by step, over a warm fortnight between two cool weeks."""
    history = [(18.0, 7.0), (31.0, 14.0), (18.0, 7.0)]
    mu = decay.hypochlorite_ionic_strength_m(120.0)

    def rate(day, c):
        temperature = 31.0 if 7.0 <= day < 21.0 else 18.0
        return -decay.hypochlorite_k2_per_m_s(temperature, mu) * 86400 / decay.CL2_G_MOL * c**2

    left = 120.0
    for a, b in ((0, 7), (7, 21), (21, 28)):
        left = integrate.solve_ivp(rate, (a, np.nextafter(b, a)), [left], rtol=1e-10, atol=1e-9).y[0, -1]
    temperatures, days = zip(*history, strict=True)
    assert decay.hypochlorite_strength_after(120.0, temperatures, days) == pytest.approx(left, rel=1e-6)


@settings(deadline=None)
@given(start=st.floats(0.0, 200.0), temperature=st.floats(0, 40), a=st.floats(0, 60), b=st.floats(0, 60))
def test_decay_runs_on_from_where_it_was(start, temperature, a, b):
    fresh = {"fresh_g_l": start, "extrapolate": True}
    midway = decay.hypochlorite_strength_after(start, [temperature], [a], **fresh)
    end = decay.hypochlorite_strength_after(midway, [temperature], [b], **fresh)
    once = decay.hypochlorite_strength_after(start, [temperature], [a + b], **fresh)
    assert end == pytest.approx(once, rel=1e-9, abs=1e-12)
    assert 0.0 <= end <= midway <= start
    array = decay.hypochlorite_strength_after(np.array([start, 100.0]), [temperature], [a], extrapolate=True)
    assert array[0] == pytest.approx(midway, rel=1e-12, abs=1e-15)


def test_weak_product_is_not_extrapolated_to_slower_than_measured():
    assert decay.hypochlorite_k2_per_m_s(20.0, 0.3, extrapolate=True) == decay.hypochlorite_k2_per_m_s(20.0, 1.0)
    assert "strength" in decay.hypochlorite_range_remarks(8.0, [20.0])[0]
    for temperature in (-5.0, 61.0, float("nan")):
        with pytest.raises(errors.OutOfRange):
            decay.hypochlorite_k2_per_m_s(temperature, 3.0, extrapolate=True)


def test_peroxide_loses_one_percent_a_year_and_doubles_each_ten_degrees():
    year = 365.25
    assert decay.peroxide_strength_after(35.0, [20.0], [year]) == pytest.approx(35.0 * 0.99)
    assert decay.peroxide_strength_after(35.0, [30.0], [year]) == pytest.approx(35.0 * 0.99**2)
    assert decay.peroxide_strength_after(35.0, [20.0, 30.0], [year, year]) == pytest.approx(35.0 * 0.99**3)
    with pytest.raises(errors.ChemistryError):
        decay.peroxide_strength_after(35.0, [20.0], [1.0, 2.0])


@settings(deadline=None)
@given(dose=st.floats(0.01, 500), volume=st.floats(0.01, 500), fraction=st.floats(0.01, 1.0))
def test_dose_and_product_are_inverse(dose, volume, fraction):
    kilograms = feed.product_kg(dose, fraction, volume)
    assert feed.dose_mg_l(kilograms, fraction, volume) == pytest.approx(dose)
    assert feed.volume_treated_ml(kilograms, fraction, dose) == pytest.approx(volume)
    hourly = feed.feed_l_h(dose, volume, fraction, 1.2)
    assert feed.dose_from_feed_mg_l(hourly, volume, fraction, 1.2) == pytest.approx(dose)
    assert feed.feed_ml_min(dose, volume * 24, fraction, 1.2) * 60 / 1000 == pytest.approx(hourly)


def test_the_worked_three_days_of_caustic():
    """272 L of 25 % caustic at 1.273 kg/L into 11 ML is 7.8695 mg/L."""
    fraction = products.active_fraction(25.0, "weight_pct", 1.273, "NaOH", "NaOH")
    assert feed.dose_mg_l(272 * 1.273, fraction, 11.0) == pytest.approx(7.8695, abs=5e-5)


def test_impossible_use_is_refused_not_clipped():
    with pytest.raises(errors.OutOfRange):
        feed.dose_mg_l(-4700.0, 0.25, 11.0)
    for volume in (0.0, float("nan")):
        with pytest.raises(errors.OutOfRange):
            feed.dose_mg_l(10.0, 0.25, volume)
    with pytest.raises(errors.OutOfRange):
        feed.used_on_scale_kg(800.0, 900.0)
    assert feed.used_on_scale_kg(1200.0, 5900.0, 5000.0) == 300.0


def test_feeders_cylinders_and_days():
    assert feed.stroke_pct(30.0, 120.0) == 25.0
    assert feed.feed_from_setting(25.0, 120.0) == 30.0
    with pytest.raises(errors.OutOfRange):
        feed.stroke_pct(130.0, 120.0)
    assert feed.drawdown_ml_min(50.0, 30.0) == 100.0
    assert feed.cylinder_net_kg(118.0, 60.0) == 58.0
    with pytest.raises(errors.OutOfRange):
        feed.cylinder_net_kg(55.0, 60.0)
    assert feed.containers_for(100.0, 25.0) == 4
    assert feed.containers_for(100.1, 25.0) == 5
    assert feed.days_of_supply(500.0, 25.0) == 20.0
    assert feed.days_of_supply(500.0, 0.0) == float("inf")
    np.testing.assert_array_equal(feed.days_of_supply(np.array([50.0, 0.0]), 25.0), [2.0, 0.0])
    with pytest.raises(errors.ChemistryError):
        feed.caco3_equivalent_mg_l(1.0, "NaCl")


def test_mass_ratios_invert():
    for a, b in [("NaOCl", "Cl2"), ("Ca(OCl)2", "NaOCl"), ("CaO", "Ca(OH)2"), ("NaOH", "CaCO3"), ("H3PO4", "P")]:
        assert products.mass_ratio(a, b) * products.mass_ratio(b, a) == pytest.approx(1.0)
    assert products.mass_ratio("Na2CO3", "CaCO3") == pytest.approx(
        constants.molar_mass("CaCO3") / constants.molar_mass("Na2CO3")
    )
    assert products.fraction_of_product(HYPO, "NaOCl", strength=100.0) == pytest.approx(0.1 / 1.2 * 74.439 / 70.9, rel=1e-4)


def test_strengths_without_what_they_need_are_refused():
    for call in (
        lambda: products.strength_from_weight_fraction(0.1, "trade_pct"),
        lambda: products.strength_from_weight_fraction(0.1, "percent", 1.2),
        lambda: products.dilute(0.0, 1.2, 10.0, "weight_pct", 0.0),
        lambda: decay.hypochlorite_strength_after(100.0, [20.0], [1.0, 2.0]),
    ):
        with pytest.raises(errors.ChemistryError):
            call()
    # 6 mol/L of ions is passed at 209 g/L, just below the strength range's end.
    assert "ionic strength" in decay.hypochlorite_range_remarks(212.0, [20.0])[0]
