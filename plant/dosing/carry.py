"""Where a reckoning begins: at contents that are kept, so that its cost does not grow with the years behind it.

Contents of all vessels are kept at the first of each month and at the edges of what was reckoned. They hold for a
question about past knowledge too, unless something entered since touches a time before them.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable

from plant import clock
from plant.dosing import states
from plant.dosing.contents import Contents
from plant.dosing.reckoning import Reckoning, reckoning
from plant.ledger.models import Book
from plant.works.stated import Stated

DEMAND_DAYS = 7
FURTHEST = 45
"""Days a walk may have to start before what is asked, before it is worth keeping a nearer start."""


def reckon(
    book: Book,
    stated: Stated,
    days: list[dt.date],
    *,
    known: int | None = None,
    bypass: bool = False,
    water: bool = True,
) -> Reckoning:
    """A reckoning of consecutive days that reaches as far back as they ask: seven days of demand, and kept contents.

    ``known`` None means as the book stands. ``bypass`` begins with the book, whatever is kept; without
    ``water`` the sample points are left out, and no need can be computed.
    """
    back = DEMAND_DAYS if _wants_demand(stated, days[-1]) else 0
    first = days[0] - dt.timedelta(days=back)
    carried = None
    if not bypass:
        start = _start(book, stated, first, known)
        if start is not None:
            first, carried = start
    return reckoning(book, stated, clock.days(first, days[-1]), known=known, carried=carried, water=water)


def _wants_demand(stated: Stated, day: dt.date) -> bool:
    at = dt.datetime.combine(day, dt.time(23, 59), dt.UTC)
    return any(point.need.get("demand_from") == "last_7_days" for point in stated.dosing_points(at))


def _start(book: Book, stated: Stated, first: dt.date, known: int | None) -> tuple[dt.date, dict[str, Contents]] | None:
    """The nearest day at or before ``first`` whose contents are kept and hold for what is known."""
    through = states.refresh(book)
    latest = first
    if known is not None and known < through:
        touched = states.touched_day(book, known)
        if touched is not None:
            latest = min(first, touched - dt.timedelta(days=1))
    found = states.carried(book, latest)
    if found is not None and (first - found[0]).days <= FURTHEST:
        return found
    if latest == first and known in (None, through):
        _keep_starts(book, stated, first, through)
        nearer = states.carried(book, latest)
        return nearer or found
    return found


def _keep_starts(book: Book, stated: Stated, first: dt.date, through: int) -> None:
    """Walks the whole past once and keeps the contents at the first of each month."""
    out = reckoning(book, stated, [first], known=through, carried=None, water=False)
    times = [mark.at for walked in out.walks.values() for mark in walked.marks]
    if not times:
        return
    begun = out.calendar.day_of(min(times))
    months = [day for day in clock.days(begun, first) if day.day == 1]
    states.keep(book, through=through, doses={}, contents=contents_at_starts(out, months))


def contents_at_starts(out: Reckoning, days: Iterable[dt.date]) -> dict[dt.date, dict[str, Contents]]:
    """Contents at the start of each day at which every vessel that has readings is known."""
    keep = {}
    for day in days:
        at = out.calendar.start_of(day)
        found = {code: walked.walk.contents_at(at, walked.decay) for code, walked in out.walks.items()}
        held = {code: contents for code, contents in found.items() if contents is not None}
        reached = all(not walked.marks or walked.walk.amount_at(at) is not None for walked in out.walks.values())
        if reached and len(held) == len(out.walks):
            keep[day] = held
    return keep
