"""Molar masses against `periodictable`, unit factors against `pint`, and what is refused."""

from decimal import Decimal
from fractions import Fraction

import numpy as np
import periodictable
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import constants, errors, units
from chemistry.unit_tables import ACCEPTED_UNITS, PARAMETERS, UNITS

PINT = pint.UnitRegistry()
# Our spelling -> pint's, base unit by kind. Hardness and counts have none in pint and are checked by their definitions.
PINT_NAMES = {
    "mg/L": "mg/L", "mg/l": "mg/L", "µg/L": "ug/L", "ug/L": "ug/L", "g/L": "g/L", "g/m3": "g/m**3",
    "lb/US_Mgal": "lb/(1e6*gallon)", "gr/US_gal": "grain/gallon", "kg/ML": "kg/megaliter",
    "m": "m", "cm": "cm", "mm": "mm", "ft": "foot", "in": "inch", "mi": "mile",
    "L": "L", "mL": "mL", "m3": "m**3", "ML": "megaliter", "US_gal": "gallon", "US_Mgal": "1e6*gallon",
    "imp_gal": "imperial_gallon", "US_fl_oz": "fluid_ounce", "US_qt": "quart", "ft3": "foot**3", "in3": "inch**3",
    "kg": "kg", "t": "tonne", "g": "g", "mg": "mg", "lb": "pound", "oz": "ounce", "grain": "grain", "US_ton": "short_ton",
    "m3/h": "m**3/hour", "m3/d": "m**3/day", "m3/s": "m**3/s", "ML/d": "megaliter/day", "L/s": "L/s", "L/min": "L/min",
    "L/h": "L/hour", "mL/min": "mL/min", "US_gal/min": "gallon/min", "US_gal/h": "gallon/hour",
    "US_gal/d": "gallon/day", "US_Mgal/d": "1e6*gallon/day", "MGD": "1e6*gallon/day",
    "imp_Mgal/d": "1e6*imperial_gallon/day", "imp_gal/min": "imperial_gallon/min", "ft3/s": "foot**3/s",
    "kg/h": "kg/hour", "kg/d": "kg/day", "g/min": "g/min", "lb/d": "pound/day", "lb/h": "pound/hour",
    "h": "hour", "min": "minute", "s": "second", "d": "day",
    "kg/L": "kg/L", "kg/m3": "kg/m**3", "g/cm3": "g/cm**3", "lb/US_gal": "pound/gallon",
    "uS/cm": "microsiemens/cm", "µS/cm": "microsiemens/cm", "mS/cm": "millisiemens/cm",
}  # fmt: skip
BASE = {
    "mass per volume": "mg/L", "length": "m", "volume": "L", "mass": "kg", "flow": "m3/h", "mass flow": "kg/h",
    "time": "h", "density": "kg/L", "conductance": "uS/cm",
}  # fmt: skip


def test_atomic_weights_are_ciaaw():
    for element, weight in constants.ATOMIC_WEIGHTS_G_MOL.items():
        assert weight == pytest.approx(getattr(periodictable, element).mass, rel=1e-6), element


@pytest.mark.parametrize(
    ("formula", "atoms"),
    [
        ("H2O", {"H": 2, "O": 1}),
        ("Al2(SO4)3.14H2O", {"Al": 2, "S": 3, "O": 26, "H": 28}),
        ("Al2(SO4)3·14 H2O", {"Al": 2, "S": 3, "O": 26, "H": 28}),
        ("Mg(HCO3)2", {"Mg": 1, "H": 2, "C": 2, "O": 6}),
        ("Ca5(PO4)3(OH)", {"Ca": 5, "P": 3, "O": 13, "H": 1}),
    ],
)
def test_formulas_are_read_with_parentheses_and_hydrates(formula, atoms):
    assert constants.composition(formula) == atoms
    by_hand = sum(constants.ATOMIC_WEIGHTS_G_MOL[e] * n for e, n in atoms.items())
    assert constants.molar_mass(formula) == pytest.approx(by_hand)


@pytest.mark.parametrize("text", ["", " ", "water", "Xx2", "Na(", "Na)", "()", "2H2O", "3", "H2O..", "(NaPO3)n", "A" * 99])
def test_what_is_no_formula_is_refused(text):
    with pytest.raises(errors.ChemistryError):
        constants.molar_mass(text)


