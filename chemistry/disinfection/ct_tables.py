"""Required CT from the published tables (`tables/ct.csv`), every cell with its evidence mark.

Look-up rules. ``conservative``: the lower tabulated temperature, the higher pH, the higher residual.
``interpolate``: linear in temperature and pH (allowed by the note to tables 1.1 to 1.6; from memory), the
residual still rounded up (common practice, no source). Colder than the first column takes the first, warmer
than the last takes the last; pH under 6 takes the 6.0 column. Refused: pH above the table, residual above
3.0 mg/L, more logs than tabulated. CT is proportional to logs for Giardia by free chlorine (40 CFR 141.74
tables give 3 log); elsewhere straight lines join the tabulated logs and 0.
"""

import csv
from functools import lru_cache
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np

from chemistry import errors

Values = Any  # a float or a numpy array
METHODS = ("conservative", "interpolate")
_TABLE = Path(__file__).parent.parent / "tables" / "ct.csv"
_COLDEST_C, _HOTTEST_C = -2.0, 45.0
_TIE = 1e-9  # a value typed as 10.0 must meet the column 10


class Cell(NamedTuple):
    """One tabulated CT that stands behind an answer."""

    log_inactivation: float
    temperature_c: float
    ph: float | None
    residual_mg_l: float | None
    ct_mg_min_l: float
    table: str
    evidence: str
    note: str


class _Table(NamedTuple):
    logs: np.ndarray
    temperatures: np.ndarray
    phs: np.ndarray  # upper end of each pH column; [nan] where pH doesn't matter
    lowest_ph: float
    residuals: np.ndarray  # [nan] where the residual doesn't matter
    ct: np.ndarray  # [log, temperature, pH, residual]
    cells: dict[tuple[int, int, int, int], Cell]


def required_ct_mg_min_l(
    organism: str,
    disinfectant: str,
    log_inactivation: Values,
    temperature_c: Values,
    ph: Values = None,
    residual_mg_l: Values = None,
    *,
    method: str = "conservative",
) -> Values:
    """CT in mg min/L for so many logs; floats or arrays that broadcast.

    organism: Giardia, virus, Cryptosporidium. disinfectant: free chlorine, chlorine dioxide, ozone,
    chloramines. temperature_c -2 to 45; ph needed for free chlorine (up to 9, virus up to 10), checked 6 to
    9 where the table says so; residual_mg_l needed for Giardia by free chlorine, 0 to 3.0. See the module
    for the rules. Raises OutOfRange outside.
    """
    table = _table(organism, disinfectant)
    grid, scalar = _arguments(table, log_inactivation, temperature_c, ph, residual_mg_l, method)
    logs, *places = grid
    at = _ct_by_log(table, places)
    index = np.clip(np.searchsorted(table.logs, logs - _TIE), 0, len(table.logs) - 1)
    upper = table.logs[index]
    lower = np.where(index > 0, table.logs[np.maximum(index - 1, 0)], 0.0)
    ct_upper = np.take_along_axis(at, index[None, ...], axis=0)[0]
    below = np.take_along_axis(at, np.maximum(index - 1, 0)[None, ...], axis=0)[0]
    ct_lower = np.where(index > 0, below, 0.0)
    share = np.clip((logs - lower) / (upper - lower), 0.0, 1.0)
    result = ct_lower + (ct_upper - ct_lower) * share
    return float(result) if scalar else result


