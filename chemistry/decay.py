"""How stored oxidants lose strength: hypochlorite by the second-order law, hydrogen peroxide by first order.

Temperatures come as a history: ``temperatures_c`` and ``days`` of equal length, each piece at its own
temperature; the integral over such steps is exact. Strengths may be floats or arrays.
"""

from collections.abc import Sequence
from typing import Any

import numpy as np

from chemistry import constants, errors

Values = Any  # a float or a numpy array

CL2_G_MOL = constants.molar_mass("Cl2")
CHLORATE_G_MOL = constants.molar_mass("ClO3")
SECONDS_PER_DAY = 86400.0
EXCESS_NAOH_MOL_L = 0.1  # usual of fresh product; common practice, no source
IONIC_STRENGTH_RANGE_M = (1.0, 6.0)
TEMPERATURE_RANGE_C = (15.0, 55.0)
STRENGTH_RANGE_MOL_L = (0.7, 3.0)
_WIDER_TEMPERATURE_RANGE_C = (0.0, 60.0)
# Chlorate forms 8.7 times as fast as oxygen (mol per mol); 3 OCl make one chlorate, 2 OCl one O2.
CHLORATE_SHARE = 3 * 8.7 / (3 * 8.7 + 2)
_ADAM_GORDON = "Adam & Gordon 1999"


def hypochlorite_k2_per_m_s(temperature_c: Values, ionic_strength_m: Values, *, extrapolate: bool = False) -> Values:
    """Second-order rate constant of hypochlorite loss in L/(mol s): -d[OCl]/dt = k2 [OCl]².

    log k2 = 0.149 µ + log(2.083e10 T exp(-1.018e5/RT) exp(-56.5/R)) (Adam & Gordon 1999, rate law of the
    abstract), for 15 to 55 °C, µ 1 to 6 mol/L, 0.7 to 3 mol/L OCl, 0.001 to 1 mol/L OH; below pH 9 another,
    faster law rules. It is the overall loss constant: no factor for chlorate must be added. ``extrapolate``
    lets the temperature go from 0 to 60 °C and holds µ at 1 below 1 (Lister 1956: the rate is nearly flat
    there); such a result is an estimate and :func:`hypochlorite_range_remarks` says so. Else OutOfRange.
    """
    ionic_strength = ionic_strength_m
    if extrapolate:
        errors.require("storage temperature", temperature_c, "°C", *_WIDER_TEMPERATURE_RANGE_C, _ADAM_GORDON)
        errors.require("ionic strength", ionic_strength_m, "mol/L", 0.0, 8.0, _ADAM_GORDON)
        ionic_strength = np.maximum(ionic_strength_m, IONIC_STRENGTH_RANGE_M[0])
    else:
        errors.require("storage temperature", temperature_c, "°C", *TEMPERATURE_RANGE_C, _ADAM_GORDON)
        errors.require("ionic strength", ionic_strength_m, "mol/L", *IONIC_STRENGTH_RANGE_M, _ADAM_GORDON)
    kelvin = constants.kelvin(temperature_c)
    gas = constants.GAS_CONSTANT_J_MOL_K
    return 10.0 ** (0.149 * ionic_strength) * 2.083e10 * kelvin * np.exp(-1.018e5 / (gas * kelvin) - 56.5 / gas)


def hypochlorite_ionic_strength_m(fresh_g_l: Values, excess_naoh_mol_l: Values = EXCESS_NAOH_MOL_L) -> Values:
    """Ionic strength in mol/L of hypochlorite made with ``fresh_g_l`` of available chlorine.

    NaOCl and NaCl come in equal moles, so µ = 2 [OCl] fresh + [NaOH]; ageing turns one ion into another and
    keeps it.
    """
    return 2.0 * fresh_g_l / CL2_G_MOL + excess_naoh_mol_l


