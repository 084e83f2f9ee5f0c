"""How many times faster than PHREEQC through its Python package? Ratios of one run on one machine.

    python tests/benchmarks/speciation.py [waters]      (default: 1000)

Both speciate the same random waters, dose them and bring them to balance with calcite. Processor time counts, so that
other work on the machine does not; the best of several rounds on each side, taken in turns. Exit status 1 where a ratio
misses its aim.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

import numpy as np
import phreeqpython

from chemistry import carbonate

ROUNDS = 5
AIMS = {
    "speciation, many waters": 100.0,
    "pH after a dose, many waters": 20.0,
    "precipitation potential, many waters": 20.0,
    "speciation, one water": 1.0,
    "pH after a dose, one water": 1.0,
    "precipitation potential, one water": 1.0,
}
SYMBOLS = {"calcium": "Ca", "magnesium": "Mg", "sodium": "Na", "chloride": "Cl", "sulfate": "S(6)"}
NAOH_MMOL, NAOH_G_MOL = 0.2, 39.997


def random_table(count: int) -> dict[str, np.ndarray]:
    """Amounts of random waters, mmol/L."""
    rng = np.random.default_rng(7)
    return {
        "temperature_c": rng.uniform(1.0, 30.0, count),
        "ph": rng.uniform(6.3, 9.3, count),
        "alkalinity_meq_l": rng.uniform(0.4, 7.0, count),
        "calcium_mmol_l": rng.uniform(0.1, 4.0, count),
        "magnesium_mmol_l": rng.uniform(0.02, 1.5, count),
        "sodium_mmol_l": rng.uniform(0.02, 10.0, count),
        "chloride_mmol_l": rng.uniform(0.02, 10.0, count),
        "sulfate_mmol_l": rng.uniform(0.02, 3.0, count),
    }


class Theirs:
    """The three tasks by PHREEQC, water by water."""

    def __init__(self, table: dict[str, np.ndarray]) -> None:
        self.engine = phreeqpython.PhreeqPython(database="phreeqc.dat")
        self.compositions = []
        for index in range(len(table["ph"])):
            composition = {"units": "mmol/kgw", "temp": table["temperature_c"][index], "pH": table["ph"][index]}
            composition["Alkalinity"] = table["alkalinity_meq_l"][index]
            composition |= {symbol: table[f"{ion}_mmol_l"][index] for ion, symbol in SYMBOLS.items()}
            self.compositions.append(composition)

    def speciation(self) -> None:
        for composition in self.compositions:
            self.engine.add_solution(composition).forget()

    def dose(self) -> None:
        for composition in self.compositions:
            self.engine.add_solution(composition).change({"NaOH": NAOH_MMOL}).forget()

    def potential(self) -> None:
        for composition in self.compositions:
            self.engine.add_solution(composition).equalize(["Calcite"], [0], [10]).forget()


class Ours:
    """The three tasks by this package, all waters at once (or one, where the table holds numbers)."""

    def __init__(self, table: dict[str, np.ndarray]) -> None:
        one = len(table["ph"]) == 1
        self.table = {key: float(values[0]) if one else values for key, values in table.items()}

    def speciation(self) -> None:
        carbonate.speciate(carbonate.water_from_mmol(**self.table))

    def dose(self) -> None:
        carbonate.ph_after_dose(carbonate.water_from_mmol(**self.table), "NaOH", NAOH_MMOL * NAOH_G_MOL)

    def potential(self) -> None:
        carbonate.precipitation_potential(carbonate.water_from_mmol(**self.table))


def seconds(task: Callable[[], None], repeats: int) -> float:
    """Processor time of one call, averaged over the repeats."""
    start = time.process_time()
    for _ in range(repeats):
        task()
    return (time.process_time() - start) / repeats


def ratios(count: int = 1000) -> dict[str, tuple[float, float, float]]:
    """Task -> (PHREEQC's seconds, ours, their ratio)."""
    found = {}
    for label, size, our_repeats, their_repeats in (("many waters", count, 10, 1), ("one water", 1, 200, 100)):
        table = random_table(size)
        ours, theirs = Ours(table), Theirs(table)
        for name, mine, other in (
            ("speciation", ours.speciation, theirs.speciation),
            ("pH after a dose", ours.dose, theirs.dose),
            ("precipitation potential", ours.potential, theirs.potential),
        ):
            mine()
            pairs = [(seconds(other, their_repeats), seconds(mine, our_repeats)) for _ in range(ROUNDS)]
            best_other, best_mine = (min(column) for column in zip(*pairs, strict=True))
            found[f"{name}, {label}"] = (best_other, best_mine, best_other / best_mine)
    return found


def main() -> int:
    """Write the table; 1 where an aim is missed."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    missed = 0
    for task, (theirs, ours, ratio) in ratios(count).items():
        missed += ratio < AIMS[task]
        sys.stdout.write(
            f"{task:40s} PHREEQC {theirs * 1e3:9.3f} ms   here {ours * 1e3:8.3f} ms   {ratio:7.1f} times"
            f"   (aim {AIMS[task]:g})\n"
        )
    return 1 if missed else 0


if __name__ == "__main__":
    raise SystemExit(main())
