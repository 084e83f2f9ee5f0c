"""What simpler rules would have raised on the same days: the measure for what the program does."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Callable, Iterable, Sequence

from plant.demo.plan import Plan
from plant.dosing.figures import DayDose
from tests.deviations.scoring import Alarm

KNOWN = dt.timedelta(days=1)
"""A day's dose is known with the round that follows its end."""
GAP = dt.timedelta(days=4)
"""Days apart by no more than the program's own episodes bridge are one alarm."""


def naive(rows: Iterable[DayDose], *, pct: float = 20.0) -> list[Alarm]:
    """Used more than ``pct`` per cent away from design on a day."""

    def on(days: Sequence[DayDose]) -> list[dt.date]:
        return [row.day for row in days if row.ratio is not None and abs(row.ratio - 1) > pct / 100]

    return _by_point(rows, on)


def cusum(rows: Iterable[DayDose], plan: Plan, *, shift: float = 0.15, height: float = 2.5) -> list[Alarm]:
    """A two-sided CUSUM (Page, Biometrika 41 (1954) 100-115; from memory) on the logarithm of used over design. It is told the
    true scatter of the feeder and the size to look for; ``height`` (in standard deviations) was tuned to about one false alarm a year. Begins anew after an alarm.
    """
    scatter = {feed.code: math.hypot(feed.scatter, feed.wander) for feed in plan.feeds}

    def on(days: Sequence[DayDose]) -> list[dt.date]:
        found, up, down = [], 0.0, 0.0
        for row in days:
            if row.ratio is None or not 0.05 < row.ratio < 3 or not row.used_mg_l.value:
                continue
            sd = math.hypot(scatter[row.dosing_point], (row.used_mg_l.sd or 0.0) / row.used_mg_l.value)
            value, half = math.log(row.ratio) / sd, min(shift / sd / 2, 1.0)
            up, down = max(up + value - half, 0.0), max(down - value - half, 0.0)
            if max(up, down) > height:
                found.append(row.day)
                up = down = 0.0
        return found

    return _by_point(rows, on)


def _by_point(rows: Iterable[DayDose], on: Callable[[Sequence[DayDose]], list[dt.date]]) -> list[Alarm]:
    by_point: dict[str, list[DayDose]] = {}
    for row in rows:
        by_point.setdefault(row.dosing_point, []).append(row)
    out: list[Alarm] = []
    for code, mine in by_point.items():
        last: dt.date | None = None
        for day in on(sorted(mine, key=lambda row: row.day)):
            if last is None or day - last > GAP:
                out.append(Alarm(day + KNOWN, "dose_vs_design", code))
            last = day
    return out
