"""The forecast walked through a past: each week, what was expected against what came, beside the mean of the last 30 days.

    WEIRBOOK_DATA=.weirbook/demo .venv-test/bin/python -m tests.benchmarks.forecast [CODE]

Prints per product the mean error of the next 14 and 28 days (of what was used), the same of the naive mean, and how often what
came lay inside the band, which is meant to hold nine times in ten. Nothing later than the week's end is known to either.
"""

from __future__ import annotations

import datetime as dt
import math
import os
import statistics
import sys
from collections.abc import Iterator

AHEAD = (14, 28)
FIRST_WEEKS = 9


def main() -> None:
    os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.development")
    import django

    django.setup()
    from plant import clock
    from plant.ledger import queries as books
    from plant.supply import queries
    from plant.works import queries as works

    book = books.book(sys.argv[1] if len(sys.argv) > 1 else "KFW")
    stated, now = works.stated(book), clock.now()
    last = stated.calendar(now).day_of(now) - dt.timedelta(days=1)
    past = queries.history_of(book, last, None, stated)
    print(f"{'product':<8} {'ahead':>5} {'weeks':>5} {'error':>7} {'naive':>7} {'band held':>9}")
    every: dict[int, list[tuple[float, float, bool]]] = {days: [] for days in AHEAD}
    for product in stated.products(now):
        use = past.get(product.code, {})
        design = queries.design_of(stated, product, now)
        for days in AHEAD:
            found = list(walked(use, last, days, design))
            every[days] += found
            if found:
                print(_line(product.code, days, found))
    for days, found in every.items():
        print(_line("all", days, found))


def walked(use, last: dt.date, days: int, design) -> Iterator[tuple[float, float, bool]]:
    """Per week: relative error of the forecast, of the naive mean, and whether the band held."""
    from plant.supply import forecast as ahead

    if not use:
        return
    made_on = min(use) + dt.timedelta(days=7 * FIRST_WEEKS)
    while made_on + dt.timedelta(days=days) <= last:
        known = {day: item for day, item in use.items() if day <= made_on}
        came = [use[day].active_kg for n in range(1, days + 1) if (day := made_on + dt.timedelta(days=n)) in use]
        made = ahead.forecast(known, made_on, horizon=days, design=design)
        plain = ahead.naive(known, made_on, days)
        if made is not None and plain is not None and len(came) == days and math.fsum(came) > 0:
            total = math.fsum(came)
            low, high = made.band(days)
            yield abs(made.total(days) - total) / total, abs(plain - total) / total, low <= total <= high
        made_on += dt.timedelta(days=7)


def _line(name: str, days: int, found: list[tuple[float, float, bool]]) -> str:
    error, naive = statistics.fmean(one[0] for one in found), statistics.fmean(one[1] for one in found)
    held = sum(one[2] for one in found) / len(found)
    return f"{name:<8} {days:>5} {len(found):>5} {error:>6.1%} {naive:>6.1%} {held:>9.0%}"


if __name__ == "__main__":
    main()
