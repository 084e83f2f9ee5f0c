"""Numbers as the report prints them: in the units the works reads in, with just the decimals that count."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

from chemistry import units
from plant.reports.pdf.document import Cell

UNKNOWN = "–"
_US = {
    "ML": ("US_Mgal", "MG"),
    "kg": ("lb", "lb"),
    "°C": ("°F", "°F"),
    "m3/h": ("US_Mgal/d", "MGD"),
    "L": ("US_gal", "gal"),
    "m": ("ft", "ft"),
}
_PRINTED = {"uS/cm": "µS/cm", "m3": "m³", "m3/h": "m³/h", "CFU/100mL": "CFU/100 mL", "": ""}


@dataclass(frozen=True)
class Measures:
    """The system of a works: ``si`` or ``us``. Doses stay in mg/L in both."""

    system: str = "si"

    def label(self, unit: str) -> str:
        """How a canonical unit is printed here."""
        if self.system == "us" and unit in _US:
            return _US[unit][1]
        return _PRINTED.get(unit, unit)

    def shown(self, value: float | None, unit: str) -> float | None:
        """A value in the unit it is printed in."""
        if value is None or self.system != "us" or unit not in _US:
            return value
        return float(units.convert(value, unit, _US[unit][0]))


def decimals(values: Iterable[float | None], *, figures: int = 3, most: int = 4) -> int:
    """Decimals that give the largest value ``figures`` significant figures, from 0 to ``most``."""
    known = [abs(value) for value in values if value is not None and math.isfinite(value)]
    largest = max(known, default=0.0)
    if not largest:
        return min(2, most)
    return max(0, min(most, figures - 1 - math.floor(math.log10(largest))))


def text(value: float | None, places: int) -> str:
    """A number with so many decimals; a true minus sign, and never a negative zero."""
    if value is None:
        return UNKNOWN
    out = f"{value:.{places}f}"
    if not any(figure in out for figure in "123456789"):
        out = out.lstrip("-")
    return out.replace("-", "−")


def steady(value: float | None) -> float | None:
    """Twelve significant figures: the last bits of a float depend on the order in which days were reckoned."""
    return None if value is None else float(f"{value:.12g}")


def cell(value: float | None, places: int, *, key: str = "", mark: str = "", prefix: str = "") -> Cell:
    """A number as a cell; unknown is a dash, never zero."""
    if value is None:
        return Cell(UNKNOWN, None, key, mark)
    kept = steady(value)
    return Cell(prefix + text(kept, places), kept, key, mark)


def significant(value: float | None, figures: int = 3) -> str:
    """A single number in a sentence."""
    return text(value, decimals([value], figures=figures))
