"""Equilibrium constants at 25 °C as their papers print them. Agreement over temperature: agreement.py."""

import numpy as np
import pytest

from chemistry import errors
from chemistry.carbonate import constants_of_equilibrium

PRINTED = {
    # Plummer and Busenberg 1982, abstract
    "henry_co2": (-1.468, 0.001),
    "k1": (-6.352, 0.001),
    "k2": (-10.329, 0.001),
    "calcite": (-8.480, 0.001),
    "aragonite": (-8.336, 0.001),
    "vaterite": (-7.913, 0.001),
    "cahco3": (1.11, 0.005),
    "caco3_aq": (3.22, 0.006),
    # phreeqc.dat, its log_k lines
    "caso4": (2.25, 1e-9),
    "mgso4": (2.37, 1e-9),
    "naso4": (0.70, 1e-9),
    "kso4": (0.85, 0.005),
    "nahco3": (-0.25, 1e-9),
    "naco3": (1.27, 1e-9),
    "mgco3_aq": (2.98, 0.001),
    "mghco3": (11.399, 0.002),
    "hso4": (1.988, 0.001),
    "caoh": (-12.78, 1e-9),
    "mgoh": (-11.44, 1e-9),
    "kw": (-13.995, 0.001),
    # wateq4f.dat
    "brucite": (16.84, 1e-9),
    # several pages: about 7.5
    "hocl": (-7.537, 0.001),
}


@pytest.mark.parametrize("name", PRINTED)
def test_at_25_c(name):
    value, tolerance = PRINTED[name]
    assert constants_of_equilibrium.log_k(name, 25.0) == pytest.approx(value, abs=tolerance)


def test_every_constant_is_checked():
    named = {*constants_of_equilibrium.ANALYTIC, *constants_of_equilibrium.VAN_T_HOFF, "kw"}
    assert named == set(PRINTED)


def test_all_at_once_as_one_by_one():
    temperatures = np.array([0.0, 7.3, 25.0, 80.0])
    several = constants_of_equilibrium.at(temperatures)
    for index, temperature_c in enumerate(temperatures):
        alone = constants_of_equilibrium.at(float(temperature_c))
        for name in several._fields:
            assert getattr(several, name)[index] == pytest.approx(getattr(alone, name), rel=1e-12)
        for name in several._fields[:-2]:
            log_k = constants_of_equilibrium.log_k(name, float(temperature_c))
            assert np.log10(getattr(alone, name)) == pytest.approx(log_k, abs=1e-11)


def test_outside_is_refused():
    for temperature_c in (-0.1, 80.1, float("nan")):
        with pytest.raises(errors.OutOfRange, match="temperature"):
            constants_of_equilibrium.log_k("k1", temperature_c)
    with pytest.raises(errors.ChemistryError, match="no equilibrium constant"):
        constants_of_equilibrium.log_k("k3", 25.0)
