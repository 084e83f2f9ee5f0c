"""What each part of the chemistry was checked against, and how far off it is at worst: the rows of `tables/checks.csv`.

The tests measure the differences again and fail when a row promises more than it keeps: print the table as it stands.
"""

import csv
from functools import lru_cache
from pathlib import Path
from typing import NamedTuple

_TABLE = Path(__file__).parent / "tables" / "checks.csv"


class Check(NamedTuple):
    """One row: the functions, their source keys, what they were compared with, the worst difference, what is from memory."""

    key: str
    functions: str
    source: str
    checked_against: str
    worst_difference: float
    unit: str
    still_from_memory: str


@lru_cache(maxsize=1)
def checks() -> tuple[Check, ...]:
    """All rows, in the table's order. ``worst_difference`` is in ``unit`` ('' where it is a share of the value)."""
    with _TABLE.open(encoding="utf-8", newline="") as lines:
        return tuple(
            Check(
                row["key"],
                row["functions"],
                row["source"],
                row["checked_against"],
                float(row["worst_difference"]),
                row["unit"],
                row["still_from_memory"],
            )
            for row in csv.DictReader(lines)
        )
