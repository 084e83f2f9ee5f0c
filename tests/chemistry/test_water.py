"""Pure water: published values, shapes, refusals. Agreement with tables: agreement.py."""

import numpy as np
import pytest

from chemistry import errors, water


def test_density_is_greatest_near_4_c():
    t = np.arange(0.0, 12.0, 0.01)
    assert t[water.density_kg_m3(t).argmax()] == pytest.approx(3.98, abs=0.02)


@pytest.mark.parametrize("function", [water.density_kg_m3, water.pkw, water.pkw_harned_hamer, water.relative_permittivity])
def test_numbers_and_arrays_agree(function):
    t = np.array([0.0, 12.5, 40.0, 60.0])
    assert function(t) == pytest.approx([function(float(value)) for value in t], rel=1e-14)
    assert isinstance(function(12.5), float)


@pytest.mark.parametrize("function", [water.density_kg_m3, water.pkw, water.pkw_harned_hamer, water.relative_permittivity])
@pytest.mark.parametrize("temperature_c", [-0.01, 100.01, float("nan"), np.array([20.0, np.nan])])
def test_outside_is_refused(function, temperature_c):
    with pytest.raises(errors.OutOfRange) as refused:
        function(temperature_c)
    assert refused.value.quantity == "temperature"
    assert "°C" in str(refused.value)


def test_pkw_falls_with_temperature():
    assert np.all(np.diff(water.pkw(np.linspace(0.0, 100.0, 200))) < 0.0)