def log_from_ct(
    organism: str,
    disinfectant: str,
    ct_mg_min_l: Values,
    temperature_c: Values,
    ph: Values = None,
    residual_mg_l: Values = None,
    *,
    method: str = "conservative",
) -> Values:
    """Logs that a CT buys: the inverse of :func:`required_ct_mg_min_l`, capped at the end of the table.

    The cap (3 log Giardia and Cryptosporidium, 4 log virus) is common practice, no source.
    """
    errors.require("CT", ct_mg_min_l, "mg min/L", 0.0, 1e7, "CT")
    table = _table(organism, disinfectant)
    grid, scalar = _arguments(table, table.logs[-1], temperature_c, ph, residual_mg_l, method)
    places = np.broadcast_arrays(np.asarray(ct_mg_min_l, dtype=float), *grid[1:])
    ct, at = places[0], _ct_by_log(table, list(places[1:]))
    cts = np.concatenate([np.zeros((1, *at.shape[1:])), at])
    logs = np.concatenate([[0.0], table.logs])
    result = np.zeros(ct.shape)
    for low in range(len(table.logs)):
        span = cts[low + 1] - cts[low]
        # Where rounding made two logs cost the same CT, reaching it buys both.
        flat = np.where(ct >= cts[low + 1], 1.0, 0.0)
        share = np.where(span > 0, np.clip((ct - cts[low]) / np.where(span > 0, span, 1.0), 0.0, 1.0), flat)
        result = result + share * (logs[low + 1] - logs[low])
    return float(result) if scalar and np.ndim(ct_mg_min_l) == 0 else result


def cells_behind(
    organism: str,
    disinfectant: str,
    log_inactivation: float,
    temperature_c: float,
    ph: float | None = None,
    residual_mg_l: float | None = None,
    *,
    method: str = "conservative",
) -> tuple[Cell, ...]:
    """The tabulated cells an answer of :func:`required_ct_mg_min_l` rests on, with table and evidence, for print."""
    table = _table(organism, disinfectant)
    (logs, *places), _ = _arguments(table, log_inactivation, temperature_c, ph, residual_mg_l, method)
    temperature, acidity, residual = (float(place) for place in places)
    highest = int(np.clip(np.searchsorted(table.logs, float(logs) - _TIE), 0, len(table.logs) - 1))
    log_rows = {highest} if abs(table.logs[highest] - float(logs)) < _TIE else {max(highest - 1, 0), highest}
    return tuple(
        table.cells[log, int(t), int(p), int(residual)]
        for log in sorted(log_rows)
        for t in sorted({np.floor(temperature), np.ceil(temperature)})
        for p in sorted({np.floor(acidity), np.ceil(acidity)})
    )


def known_pairs() -> tuple[tuple[str, str], ...]:
    """(organism, disinfectant) pairs that have a table."""
    return tuple(_tables())


def _ct_by_log(table: _Table, places: list[np.ndarray]) -> np.ndarray:
    """CT at each tabulated log, bilinear in the fractional places along temperature and pH."""
    temperature, acidity, residual = places
    row = residual.astype(int)
    t0, p0 = np.floor(temperature).astype(int), np.floor(acidity).astype(int)
    t1, p1 = np.ceil(temperature).astype(int), np.ceil(acidity).astype(int)
    dt, dp = temperature - t0, acidity - p0
    cold = table.ct[:, t0, p0, row] * (1 - dp) + table.ct[:, t0, p1, row] * dp
    warm = table.ct[:, t1, p0, row] * (1 - dp) + table.ct[:, t1, p1, row] * dp
    result: np.ndarray = cold * (1 - dt) + warm * dt
    return result


