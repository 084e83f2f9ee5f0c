"""Closed forms of required CT and of log inactivation, each with its range, source and how it stands to the tables."""

from typing import Any

import numpy as np

from chemistry import errors

Values = Any  # a float or a numpy array
_TOOLBOX = "LT2ESWTR Toolbox"


def giardia_free_chlorine_ct(log_inactivation: Values, temperature_c: Values, ph: Values, residual_mg_l: Values) -> Values:
    """CT for Giardia by free chlorine, two-branch regression (Smith, Clark et al. 1995; EPA-816-R-03-004; from memory).

    T < 12.5: CT = 0.353 I (12.006 + e^(2.46 - 0.073 T + 0.125 C + 0.389 pH)); from 12.5 on: CT = 0.361 I
    (-2.261 + e^(2.69 - 0.065 T + 0.111 C + 0.361 pH)). Range 0.5 to 25 °C, pH 6 to 9, C 0.4 to 3.0, I to 3.
    1.000 to 1.174 times the table, never below: safe, stricter by up to 17 %. The branches don't meet at
    12.5 °C.
    """
    _chlorine_ranges(log_inactivation, temperature_c, ph, residual_mg_l)
    t, c = np.asarray(temperature_c, dtype=float), residual_mg_l
    cold = 0.353 * log_inactivation * (12.006 + np.exp(2.46 - 0.073 * t + 0.125 * c + 0.389 * ph))
    warm = 0.361 * log_inactivation * (-2.261 + np.exp(2.69 - 0.065 * t + 0.111 * c + 0.361 * ph))
    return _like(np.where(t < 12.5, cold, warm))


def giardia_free_chlorine_ct_power(
    log_inactivation: Values, temperature_c: Values, ph: Values, residual_mg_l: Values
) -> Values:
    """CT = 0.2828 pH^2.69 C^0.15 0.933^(T-5) I (CLARK-1989, second-hand): 11 % under to 8 % over the table.

    Not conservative: never for compliance. Same range as the other regression.
    """
    _chlorine_ranges(log_inactivation, temperature_c, ph, residual_mg_l)
    return 0.2828 * ph**2.69 * residual_mg_l**0.15 * 0.933 ** (temperature_c - 5.0) * log_inactivation


def virus_free_chlorine_log(ct_mg_min_l: Values, temperature_c: Values) -> Values:
    """Virus logs by free chlorine, pH 6 to 9: (CT e^(0.071 T) + 0.42) / 2.94; 0.5 to 25 °C.

    From memory, the sign of 0.42 unsure: not for compliance. At CT 0 it would give 0.14 log, so CT must be
    above 0.
    """
    errors.require("CT", ct_mg_min_l, "mg min/L", 1e-9, 1e4, "virus regression")
    errors.require("temperature", temperature_c, "°C", 0.5, 25.0, "virus regression")
    return (ct_mg_min_l * np.exp(0.071 * temperature_c) + 0.42) / 2.94


def giardia_ozone_log(ct_mg_min_l: Values, temperature_c: Values) -> Values:
    """Giardia logs by ozone: 1.0380 x 1.0741^T x CT (LT2-TOOLBOX, from memory); 0.5 to 25 °C.

    3-log cells read 2.82 to 3.12, with the table's column "1 °C or less" taken at 0.5 °C.
    """
    return _exponential(1.0380, 1.0741, ct_mg_min_l, temperature_c, 25.0)


def virus_ozone_log(ct_mg_min_l: Values, temperature_c: Values) -> Values:
    """Virus logs by ozone: 2.1744 x 1.0726^T x CT (LT2-TOOLBOX, from memory); 0.5 to 25 °C.

    4-log cells read 3.70 to 4.42, with the table's column "1 °C or less" taken at 0.5 °C.
    """
    return _exponential(2.1744, 1.0726, ct_mg_min_l, temperature_c, 25.0)


def cryptosporidium_chlorine_dioxide_log(ct_mg_min_l: Values, temperature_c: Values) -> Values:
    """Cryptosporidium logs by ClO2: 0.001506 x 1.09116^T x CT (40 CFR 141.720(b)(1) note, from memory); 0.5 to 30 °C.

    All 77 table cells within 1.1 % or one unit. The law lets a system use it between tabulated values (from
    memory).
    """
    return _exponential(0.001506, 1.09116, ct_mg_min_l, temperature_c, 30.0)


def cryptosporidium_ozone_log(ct_mg_min_l: Values, temperature_c: Values) -> Values:
    """Cryptosporidium logs by ozone: 0.0397 x 1.09757^T x CT (40 CFR 141.720(b)(2) note, from memory); 0.5 to 30 °C.

    All 77 table cells within one unit in the last place.
    """
    return _exponential(0.0397, 1.09757, ct_mg_min_l, temperature_c, 30.0)


def _exponential(slope: float, base: float, ct_mg_min_l: Values, temperature_c: Values, hottest: float) -> Values:
    errors.require("CT", ct_mg_min_l, "mg min/L", 0.0, 1e6, _TOOLBOX)
    errors.require("temperature", temperature_c, "°C", 0.5, hottest, _TOOLBOX)
    return slope * base**temperature_c * ct_mg_min_l


def _chlorine_ranges(logs: Values, temperature_c: Values, ph: Values, residual_mg_l: Values) -> None:
    errors.require("log inactivation", logs, "log", 0.0, 3.0, "Giardia regression")
    errors.require("temperature", temperature_c, "°C", 0.5, 25.0, "Giardia regression")
    errors.require("pH", ph, "", 6.0, 9.0, "Giardia regression")
    errors.require("residual", residual_mg_l, "mg/L", 0.4, 3.0, "Giardia regression")


def _like(result: np.ndarray) -> Values:
    return float(result) if np.ndim(result) == 0 else result
