"""Sequestration: dose, limits, reversion."""

import numpy as np
import pytest

from chemistry import errors, sequestration


def test_dose_and_limits():
    found = sequestration.polyphosphate_dose(
        0.6, 0.2, mg_per_mg_iron=3.0, mg_per_mg_manganese=5.0, base_mg_l=0.5, phosphate_share_po4=0.7
    )
    assert found.product_mg_l == pytest.approx(0.5 + 1.8 + 1.0)
    assert found.phosphate_added_mg_l_po4 == pytest.approx(3.3 * 0.7)
    assert not found.too_much_metal
    several = sequestration.polyphosphate_dose(np.array([0.5, 0.9]), 0.2, mg_per_mg_iron=np.array([2.0, 15.0]))
    assert several.too_much_metal.tolist() == [False, True]
    assert several.too_much_phosphate.tolist() == [False, True]


def test_the_highest_product_keeps_the_limit():
    product = sequestration.highest_product_mg_l(phosphate_share_po4=0.8, raw_phosphate_mg_l_po4=2.0)
    assert product * 0.8 + 2.0 == pytest.approx(10.0)
    assert sequestration.highest_product_mg_l(phosphate_share_po4=0.8, raw_phosphate_mg_l_po4=12.0) == 0.0


def test_silicate_limits():
    assert not sequestration.silicate_check(20.0, 40.0, 1.0, 1.0).too_much_silica
    assert sequestration.silicate_check(20.1, 0.0, 0.1, 0.1).too_much_silica
    assert sequestration.silicate_check(10.0, 50.5, 0.1, 0.1).too_much_silica
    assert sequestration.silicate_check(10.0, 10.0, 1.5, 0.6).too_much_metal


def test_reversion_as_measured_in_glass():
    """Holm and Edwards 2003: under 10 % in 24 d without calcium, over 70 % with 120 mg/L."""
    for calcium, left in ((0.0, 0.90), (1.0, 0.90), (120.0, 0.30)):
        half_life = sequestration.reversion_half_life_d(calcium)
        found = sequestration.reversion(24.0, 20.0, half_life_d_20c=half_life)
        assert found.polyphosphate_left_share == pytest.approx(left, rel=1e-9)
        assert found.is_estimate
    assert np.all(np.diff(sequestration.reversion_half_life_d(np.linspace(1.0, 500.0, 50))) < 0.0)


def test_warm_water_reverts_faster():
    """The dossier's rates: 0.0837 a day at 12 °C, 0.2369 at 25 °C."""
    cold = sequestration.reversion(1.0, 12.0, half_life_d_20c=5.0).half_life_d
    warm = sequestration.reversion(1.0, 25.0, half_life_d_20c=5.0).half_life_d
    assert cold / warm == pytest.approx(0.2369 / 0.0837, rel=0.01)


def test_definitions():
    """Standard Methods 4500-P: 3.066; silica 2.139."""
    assert sequestration.phosphate_from_phosphorus_mg_l_po4(1.0) == pytest.approx(3.066, rel=2e-4)
    assert sequestration.silica_from_silicon_mg_l_sio2(1.0) == pytest.approx(2.139, rel=2e-4)


@pytest.mark.parametrize(
    "call",
    [
        lambda: sequestration.polyphosphate_dose(-0.1, 0.2),
        lambda: sequestration.polyphosphate_dose(float("nan"), 0.2),
        lambda: sequestration.polyphosphate_dose(0.1, 0.2, mg_per_mg_iron=50.0),
        lambda: sequestration.reversion(400.0, 20.0, half_life_d_20c=10.0),
        lambda: sequestration.reversion_half_life_d(600.0),
        lambda: sequestration.silicate_check(300.0, 0.0, 0.1, 0.1),
    ],
)
def test_nonsense_is_refused(call):
    with pytest.raises(errors.OutOfRange):
        call()