def _arguments(
    table: _Table, logs: Values, temperature_c: Values, ph: Values, residual_mg_l: Values, method: str
) -> tuple[list[np.ndarray], bool]:
    """Logs, and the (fractional) places along each axis, broadcast together; and whether all inputs were scalars."""
    if method not in METHODS:
        raise errors.ChemistryError(f"method must be {' or '.join(METHODS)}, not {method!r}")
    errors.require("log inactivation", logs, "log", 1e-6, float(table.logs[-1]), "CT table")
    errors.require("temperature", temperature_c, "°C", _COLDEST_C, _HOTTEST_C, "CT table")
    inputs = [logs, temperature_c]
    temperature = _place(table.temperatures, temperature_c, method, down=True)
    acidity = residual = np.asarray(0.0)
    if not np.isnan(table.phs[0]):
        if ph is None and len(table.phs) > 1:
            raise errors.ChemistryError("this CT table needs the pH")
        if ph is not None:
            errors.require("pH", ph, "", table.lowest_ph, float(table.phs[-1]), "CT table: ask the regulator")
            acidity = _place(table.phs, ph, method if len(table.phs) > 2 else "conservative", down=False)
            inputs.append(ph)
    if not np.isnan(table.residuals[0]):
        if residual_mg_l is None:
            raise errors.ChemistryError("this CT table needs the residual")
        highest = float(table.residuals[-1])
        errors.require("residual", residual_mg_l, "mg/L", 0.0, highest, "CT table: ask the regulator")
        residual = _place(table.residuals, residual_mg_l, "conservative", down=False)
        inputs.append(residual_mg_l)
    grid = np.broadcast_arrays(np.asarray(logs, dtype=float), temperature, acidity, residual)
    return list(grid), all(np.ndim(value) == 0 for value in inputs)


def _place(axis: np.ndarray, value: Values, method: str, *, down: bool) -> np.ndarray:
    """Where values fall along an axis, as a fractional index; whole when rounded down or up to a tabulated one."""
    place: np.ndarray = np.interp(np.asarray(value, dtype=float), axis, np.arange(len(axis), dtype=float))
    if method != "interpolate":
        place = np.floor(place + _TIE) if down else np.ceil(place - _TIE)
    return np.asarray(place)


def _table(organism: str, disinfectant: str) -> _Table:
    tables = _tables()
    if (organism, disinfectant) not in tables:
        known = "; ".join(f"{who} by {what}" for who, what in tables)
        raise errors.ChemistryError(f"no CT table for {organism} by {disinfectant}; known: {known}")
    return tables[organism, disinfectant]


@lru_cache(maxsize=1)
def _tables() -> dict[tuple[str, str], _Table]:
    rows: dict[tuple[str, str], list[dict[str, str]]] = {}
    with _TABLE.open(encoding="utf-8", newline="") as lines:
        for row in csv.DictReader(lines):
            rows.setdefault((row["organism"], row["disinfectant"]), []).append(row)
    return {pair: _build(own) for pair, own in rows.items()}


def _build(rows: list[dict[str, str]]) -> _Table:
    logs = _axis(rows, "log_inactivation")
    temperatures, phs, residuals = _axis(rows, "temperature_c"), _axis(rows, "ph_to"), _axis(rows, "residual_mg_l")
    # "<=6.0" opens the first Giardia column downward; a column "6-9" begins at 6.
    lowest = min((float(row["ph_from"]) for row in rows if row["ph_from"]), default=0.0)
    grouped = any(row["ph_from"] != row["ph_to"] for row in rows)
    ct = np.full((len(logs), len(temperatures), len(phs), len(residuals)), np.nan)
    cells = {}
    for row in rows:
        place = (
            int(np.searchsorted(logs, float(row["log_inactivation"]))),
            int(np.searchsorted(temperatures, float(row["temperature_c"]))),
            int(np.searchsorted(phs, float(row["ph_to"]))) if row["ph_to"] else 0,
            int(np.searchsorted(residuals, float(row["residual_mg_l"]))) if row["residual_mg_l"] else 0,
        )
        ct[place] = float(row["ct_mg_min_l"])
        cells[place] = Cell(
            float(row["log_inactivation"]),
            float(row["temperature_c"]),
            float(row["ph_to"]) if row["ph_to"] else None,
            float(row["residual_mg_l"]) if row["residual_mg_l"] else None,
            float(row["ct_mg_min_l"]),
            row["table"],
            row["evidence"],
            row["note"],
        )
    if np.isnan(ct).any():
        raise errors.ChemistryError("the CT table has holes")
    return _Table(logs, temperatures, phs, lowest if grouped else 3.0, residuals, ct, cells)


def _axis(rows: list[dict[str, str]], column: str) -> np.ndarray:
    values = sorted({float(row[column]) for row in rows if row[column]})
    return np.array(values or [np.nan])
