"""Hardness, alkalinity forms and ion balance."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from chemistry import errors, hardness

AMOUNT = st.floats(0.0, 1000.0)


def test_published_factors():
    """Standard Methods 2340 B: 2.497 Ca + 4.118 Mg; iron, manganese and strontium from memory there."""
    assert hardness.total_hardness_mg_l_caco3(1.0, 0.0) == pytest.approx(2.497, rel=2e-4)
    assert hardness.total_hardness_mg_l_caco3(0.0, 1.0) == pytest.approx(4.118, rel=2e-4)
    more = hardness.total_hardness_mg_l_caco3(0.0, 0.0, iron_mg_l=1.0)
    assert more == pytest.approx(1.792, rel=2e-4)
    assert hardness.total_hardness_mg_l_caco3(0.0, 0.0, manganese_mg_l=1.0) == pytest.approx(1.822, rel=2e-4)
    assert hardness.total_hardness_mg_l_caco3(0.0, 0.0, strontium_mg_l=1.0) == pytest.approx(1.142, rel=3e-4)
    assert pytest.approx(50.043, rel=1e-5) == hardness.CACO3_MG_MEQ


@given(AMOUNT)
def test_there_and_back(value):
    assert hardness.calcium_mg_l(hardness.calcium_hardness_mg_l_caco3(value)) == pytest.approx(value)
    assert hardness.magnesium_mg_l(hardness.magnesium_hardness_mg_l_caco3(value)) == pytest.approx(value)


@given(AMOUNT, AMOUNT, AMOUNT)
def test_parts_add_up(calcium, magnesium, alkalinity):
    found = hardness.parts(calcium, magnesium, alkalinity)
    assert found.carbonate == pytest.approx(min(calcium + magnesium, alkalinity))
    assert found.carbonate + found.non_carbonate == pytest.approx(calcium + magnesium)
    assert found.calcium_carbonate + found.calcium_non_carbonate == pytest.approx(calcium)
    assert found.magnesium_carbonate + found.magnesium_non_carbonate == pytest.approx(magnesium)
    assert found.carbonate + found.sodium_alkalinity == pytest.approx(alkalinity)
    assert min(found.sodium_alkalinity, found.non_carbonate) == pytest.approx(0.0, abs=1e-9)
    assert min(found.magnesium_carbonate, found.calcium_non_carbonate) == 0.0, "calcium is paired first"


@pytest.mark.parametrize(
    ("p", "m", "hydroxide", "carbonate", "bicarbonate"),
    [
        (0.0, 100.0, 0.0, 0.0, 100.0),
        (20.0, 100.0, 0.0, 40.0, 60.0),
        (50.0, 100.0, 0.0, 100.0, 0.0),
        (70.0, 100.0, 40.0, 60.0, 0.0),
        (100.0, 100.0, 100.0, 0.0, 0.0),
    ],
)
def test_the_five_rows_of_the_table(p, m, hydroxide, carbonate, bicarbonate):
    """Standard Methods 2320 B, table 2320:II."""
    found = hardness.alkalinity_forms(p, m)
    assert (found.hydroxide, found.carbonate, found.bicarbonate) == pytest.approx((hydroxide, carbonate, bicarbonate))


def test_p_above_m_is_refused():
    with pytest.raises(errors.ChemistryError, match="titration"):
        hardness.alkalinity_forms(101.0, 100.0)
    with pytest.raises(errors.ChemistryError, match="titration"):
        hardness.alkalinity_forms(np.array([10.0, 101.0]), 100.0)


def test_a_neutral_analysis_balances():
    found = hardness.ion_balance(
        alkalinity_mg_l_caco3=2.0 * 50.0435, calcium_mg_l=40.078, sodium_mg_l=22.98977, chloride_mg_l=35.45
    )
    assert found.difference_percent == pytest.approx(0.0, abs=1e-3)
    assert found.within()
    off = hardness.ion_balance(alkalinity_mg_l_caco3=100.0, calcium_mg_l=np.array([40.078, 60.0]))
    assert off.within().tolist() == [True, False]


@pytest.mark.parametrize("value", [-0.1, 20001.0, float("nan"), np.array([1.0, np.nan])])
def test_outside_is_refused(value):
    with pytest.raises(errors.OutOfRange, match="alkalinity"):
        hardness.parts(100.0, 50.0, value)
