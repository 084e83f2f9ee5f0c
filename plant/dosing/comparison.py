"""The comparison of a span of days: from what is kept where it can be, reckoned where it must be."""

from __future__ import annotations

import datetime as dt

from plant import clock
from plant.dosing import states
from plant.dosing.contents import Contents
from plant.dosing.day import day_doses
from plant.dosing.figures import DayDose
from plant.dosing.reckoning import Reckoning, reckoning
from plant.ledger.models import Book
from plant.works import queries as works
from plant.works.stated import Stated

DEMAND_DAYS = 7
LONGEST_BLOCK = 62
"""Days reckoned in one go; a longer span is cut, so that memory does not grow with the question."""


def comparison(
    book: Book,
    first: dt.date,
    last: dt.date,
    *,
    known: int | None = None,
    stated: Stated | None = None,
) -> list[DayDose]:
    """One row per operating day and dosing point, days outer, first and last included.

    ``known`` asks as the book stood at that seq; then nothing kept is looked at. Raises NotStated for an empty works.
    """
    days = clock.days(first, last)
    if not days:
        return []
    if known is not None:
        stated = works.stated(book, known=known)
        out = reckon(book, stated, days, known=known, start=None)
        return day_doses(out, days)
    through = states.refresh(book)
    stated = stated or works.stated(book)
    kept = states.doses(book, days)
    for block in _blocks([day for day in days if day not in kept]):
        kept |= _reckon_and_keep(book, stated, block, through)
    return [row for day in days for row in kept[day]]


def reckon(
    book: Book,
    stated: Stated,
    days: list[dt.date],
    *,
    known: int | None,
    start: tuple[dt.date, dict[str, Contents]] | None,
) -> Reckoning:
    """A reckoning that reaches far enough back for what the days ask: seven days of demand, or the carried contents."""
    back = DEMAND_DAYS if _wants_demand(stated, days[-1]) else 0
    first = days[0] - dt.timedelta(days=back)
    carried = None
    if start is not None and start[0] <= first:
        first, carried = start
    return reckoning(book, stated, clock.days(first, days[-1]), known=known, carried=carried)


def _wants_demand(stated: Stated, day: dt.date) -> bool:
    at = dt.datetime.combine(day, dt.time(23, 59), dt.UTC)
    return any(point.need.get("demand_from") == "last_7_days" for point in stated.dosing_points(at))


def _reckon_and_keep(book: Book, stated: Stated, block: list[dt.date], through: int) -> dict[dt.date, list[DayDose]]:
    back = DEMAND_DAYS if _wants_demand(stated, block[-1]) else 0
    start = states.carried(book, block[0] - dt.timedelta(days=back))
    out = reckon(book, stated, block, known=through, start=start)
    rows: dict[dt.date, list[DayDose]] = {day: [] for day in block}
    for row in day_doses(out, block):
        rows[row.day].append(row)
    states.keep(book, through=through, doses=rows, contents=_contents_to_keep(out, block))
    return rows


def _contents_to_keep(out: Reckoning, block: list[dt.date]) -> dict[dt.date, dict[str, Contents]]:
    """Contents at the start of the first day of the block and of the day after it, where all vessels are known."""
    keep = {}
    for day in (block[0], *[item for item in block if item.day in (1, 11, 21)], block[-1]):
        at = out.calendar.start_of(day)
        found = {code: walked.walk.contents_at(at, walked.decay) for code, walked in out.walks.items()}
        held = {code: contents for code, contents in found.items() if contents is not None}
        reached = all(not walked.marks or walked.walk.amount_at(at) is not None for walked in out.walks.values())
        if reached and len(held) == len(out.walks):
            keep[day] = held
    return keep


def _blocks(days: list[dt.date]) -> list[list[dt.date]]:
    """Consecutive runs, none longer than LONGEST_BLOCK."""
    out: list[list[dt.date]] = []
    for day in days:
        if out and day - out[-1][-1] == dt.timedelta(days=1) and len(out[-1]) < LONGEST_BLOCK:
            out[-1].append(day)
        else:
            out.append([day])
    return out
