"""All sheets, in the order in which the index shows them."""

from __future__ import annotations

from plant.sheets import oxidants, softening, water
from plant.sheets.sheet import Sheet

SHEETS: tuple[Sheet, ...] = (*water.SHEETS, *softening.SHEETS, *oxidants.SHEETS)


def groups() -> dict[str, list[Sheet]]:
    """Sheets by group."""
    out: dict[str, list[Sheet]] = {}
    for sheet in SHEETS:
        out.setdefault(sheet.group, []).append(sheet)
    return out


def named(slug: str) -> Sheet | None:
    return next((sheet for sheet in SHEETS if sheet.slug == slug), None)