@pytest.mark.parametrize("ours", PINT_NAMES)
def test_factors_agree_with_pint(ours):
    base = BASE[UNITS[ours].kind]
    theirs = (1.0 * PINT(PINT_NAMES[ours])).to(PINT(PINT_NAMES[base]).units).magnitude
    assert units.convert(1.0, ours, base) == pytest.approx(theirs, rel=1e-12)


@pytest.mark.parametrize("celsius", [-40.0, 0.0, 12.5, 100.0])
def test_temperatures_agree_with_pint(celsius):
    assert units.convert(celsius, "°C", "°F") == pytest.approx(PINT.Quantity(celsius, "degC").to("degF").magnitude)
    assert units.convert(celsius, "C", "K") == pytest.approx(PINT.Quantity(celsius, "degC").to("kelvin").magnitude)
    assert units.fahrenheit_from_celsius(celsius) == pytest.approx(units.convert(celsius, "°C", "°F"))


def test_every_unit_is_checked_somewhere():
    by_definition = {"as CaCO3", "number", "pH", "temperature", "turbidity", "share", "count", "amount per volume",
                     "equivalents", "chlorine strength"}  # fmt: skip
    assert {name for name in UNITS if UNITS[name].kind not in by_definition} == PINT_NAMES.keys()


@pytest.mark.parametrize(
    ("unit", "as_caco3"),
    [
        ("°dH", 10 * 100.086 / 56.077), ("°fH", 10.0), ("°e", 64.79891 / 4.54609), ("gr/gal", 64.79891 / 3.785411784),
        ("mmol/L", 100.086), ("meq/L", 50.043), ("mg/L as CaCO3", 1.0), ("mg/L CaCO3", 1.0), ("mg/L", 1.0),
    ],
)  # fmt: skip
def test_hardness_units_follow_their_definitions(unit, as_caco3):
    value, canonical = units.canonical(1.0, unit, "hardness")
    assert canonical == "mg/L as CaCO3"
    assert value == pytest.approx(as_caco3, rel=1e-9)


def test_a_millimole_of_alkalinity_is_one_of_acid_and_of_hardness_one_of_calcium_carbonate():
    assert units.canonical(2.0, "mmol/L", "alkalinity")[0] == pytest.approx(100.086)
    assert units.canonical(2.0, "mmol/L", "hardness")[0] == pytest.approx(200.172)


def test_a_missing_basis_is_taken_and_remarked():
    assert units.canonical(180.0, "mg/L", "hardness") == (180.0, "mg/L as CaCO3")
    assert "CaCO3" in units.basis_remark("mg/L", "hardness")
    assert units.basis_remark("mg/L as CaCO3", "hardness") == ""
    assert units.basis_remark("mg/L", "calcium") == ""


@pytest.mark.parametrize(
    ("value", "unit", "parameter", "expected"),
    [
        (7.3, "", "pH", (7.3, "")),
        (7.3, "pH", "pH", (7.3, "")),
        (80.0, "µg/L", "iron", (0.08, "mg/L")),
        (1.0, "meq/L", "magnesium", (12.1525, "mg/L")),
        (250.0, "mg/L as CaCO3", "calcium", (250 * 40.078 / 100.086, "mg/L")),
        (1.0, "mmol/L", "ammonia", (14.007, "mg/L")),
        (50.0, "°F", "temperature", (10.0, "°C")),
        (1.2, "mS/cm", "conductance", (1200.0, "uS/cm")),
        (45.0, "%", "level", (45.0, "%")),
        (5.0, "ft", "level", (1.524, "m")),
        (2.0, "m3", "volume", (2000.0, "L")),
        (1.0, "US_Mgal", "totaliser", (3785411.784, "L")),
        (10.0, "lb", "totaliser", (4.5359237, "kg")),
        (1.0, "ML/d", "peak_hourly_flow", (1000 / 24, "m3/h")),
        (4.0, "kg/h", "feeder_setting", (4.0, "kg/h")),
        (15.0, "", "colour", (15.0, "mg/L")),
        (3.0, "MPN/100mL", "e_coli", (3.0, "CFU/100mL")),
        (2.0, "CFU/mL", "total_coliform", (200.0, "CFU/100mL")),
        (118.0, "g/L", "strength", (118.0, "g/L")),
    ],
)
def test_readings_reach_their_canonical_unit(value, unit, parameter, expected):
    got, canonical = units.canonical(value, unit, parameter)
    assert (pytest.approx(got), canonical) == expected


