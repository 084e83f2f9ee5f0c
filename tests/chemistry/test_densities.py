"""Densities against published tables, to 0.3 % inside the range of ours."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chemistry import densities, errors, units

DATA = Path(__file__).parent / "data"
# Rows not held to 0.3 %, and why. Rounded: printed to 0.01. Known: the row's own note or a contradiction in print.
ROUNDED = "rounded in source"
CONTRADICTED = {
    ("FeCl3", "30", "20", "1267.9"): "2 % below two other tables",
    ("NaOH", "50", "25", "1515"): "0.4 % below the handbook's 1.522",
    ("NH3", "28", "20", "900"): "printed to two digits",
    ("liquid alum", "48.5", "15.6", "1335"): "a range of products, 1.330 to 1.342",
}


def _published():
    with (DATA / "densities-published.csv").open(encoding="utf-8", newline="") as lines:
        for row in csv.DictReader(lines):
            key = tuple(row[k] for k in ("chemical", "strength_pct", "temperature_c", "density_kg_m3"))
            strong_caustic = row["chemical"] == "NaOH" and float(row["strength_pct"]) >= 40
            model = row["seen"].startswith("computed")
            doubtful = "DOUBTFUL" in row["seen"] or "INVALID" in row["seen"]
            if doubtful or key in CONTRADICTED or row["note"] == ROUNDED or (model and strong_caustic):
                continue
            yield row


def _ours(row):
    chemical, strength = row["chemical"], float(row["strength_pct"])
    if chemical == "liquid alum":
        # The table's dry alum holds 17 % Al2O3, the formula's 17.155 %.
        chemical, strength = densities.DRY_ALUM, strength * 17 / 17.155
    return densities.density_kg_l(chemical, strength, float(row["temperature_c"]))


def test_densities_meet_every_published_row_inside_their_range():
    compared, worst = 0, 0.0
    for row in _published():
        try:
            ours = _ours(row)
        except errors.ChemistryError:
            continue
        off = abs(1000 * ours / float(row["density_kg_m3"]) - 1)
        assert off < 0.003, row
        compared, worst = compared + 1, max(worst, off)
    assert compared > 320
    assert worst > 0  # otherwise nothing was compared


def test_densities_meet_the_laliberte_equation_where_the_handbook_does_not_rule():
    with (DATA / "densities-laliberte.csv").open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    compared = 0
    for row in rows:
        if row["chemical"] == "NaOH" and float(row["weight_pct"]) >= 40:
            continue  # 0.3 to 0.6 % below handbooks there
        try:
            ours = densities.density_kg_l(row["chemical"], float(row["weight_pct"]), float(row["temperature_c"]))
        except errors.OutOfRange:
            continue
        assert ours == pytest.approx(float(row["density_kg_l"]), rel=0.003), row
        compared += 1
    assert compared > 600


@pytest.mark.parametrize(
    ("chemical", "strength", "temperature"),
    [("H2SO4", 99.0, 20.0), ("NaOH", 51.0, 20.0), ("NaOH", 25.0, 60.0), ("HCl", 38.0, 20.0), ("NaCl", 27.0, 20.0),
     ("NaOH", float("nan"), 20.0)],
)  # fmt: skip
def test_no_density_outside_the_table(chemical, strength, temperature):
    with pytest.raises(errors.OutOfRange):
        densities.density_kg_l(chemical, strength, temperature)


def test_an_unknown_chemical_is_refused_by_name():
    with pytest.raises(errors.ChemistryError, match="polymer"):
        densities.density_kg_l("polymer", 10.0, 20.0)


def test_ninety_three_percent_acid_is_the_handbooks_not_the_equations():
    assert densities.density_kg_l("H2SO4", 93.0, 20.0) == pytest.approx(1.828, abs=0.001)


@settings(deadline=None)
@given(
    chemical=st.sampled_from(densities.known_chemicals()),
    a=st.floats(0, 1),
    b=st.floats(0, 1),
)
def test_arrays_equal_scalars_and_nothing_is_nan(chemical, a, b):
    low, high, coldest, hottest = densities.valid_range(chemical)
    strength, temperature = low + a * (high - low), coldest + b * (hottest - coldest)
    one = densities.density_kg_l(chemical, strength, temperature)
    many = densities.density_kg_l(chemical, np.array([strength, low, high]), temperature)
    assert many.shape == (3,)
    assert many[0] == pytest.approx(one, rel=1e-14)
    assert np.all((many > 0.8) & (many < 1.9))


@pytest.mark.parametrize("chemical", sorted(set(densities.known_chemicals()) - {"H2SO4", "NH3"}))
def test_stronger_is_denser(chemical):
    low, high, coldest, _ = densities.valid_range(chemical)
    assert np.all(np.diff(densities.density_kg_l(chemical, np.linspace(low, high, 50), coldest)) > 0)


def test_hypochlorite_line_meets_the_opened_figures():
    for strength, caustic, printed in [(120, 0.0, 1.157), (120, 0.2, 1.160), (120, 0.73, 1.168), (61.7, 0.0, 1.081)]:
        assert densities.hypochlorite_density_kg_l(strength, caustic) == pytest.approx(printed, abs=0.001)
    with pytest.raises(errors.OutOfRange):
        densities.hypochlorite_density_kg_l(200.0)


def test_specific_gravity_refers_to_water_at_sixty_fahrenheit():
    assert densities.density_from_sg_kg_l(1.3303) == pytest.approx(1.3290, abs=1e-4)  # alum table WP-1018
    assert units.convert(densities.density_from_sg_kg_l(1.335), "kg/L", "lb/US_gal") == pytest.approx(11.13, abs=0.02)
