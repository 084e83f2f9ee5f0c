"""Chemicals that must never meet in one vessel, containment or line, read from `tables/incompatible.csv`.

Each row names its source and how far it was seen. A pair that stands in no row is not known: that is no word that it is
safe. The supplier's safety data sheets and the works' own rules come first.
"""

from __future__ import annotations

import csv
import re
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

_TABLE = Path(__file__).parent / "tables" / "incompatible.csv"
ANY = "*"
_ACIDS = ("H2SO4", "HCl", "HNO3", "H3PO4", "H2SiF6", "Al2(SO4)3", "AlCl3", "PACl", "FeCl3", "FeSO4", "Fe2(SO4)3")
_OXIDISERS = ("NaOCl", "Ca(OCl)2", "LiOCl", "Cl2", "KMnO4", "NaMnO4", "H2O2", "NaClO2", "O3", "ClO2")
GROUPS: dict[str, frozenset[str]] = {
    "acid": frozenset(_ACIDS),
    "oxidiser": frozenset(_OXIDISERS),
    "hypochlorite": frozenset({"NaOCl", "Ca(OCl)2", "LiOCl"}),
    "chlorite": frozenset({"NaClO2"}),
    "chlorine": frozenset({"Cl2"}),
    "permanganate": frozenset({"KMnO4", "NaMnO4"}),
    "peroxide": frozenset({"H2O2"}),
    "carbon": frozenset({"C"}),
    "sulfuric_acid": frozenset({"H2SO4"}),
    "ferric_chloride": frozenset({"FeCl3"}),
    "ferric_sulfate": frozenset({"Fe2(SO4)3"}),
    "alum": frozenset({"Al2(SO4)3"}),
    "lime": frozenset({"CaO", "Ca(OH)2"}),
    "alkali": frozenset({"NaOH", "KOH", "CaO", "Ca(OH)2", "Na2CO3"}),
    "ammonia": frozenset({"NH3", "NH4OH", "(NH4)2SO4"}),
    "sulfite": frozenset({"NaHSO3", "Na2SO3", "Na2S2O5", "Na2S2O3", "SO2"}),
    "fluorosilicic_acid": frozenset({"H2SiF6"}),
}
"""Which formulas belong to which group; common practice, no source. Salts that give acid in water stand with the acids."""

SAME, INCOMPATIBLE, NOT_KNOWN = "same", "incompatible", "not known"


@dataclass(frozen=True)
class Meeting:
    """What is known of two chemicals meeting: ``verdict`` same, incompatible or not known; ``result`` what then happens."""

    verdict: str
    result: str = ""
    source: str = ""
    evidence: str = ""


def meeting(one: str, other: str) -> Meeting:
    """What is known of two chemicals, by their formulas; water of crystallisation does not matter."""
    one, other = _bare(one), _bare(other)
    if one == other:
        return Meeting(SAME)
    found = [
        row for row in _rows()
        if (_in(one, row[0]) and _in(other, row[1])) or (_in(other, row[0]) and _in(one, row[1]))
    ]  # fmt: skip
    if not found:
        return Meeting(NOT_KNOWN)
    opened = next((row for row in found if row[4] == "opened"), found[0])
    return Meeting(INCOMPATIBLE, opened[2], opened[3], opened[4])


def _in(formula: str, group: str) -> bool:
    return group == ANY or formula in GROUPS[group]


def _bare(formula: str) -> str:
    return re.split(r"[.·]\d*H2O", formula.replace(" ", ""))[0]


@lru_cache(maxsize=1)
def _rows() -> tuple[tuple[str, str, str, str, str], ...]:
    with _TABLE.open(encoding="utf-8", newline="") as file:
        return tuple(
            (row["group_a"], row["group_b"], row["result"], row["source"], row["evidence"]) for row in csv.DictReader(file)
        )
