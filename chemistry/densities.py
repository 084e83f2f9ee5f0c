"""Density of product solutions from strength and temperature, read from `tables/densities.csv`.

Each row names its source and how far it was seen. Between rows the specific volume is interpolated along
straight lines in weight % and °C (volumes of mixing are nearly additive, densities are not). Outside the
table's range the question is refused: no density is guessed. Densities of a delivery come from its
certificate; these are to check it and to plan.
"""

import csv
from functools import lru_cache
from pathlib import Path
from typing import Any

import numpy as np

from chemistry import constants, errors

Values = Any  # a float or a numpy array

_TABLE = Path(__file__).parent / "tables" / "densities.csv"
WATER_60F_KG_L = 0.99902  # density of water at 15.56 °C, the usual reference of a specific gravity; IAPWS, from memory
DRY_ALUM = "Al2(SO4)3.14H2O"
_ANHYDROUS_IN_DRY_ALUM = constants.molar_mass("Al2(SO4)3") / constants.molar_mass(DRY_ALUM)


def known_chemicals() -> tuple[str, ...]:
    """Formulas that have a table."""
    return tuple(_grids())


def valid_range(chemical: str) -> tuple[float, float, float, float]:
    """(lowest weight %, highest weight %, lowest °C, highest °C) of a chemical's table."""
    strengths, temperatures, _ = _grid(chemical)
    scale = _ANHYDROUS_IN_DRY_ALUM if chemical == DRY_ALUM else 1.0
    low, high = strengths[0] / scale, strengths[-1] / scale
    return float(low), float(high), float(temperatures[0]), float(temperatures[-1])


def density_kg_l(chemical: str, weight_pct: Values, temperature_c: Values) -> Values:
    """Density in kg/L of a solution of ``weight_pct`` (of the formula as written) at a temperature in °C.

    Floats or arrays that broadcast. Tables at one temperature only (Na2S2O3, Fe2(SO4)3, H2SiF6, lime
    slurry) answer for that temperature. Sulfuric acid above 97 % has no single strength for a density.
    Sources: in the table, row by row. Raises OutOfRange outside, ChemistryError for a chemical without a
    table.
    """
    strengths, temperatures, specific_volumes = _grid(chemical)
    low, high, coldest, hottest = valid_range(chemical)
    errors.require(f"strength of {chemical}", weight_pct, "weight %", low, high, "density table")
    errors.require(f"temperature of {chemical}", temperature_c, "°C", coldest, hottest, "density table")
    scale = _ANHYDROUS_IN_DRY_ALUM if chemical == DRY_ALUM else 1.0
    strength, temperature = np.broadcast_arrays(
        np.asarray(weight_pct, dtype=float) * scale, np.asarray(temperature_c, dtype=float)
    )
    row, up = _place(strengths, strength)
    column, right = _place(temperatures, temperature)
    last_row, last_column = len(strengths) - 1, len(temperatures) - 1
    next_row, next_column = np.minimum(row + 1, last_row), np.minimum(column + 1, last_column)
    at_row = specific_volumes[row, column] * (1 - right) + specific_volumes[row, next_column] * right
    at_next = specific_volumes[next_row, column] * (1 - right) + specific_volumes[next_row, next_column] * right
    result = 1.0 / (at_row * (1 - up) + at_next * up)
    return float(result) if np.ndim(weight_pct) == 0 and np.ndim(temperature_c) == 0 else result


def hypochlorite_density_kg_l(available_chlorine_g_l: Values, excess_naoh_pct: Values = 0.3) -> Values:
    """Density of sodium hypochlorite in kg/L, about 20 °C, from available chlorine (g/L, 0 to 160) and excess NaOH (wt %).

    SG = 1 + 0.001308 c + 0.015 NaOH %: a line through an industry page's 120 g/L (1.157, 1.160 and 1.168 at
    0, 0.2 and 0.73 % caustic; opened); it gives 1.081 at 61.7 g/L where label strengths imply 1.081
    (opened). Salt, age and caustic move it by 0.02: never derive a strength from it.
    """
    errors.require("available chlorine", available_chlorine_g_l, "g/L", 0.0, 160.0, "hypochlorite density")
    errors.require("excess NaOH", excess_naoh_pct, "weight %", 0.0, 2.0, "hypochlorite density")
    return 1.0 + 0.001308 * available_chlorine_g_l + 0.015 * excess_naoh_pct


def density_from_sg_kg_l(specific_gravity: Values, reference_kg_l: float = WATER_60F_KG_L) -> Values:
    """Density in kg/L from a specific gravity; the reference is water at 60 °F unless another density is given."""
    return specific_gravity * reference_kg_l


def _place(axis: np.ndarray, value: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Index of the grid line at or below each value and the share of the way to the next."""
    if len(axis) == 1:
        return np.zeros(value.shape, dtype=int), np.zeros(value.shape)
    index = np.clip(np.searchsorted(axis, value, side="right") - 1, 0, len(axis) - 2)
    return index, (value - axis[index]) / (axis[index + 1] - axis[index])


def _grid(chemical: str) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    grids = _grids()
    key = "Al2(SO4)3" if chemical == DRY_ALUM else chemical
    if key not in grids:
        raise errors.ChemistryError(f"no density table for {chemical!r}; known: {', '.join(grids)}, {DRY_ALUM}")
    return grids[key]


@lru_cache(maxsize=1)
def _grids() -> dict[str, tuple[np.ndarray, np.ndarray, np.ndarray]]:
    cells: dict[str, dict[tuple[float, float], float]] = {}
    with _TABLE.open(encoding="utf-8", newline="") as lines:
        for row in csv.DictReader(lines):
            place = (float(row["weight_pct"]), float(row["temperature_c"]))
            cells.setdefault(row["chemical"], {})[place] = float(row["density_kg_l"])
    grids = {}
    for chemical, by_place in cells.items():
        strengths = np.array(sorted({strength for strength, _ in by_place}))
        temperatures = np.array(sorted({temperature for _, temperature in by_place}))
        grids[chemical] = (
            strengths,
            temperatures,
            np.array([[1.0 / by_place[(s, t)] for t in temperatures] for s in strengths]),
        )
    return grids
