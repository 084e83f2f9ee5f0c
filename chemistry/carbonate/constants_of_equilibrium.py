"""Equilibrium constants of the carbonate system and of its ion pairs, as log10 K against temperature.

Each is a function of T in kelvin of the form A + B T + C/T + D log T + E/T^2, or van 't Hoff from 25 °C where
only an enthalpy is published. Concentrations in mol per kg of water, infinite dilution. Valid 0 to 80 °C;
outside raises OutOfRange. (The pair CaCO3(aq) was fitted from 5 °C up: from 0 to 5 °C it is extended, as
PHREEQC does.)

Sources: Plummer and Busenberg 1982 (key PLUMMER-BUSENBERG-1982) for CO2, HCO3-, CaCO3 solids, CaHCO3+,
CaCO3(aq); phreeqc.dat (key PHREEQC-DAT) for water and the other pairs; wateq4f.dat (key WATEQ4F-DAT) for
brucite; Morris 1966 (key MORRIS-1966, from memory) for hypochlorous acid.
"""

import math
from typing import NamedTuple

import numpy as np

from chemistry import activity, errors
from chemistry.constants import Values

LOWEST_C, HIGHEST_C = 0.0, 80.0
_GAS_KCAL = 1.987204e-3  # kcal/mol/K, CODATA 2018 gas constant in thermochemical kilocalories

# name: (A, B, C, D, E)
ANALYTIC: dict[str, tuple[float, float, float, float, float]] = {
    "henry_co2": (108.3865, 0.01985076, -6919.53, -40.45154, 669365.0),
    "k1": (-356.3094, -0.06091964, 21834.37, 126.8339, -1684915.0),
    "k2": (-107.8871, -0.03252849, 5151.79, 38.92561, -563713.9),
    "calcite": (-171.9065, -0.077993, 2839.319, 71.595, 0.0),
    "aragonite": (-171.9773, -0.077993, 2903.293, 71.595, 0.0),
    "vaterite": (-172.1295, -0.077993, 3074.688, 71.595, 0.0),
    "cahco3": (1209.120, 0.31294, -34765.05, -478.782, 0.0),
    # The second coefficient is printed -0.299444 in the abstract; -0.299440 (phreeqc.dat) reproduces 3.22 at
    # 25 °C.
    "caco3_aq": (-1228.732, -0.299440, 35512.75, 485.818, 0.0),
    "mgco3_aq": (0.9910, 0.00667, 0.0, 0.0, 0.0),
    "mghco3": (48.6721, 0.03252849, -2614.335, -18.00263, 563713.9),
    "hso4": (-56.889, 0.006473, 2307.9, 19.8858, 0.0),
    "kso4": (3.106, 0.0, -673.6, 0.0, 0.0),
    "hocl": (10.0686, -0.0253, -3000.0, 0.0, 0.0),
}
# name: (log K at 25 °C, reaction enthalpy in kcal/mol)
_KW = (293.29227, 0.1360833, -10576.913, -123.73158, 0.0, -6.996455e-5)  # as above, and F T^2
VAN_T_HOFF: dict[str, tuple[float, float]] = {
    "caso4": (2.25, 1.325),
    "mgso4": (2.37, 4.55),
    "naso4": (0.70, 1.12),
    "nahco3": (-0.25, -1.0),
    "naco3": (1.27, 8.91),
    "caoh": (-12.78, 0.0),
    "mgoh": (-11.44, 15.952),
    "brucite": (16.84, -27.1),
}


def log_k(name: str, temperature_c: Values) -> Values:
    """Log10 K of one reaction of ANALYTIC or VAN_T_HOFF, or "kw".

    The reactions: henry_co2 CO2(g) = CO2(aq), mol/kg/atm; k1 CO2 + H2O = H + HCO3; k2 HCO3 = H + CO3;
    calcite, aragonite, vaterite CaCO3 = Ca + CO3; cahco3 Ca + HCO3; caco3_aq Ca + CO3; mgco3_aq Mg + CO3;
    mghco3 Mg + H + CO3; hso4 SO4 + H; caso4, mgso4, naso4, kso4 metal + SO4; nahco3 Na + HCO3; naco3 Na +
    CO3; caoh Ca + H2O = CaOH + H; mgoh likewise; brucite Mg(OH)2 + 2 H = Mg + 2 H2O; hocl HOCl = H + OCl; kw
    H2O = H + OH.

    temperature_c: 0 to 80 °C; outside raises OutOfRange. Source: the module's heading.
    """
    require_temperature(temperature_c)
    if name != "kw" and name not in ANALYTIC and name not in VAN_T_HOFF:
        raise errors.ChemistryError(f"no equilibrium constant named {name!r}")
    kelvin = temperature_c + 273.15
    a, b, c, d, e, f = _coefficients(name)
    return a + b * kelvin + c / kelvin + d * _log10(kelvin) + e / kelvin**2 + f * kelvin**2


class Constants(NamedTuple):
    """K itself (not its logarithm) of every reaction the solver uses, and the Debye-Hückel A (natural log)
    and B."""

    kw: Values
    k1: Values
    k2: Values
    cahco3: Values
    caco3_aq: Values
    caso4: Values
    caoh: Values
    mghco3: Values
    mgco3_aq: Values
    mgso4: Values
    mgoh: Values
    nahco3: Values
    naco3: Values
    naso4: Values
    kso4: Values
    hso4: Values
    hocl: Values
    calcite: Values
    brucite: Values
    henry_co2: Values
    a_natural: Values
    b: Values


def at(temperature_c: Values) -> "Constants":
    """All :class:`Constants` at a temperature, 0 to 80 °C (not checked here: callers have checked the
    water)."""
    kelvin = temperature_c + 273.15
    inverse = 1.0 / kelvin
    a, b = activity.debye_huckel_a_and_b(temperature_c)
    values: Values
    basis: Values
    if isinstance(kelvin, np.ndarray):
        basis = np.stack((np.ones_like(kelvin), kelvin, inverse, np.log10(kelvin), inverse**2, kelvin**2))
        values = np.exp(np.tensordot(_NATURAL_TABLE, basis, axes=1))
    else:
        basis = (1.0, kelvin, inverse, math.log10(kelvin), inverse * inverse, kelvin * kelvin)
        values = np.exp(_NATURAL_TABLE @ basis).tolist()
    return Constants._make((*values, activity.LN10 * a, b))


def require_temperature(temperature_c: Values) -> None:
    """Raise OutOfRange outside 0 to 80 °C."""
    errors.require("temperature", temperature_c, "°C", LOWEST_C, HIGHEST_C, "Plummer and Busenberg 1982")


def _log10(kelvin: Values) -> Values:
    return np.log10(kelvin) if isinstance(kelvin, np.ndarray) else math.log10(kelvin)


def _coefficients(name: str) -> tuple[float, ...]:
    """A to F of one reaction; van 't Hoff is of the same form with A and C alone."""
    if name == "kw":
        return _KW
    if name in ANALYTIC:
        return (*ANALYTIC[name], 0.0)
    at_25, enthalpy_kcal = VAN_T_HOFF[name]
    slope = enthalpy_kcal / (activity.LN10 * _GAS_KCAL)
    return (at_25 + slope / 298.15, 0.0, -slope, 0.0, 0.0, 0.0)


_NATURAL_TABLE = activity.LN10 * np.array([_coefficients(name) for name in Constants._fields[:-2]])
