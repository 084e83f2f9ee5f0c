"""The hours of a simulation: a grid of whole hours from the first operating day's start, and what local time they are."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from zoneinfo import ZoneInfo

import numpy as np

from plant import clock
from plant.demo.plan import Plan

HOUR = dt.timedelta(hours=1)


@dataclass(frozen=True)
class Grid:
    """``start`` is hour 0, UTC; operating day n runs over hours day_edges[n] to day_edges[n + 1]."""

    calendar: clock.Calendar
    first: dt.date
    last: dt.date
    start: dt.datetime
    hours: int
    day_edges: np.ndarray
    local_hour: np.ndarray
    weekday: np.ndarray
    season: np.ndarray

    @property
    def days(self) -> int:
        return len(self.day_edges) - 1

    def hour_of(self, moment: dt.datetime) -> float:
        """Hours since the start, with fractions."""
        return (moment - self.start) / HOUR

    def hours_of(self, moments: list[dt.datetime]) -> np.ndarray:
        return np.array([self.hour_of(moment) for moment in moments])

    def moment(self, hour: float) -> dt.datetime:
        """The instant of an hour of the grid, to the second."""
        return self.start + dt.timedelta(seconds=round(hour * 3600))

    def date(self, day: int) -> dt.date:
        return self.first + dt.timedelta(days=day)

    def hour_of_day(self, day: float) -> float:
        """The hour a number of days after the first operating day's start, counted in real days of 23 to 25 hours."""
        whole = min(max(int(day), 0), self.days - 1)
        edges = self.day_edges
        return float(edges[whole] + (day - whole) * (edges[whole + 1] - edges[whole]))

    def daily(self, hourly: np.ndarray) -> np.ndarray:
        """Sums by operating day."""
        return np.add.reduceat(hourly[: self.day_edges[-1]], self.day_edges[:-1])


def grid(plan: Plan, first: dt.date, last: dt.date) -> Grid:
    """The hours from the start of the first operating day to two days past the end of the last."""
    calendar = clock.Calendar(ZoneInfo(plan.timezone), plan.day_starts)
    start = calendar.start_of(first)
    edges = np.array([round((calendar.start_of(day) - start) / HOUR) for day in clock.days(first, last + dt.timedelta(days=1))])
    hours = int(edges[-1]) + 48
    local = [calendar.local(start + n * HOUR) for n in range(hours)]
    year_day = np.array([item.timetuple().tm_yday + item.hour / 24 for item in local])
    return Grid(
        calendar=calendar,
        first=first,
        last=last,
        start=start,
        hours=hours,
        day_edges=edges,
        local_hour=np.array([item.hour for item in local]),
        weekday=np.array([item.weekday() for item in local]),
        # Mid July is the height of summer in the hydraulic year of the invented works.
        season=np.cos(2 * np.pi * (year_day - 197) / 365.25),
    )