def hypochlorite_strength_after(
    strength_g_l: Values,
    temperatures_c: Sequence[float],
    days: Sequence[float],
    *,
    fresh_g_l: Values = None,
    excess_naoh_mol_l: Values = EXCESS_NAOH_MOL_L,
    extrapolate: bool = False,
) -> Values:
    """Available chlorine in g/L after a temperature history: 1/C = 1/C0 + Σ k2(T) t.

    ``fresh_g_l`` is the strength as made (default: the strength given), which fixes the ionic strength.
    Strength 0 stays 0. Ranges and errors as in :func:`hypochlorite_k2_per_m_s`; strengths from 0 to 3 mol/L
    (213 g/L). Clean product assumed: nickel, copper, cobalt or a pH below 11 make it faster.
    """
    errors.require("available chlorine", strength_g_l, "g/L", 0.0, STRENGTH_RANGE_MOL_L[1] * CL2_G_MOL, _ADAM_GORDON)
    if len(temperatures_c) != len(days):
        raise errors.ChemistryError("a temperature history needs one temperature for each length of time")
    errors.require("time in store", list(days), "d", 0.0, 36500.0, "a temperature history")
    fresh = strength_g_l if fresh_g_l is None else fresh_g_l
    ionic_strength = hypochlorite_ionic_strength_m(fresh, excess_naoh_mol_l)
    exposure = 0.0
    for temperature_c, length_d in zip(temperatures_c, days, strict=True):
        k2 = hypochlorite_k2_per_m_s(temperature_c, ionic_strength, extrapolate=extrapolate)
        exposure = exposure + k2 * length_d * SECONDS_PER_DAY
    return strength_g_l / (1.0 + exposure * strength_g_l / CL2_G_MOL)


def chlorate_formed_g_l(strength_lost_g_l: Values) -> Values:
    """Chlorate in g/L (as ClO3) formed while so much available chlorine (g/L) was lost.

    0.929 of the loss goes to chlorate, one for three OCl (chlorate 8.7 times as fast as oxygen, Adam &
    Gordon 1999).
    """
    return strength_lost_g_l / CL2_G_MOL * CHLORATE_SHARE / 3.0 * CHLORATE_G_MOL


def hypochlorite_range_remarks(
    strength_g_l: float, temperatures_c: Sequence[float], *, excess_naoh_mol_l: float = EXCESS_NAOH_MOL_L
) -> tuple[str, ...]:
    """What makes a computed loss an estimate: storage outside 15 to 55 °C, or product outside 0.7 to 3 mol/L OCl."""
    remarks = []
    if any(not TEMPERATURE_RANGE_C[0] <= t <= TEMPERATURE_RANGE_C[1] for t in temperatures_c):
        remarks.append("storage outside 15 to 55 °C: loss extrapolated")
    if not STRENGTH_RANGE_MOL_L[0] <= strength_g_l / CL2_G_MOL <= STRENGTH_RANGE_MOL_L[1]:
        remarks.append("strength outside 50 to 213 g/L: loss extrapolated")
    elif hypochlorite_ionic_strength_m(strength_g_l, excess_naoh_mol_l) > IONIC_STRENGTH_RANGE_M[1]:
        remarks.append("ionic strength above 6 mol/L: loss extrapolated")
    return tuple(remarks)


def peroxide_strength_after(
    strength: Values,
    temperatures_c: Sequence[float],
    days: Sequence[float],
    *,
    loss_per_year: float = 0.01,
    factor_per_10_c: float = 2.0,
) -> Values:
    """Hydrogen peroxide strength (any basis) after a temperature history, first order.

    Default 1 % a year at 20 °C (makers: under 1 % a year if clean; opened), doubling every 10 °C (from
    memory); both are settings. Valid 0 to 60 °C. A faster loss or a warm tank means contamination: treat it
    as an alarm, vent, keep away.
    """
    errors.require("loss per year", loss_per_year, "", 0.0, 0.5, "storage setting")
    errors.require("factor per 10 °C", factor_per_10_c, "", 1.0, 5.0, "storage setting")
    if len(temperatures_c) != len(days):
        raise errors.ChemistryError("a temperature history needs one temperature for each length of time")
    errors.require("storage temperature", list(temperatures_c), "°C", 0.0, 60.0, "peroxide storage")
    errors.require("time in store", list(days), "d", 0.0, 36500.0, "a temperature history")
    rate_per_day = -np.log1p(-loss_per_year) / 365.25
    years = sum(
        length * factor_per_10_c ** ((temperature - 20.0) / 10.0)
        for temperature, length in zip(temperatures_c, days, strict=True)
    )
    return strength * float(np.exp(-rate_per_day * years))
