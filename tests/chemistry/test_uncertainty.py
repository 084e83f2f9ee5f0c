"""First-order propagation against the `uncertainties` package."""

import numpy as np
import pytest
import uncertainties
from hypothesis import given, settings
from hypothesis import strategies as st
from uncertainties import umath

from chemistry import errors, uncertainty

positive = st.floats(1.0, 100.0)
small = st.floats(1e-4, 0.02)


def dose(use, strength, volume):
    return use * strength / volume


@settings(deadline=None)
@given(use=positive, strength=positive, volume=positive, a=small, b=small, c=small)
def test_a_dose_agrees_with_the_uncertainties_package(use, strength, volume, a, b, c):
    theirs = dose(*(uncertainties.ufloat(v, r * v) for v, r in ((use, a), (strength, b), (volume, c))))
    ours = uncertainty.of_function(
        dose,
        {"use": use, "strength": strength, "volume": volume},
        {"use": a * use, "strength": b * strength, "volume": c * volume},
    )
    # Over ± one uncertainty the slope of 1/V is 1/(1 - c²) of its tangent.
    assert ours == pytest.approx(theirs.std_dev, rel=1e-3, abs=1e-15)
    closed = uncertainty.of_dose_mg_l(
        dose_mg_l=theirs.nominal_value, use_relative_sd=a, strength_relative_sd=b, volume_relative_sd=c
    )
    assert closed == pytest.approx(theirs.std_dev, rel=1e-9, abs=1e-15)


@settings(deadline=None)
@given(a=positive, b=positive, sd_a=st.floats(0.01, 5), sd_b=st.floats(0.01, 5), share=st.floats(0, 1))
def test_sums_and_interpolation_agree(a, b, sd_a, sd_b, share):
    x, y = uncertainties.ufloat(a, sd_a), uncertainties.ufloat(b, sd_b)
    assert uncertainty.of_sum([sd_a, sd_b]) == pytest.approx((x - y).std_dev, abs=1e-12)
    between = (1 - share) * x + share * y
    assert uncertainty.of_interpolation(share, sd_a, sd_b) == pytest.approx(between.std_dev, abs=1e-12)


def test_a_curved_function_agrees_while_the_uncertainty_is_small():
    theirs = umath.exp(-0.3 * uncertainties.ufloat(2.0, 0.01)).std_dev
    ours = uncertainty.of_function(lambda t: np.exp(-0.3 * t), {"t": 2.0}, {"t": 0.01})
    assert ours == pytest.approx(theirs, rel=1e-4)


def test_the_boundary_of_the_worked_days():
    """A boundary read 11/12 of the way carries 0.9204 of a reading; 6.796 L of 272 L is 2.498 %, 2.737 % in all."""
    boundary = uncertainty.of_interpolation(11 / 12, 5.0, 5.0)
    assert boundary / 5.0 == pytest.approx(0.9204, abs=1e-4)
    use = uncertainty.of_sum([5.0, boundary])
    assert use == pytest.approx(6.796, abs=1e-3)
    assert uncertainty.relative_of_product([use / 272, 0.01, 0.005]) == pytest.approx(0.02737, abs=1e-5)


def test_five_millimetres_in_a_three_metre_tank():
    assert uncertainty.of_sum([uncertainty.of_volume_l(1000 * np.pi * 9 / 4, 0.005)] * 2) == pytest.approx(50.0, abs=0.1)


def test_the_edge_of_a_table_is_met_from_inside():
    def steps(x):
        errors.require("x", x, "", 0.0, 1.0, "test")
        return 2 * x

    assert uncertainty.of_function(steps, {"x": 1.0}, {"x": 0.1}) == pytest.approx(0.2)
    with pytest.raises(errors.ChemistryError):
        uncertainty.of_function(steps, {"x": 0.5}, {"x": 2.0})
    with pytest.raises(errors.ChemistryError):
        uncertainty.of_function(steps, {"x": 0.5}, {"y": 0.1})
    with pytest.raises(errors.OutOfRange):
        uncertainty.of_function(steps, {"x": 0.5}, {"x": -0.1})
