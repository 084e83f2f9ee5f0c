"""The comparison of a span of days: from what is kept where it can be, reckoned where it must be."""

from __future__ import annotations

import datetime as dt

from plant import clock
from plant.dosing import carry, states
from plant.dosing.day import day_doses
from plant.dosing.figures import DayDose
from plant.ledger.models import Book
from plant.works import queries as works
from plant.works.stated import Stated

LONGEST_BLOCK = 62
"""Days reckoned in one go; a longer span is cut, so that memory does not grow with the question."""


def comparison(
    book: Book,
    first: dt.date,
    last: dt.date,
    *,
    known: int | None = None,
    stated: Stated | None = None,
    bypass: bool = False,
) -> list[DayDose]:
    """One row per operating day and dosing point, days outer, first and last included.

    ``known`` asks as the book stood at that seq; then no kept day is looked at, and with ``bypass`` nothing kept at all.
    Raises NotStated for an empty works.
    """
    days = clock.days(first, last)
    if not days:
        return []
    if known is not None:
        stated = works.stated(book, known=known)
        return [
            row
            for block in _blocks(days)
            for row in day_doses(carry.reckon(book, stated, block, known=known, bypass=bypass), block)
        ]
    through = states.refresh(book)
    stated = stated or works.stated(book)
    kept = states.doses(book, days)
    for block in _blocks([day for day in days if day not in kept]):
        kept |= _reckon_and_keep(book, stated, block, through)
    return [row for day in days for row in kept[day]]


def _reckon_and_keep(book: Book, stated: Stated, block: list[dt.date], through: int) -> dict[dt.date, list[DayDose]]:
    out = carry.reckon(book, stated, block, known=through)
    rows: dict[dt.date, list[DayDose]] = {day: [] for day in block}
    for row in day_doses(out, block):
        rows[row.day].append(row)
    states.keep(book, through=through, doses=rows, contents=carry.contents_at_starts(out, [block[0], block[-1]]))
    return rows


def _blocks(days: list[dt.date]) -> list[list[dt.date]]:
    """Consecutive runs, none longer than LONGEST_BLOCK."""
    out: list[list[dt.date]] = []
    for day in days:
        if out and day - out[-1][-1] == dt.timedelta(days=1) and len(out[-1]) < LONGEST_BLOCK:
            out[-1].append(day)
        else:
            out.append([day])
    return out
