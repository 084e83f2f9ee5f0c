"""The tables in data/ as columns, and the waters in them."""

import csv
from pathlib import Path

import numpy as np

from chemistry import carbonate

DATA = Path(__file__).parent / "data"
IONS = (
    "calcium_mmol_l", "magnesium_mmol_l", "sodium_mmol_l", "potassium_mmol_l", "chloride_mmol_l", "sulfate_mmol_l",
    "nitrate_mmol_l",
)  # fmt: skip


def columns(name):
    """Every column of data/<name>.csv: an array where all its cells are numbers, else a list of text."""
    with (DATA / f"{name}.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    found = {}
    for key in rows[0]:
        cells = [row[key] for row in rows]
        try:
            found[key] = np.array([float(cell) for cell in cells])
        except ValueError:
            found[key] = cells
    return found


def waters(table, pick=slice(None)):
    """carbonate.Water of the rows picked (an index gives one water, a slice or a list many)."""
    given = {key: table[key][pick] for key in IONS if key in table}
    for key in ("ph", "alkalinity_meq_l", "temperature_c"):
        given[key] = table[key][pick]
    return carbonate.water_from_mmol(**given)
