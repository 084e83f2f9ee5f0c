"""Pure water: density, ionic product and permittivity at atmospheric pressure."""

import math

import numpy as np

from chemistry import errors
from chemistry.constants import Values

_KELVIN = 273.15


def _functions(*values: Values) -> Values:
    """Return the function namespace for ``values`` and the values as floats or float arrays."""
    if all(isinstance(v, (float, int)) for v in values):
        return math, [float(v) for v in values]
    return np, [np.asarray(v, dtype=float) for v in values]


def density_kg_m3(temperature_c: Values) -> Values:
    """Density of pure water at 1 atm, kg/m3.

    temperature_c: 0 to 100 °C; outside raises OutOfRange.
    Source: Kell 1975, equation 16 (key KELL-1975); the equation itself holds to 150 °C along saturation.
    """
    errors.require("temperature", temperature_c, "°C", 0.0, 100.0, "Kell 1975, eq. 16")
    _, (t,) = _functions(temperature_c)
    above = 999.83952 + t * (16.945176 + t * (-7.9870401e-3 + t * (-46.170461e-6 + t * (105.56302e-9 - t * 280.54253e-12))))
    return above / (1.0 + 16.879850e-3 * t)


def pkw(temperature_c: Values) -> Values:
    """pKw, the negative logarithm of the ionic product of water (molal, infinite dilution) at 1 atm.

    temperature_c: 0 to 100 °C; outside raises OutOfRange. 13.995 at 25 °C. Source: :func:`pkw_at_density` with Kell's
    density.
    """
    errors.require("temperature", temperature_c, "°C", 0.0, 100.0, "IAPWS R11-07")
    return pkw_at_density(temperature_c, density_kg_m3(temperature_c))


def pkw_at_density(temperature_c: Values, density_kg_m3: Values) -> Values:
    """pKw of water at a temperature and density, molal, infinite dilution; 11.203153 at 600 K and 700 kg/m3.

    temperature_c: 0 to 800 °C; density_kg_m3: 0 to 1,250; outside raises OutOfRange.
    Source: IAPWS R11-07 after Bandura and Lvov 2006 (key IAPWS-R11-07).
    """
    errors.require("temperature", temperature_c, "°C", 0.0, 800.0, "IAPWS R11-07")
    errors.require("density", density_kg_m3, "kg/m3", 0.0, 1250.0, "IAPWS R11-07")
    xp, (t, rho) = _functions(temperature_c, density_kg_m3)
    kelvin = t + _KELVIN
    rho = rho / 1000.0
    q = rho * xp.exp(-0.864671 + 8659.19 / kelvin - 22786.2 / kelvin**2 * rho ** (2.0 / 3.0))
    gas = 0.61415 + 48251.33 / kelvin - 67707.93 / kelvin**2 + 10102100.0 / kelvin**3
    hydration = xp.log10(1.0 + q) - q / (q + 1.0) * rho * (0.642044 - 56.8534 / kelvin - 0.375754 * rho)
    return -12.0 * hydration + gas + 2.0 * math.log10(18.015268 / 1000.0)


def pkw_harned_hamer(temperature_c: Values) -> Values:
    """pKw by the three-term form 4471/T + 0.01706 T - 6.0875, T in kelvin.

    temperature_c: 0 to 60 °C; outside raises OutOfRange. Source: Harned and Hamer form as used with the
    Langelier index (key HARNED-HAMER); coefficients from memory.
    """
    errors.require("temperature", temperature_c, "°C", 0.0, 60.0, "Harned and Hamer form")
    _, (t,) = _functions(temperature_c)
    kelvin = t + _KELVIN
    return 4471.0 / kelvin + 0.01706 * kelvin - 6.0875


def relative_permittivity(temperature_c: Values) -> Values:
    """Static relative permittivity (dielectric constant) of water at 1 atm.

    temperature_c: 0 to 100 °C; outside raises OutOfRange.
    Source: Bradley and Pitzer 1979 (key BRADLEY-PITZER-1979), at a pressure of 1.01325 bar.
    """
    errors.require("temperature", temperature_c, "°C", 0.0, 100.0, "Bradley and Pitzer 1979")
    xp, (t,) = _functions(temperature_c)
    kelvin = t + _KELVIN
    at_1000_bar = 342.79 * xp.exp(kelvin * (-5.0866e-3 + 9.4690e-7 * kelvin))
    b = -8032.5 + 4.2142e6 / kelvin + 2.1417 * kelvin
    c = -2.0525 + 3115.9 / (kelvin - 182.89)
    return at_1000_bar + c * xp.log((b + 1.01325) / (b + 1000.0))