@pytest.mark.parametrize(
    ("unit", "parameter"),
    [("furlong", "level"), ("MG/L", "calcium"), ("°C", "pH"), ("°dH", "iron"), ("kg", "temperature"), ("mg/L", "pH"),
     ("psi", "weight"), ("meq/L", "free_chlorine_typo")],
)  # fmt: skip
def test_other_units_are_refused_with_the_accepted_ones(unit, parameter):
    with pytest.raises(errors.ChemistryError) as refusal:
        units.canonical(1.0, unit, parameter)
    if isinstance(refusal.value, units.UnknownUnit):
        assert set(refusal.value.accepted) <= set(ACCEPTED_UNITS)
        assert unit in str(refusal.value)


def test_a_parameter_of_the_works_own_takes_its_stated_unit():
    assert units.canonical(500.0, "µg/L", "tannin", "mg/L") == (0.5, "mg/L")
    assert units.canonical_text("500", "ug/L", "tannin", "mg/L") == "0.500"
    with pytest.raises(units.UnknownUnit):
        units.canonical(1.0, "NTU", "tannin", "mg/L")
    with pytest.raises(units.UnknownParameter):
        units.canonical(1.0, "mg/L", "tannin")


@pytest.mark.parametrize(
    ("text", "unit", "parameter", "exact"),
    [
        ("0.80", "mg/L", "free_chlorine", "0.80"),
        ("62.50", "µg/L", "iron", "0.06250"),
        ("1.10", "g/L", "chloride", "1100"),
        ("32", "°F", "temperature", "0"),
        ("1e-3", "mg/L", "iron", "0.001"),
        ("12", "in", "level", "0.3048"),
    ],
)
def test_decimal_text_keeps_its_digits(text, unit, parameter, exact):
    assert units.canonical_text(text, unit, parameter) == exact


@pytest.mark.parametrize("text", ["", "7,3", "<0.05", "nan", "inf", "two"])
def test_text_that_is_no_plain_number_is_refused(text):
    with pytest.raises(errors.ChemistryError):
        units.canonical_text(text, "mg/L", "iron")


@settings(deadline=None)
@given(
    number=st.decimals(min_value=Decimal("-1e6"), max_value=Decimal("1e9"), places=6),
    pair=st.sampled_from([(p, u) for p in PARAMETERS for u in units.accepted_for(p)]),
)
def test_text_and_float_paths_agree(number, pair):
    parameter, unit = pair
    value, _ = units.canonical(float(number), unit, parameter)
    text = units.canonical_text(str(number), unit, parameter)
    assert float(text) == pytest.approx(value, rel=1e-9, abs=1e-9)


@settings(deadline=None)
@given(
    value=st.floats(-1e9, 1e9),
    pair=st.sampled_from([(a, b) for a in UNITS for b in UNITS if UNITS[a].kind == UNITS[b].kind]),
)
def test_conversion_round_trips_and_arrays_equal_scalars(value, pair):
    there = units.convert(value, *pair)
    back = units.convert(there, pair[1], pair[0])
    assert back == pytest.approx(value, rel=1e-9, abs=1e-6)
    assert units.convert(np.array([value, 1.0]), *pair)[0] == pytest.approx(there, rel=1e-15, abs=1e-300)


def test_exact_factors_are_exact_fractions():
    assert UNITS["lb"].factor == Fraction(45359237, 100000000)
    assert UNITS["MGD"].factor * 24 == Fraction("3785.411784")


def test_units_of_two_kinds_do_not_meet():
    for pair in (("kg", "L"), ("mg/L", "mg/L as CaCO3"), ("furlong", "m")):
        with pytest.raises(units.UnknownUnit):
            units.convert(1.0, *pair)
    assert units.convert(2.0, "meq/L", "°fH") == pytest.approx(10.0086)
    assert units.canonical(3.0, "TCU", "tannin", "TCU") == (3.0, "TCU")


def test_short_ways_to_litres_and_kilograms():
    assert units.volume_l(2.0, "m3") == 2000.0
    assert units.mass_kg(1.0, "t") == 1000.0
    assert units.kind_of("imp_gal") == "volume"
    assert units.canonical_unit_of("hardness") == "mg/L as CaCO3"
    assert units.caco3_from_mmol_l(1.0, 2) == pytest.approx(100.086)
    with pytest.raises(units.UnknownUnit):
        units.volume_l(1.0, "kg")
