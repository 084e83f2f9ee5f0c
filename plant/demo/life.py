"""What the demo's people did about what was found: days judged as they closed, deviations acknowledged, told, closed."""

from __future__ import annotations

import datetime as dt

from plant.demo.make import Demo

REVIEWED_DAYS = 62


class Life:
    """Judges the last days of a history as they close."""

    def __init__(self, demo: Demo, *, reviewed_days: int) -> None:
        self.demo = demo
        self.first = demo.history.grid.last - dt.timedelta(days=reviewed_days)

    def each_day(self, day: dt.date, now: dt.datetime) -> None:
        """Judges one closed day."""

    def finish(self) -> None:
        """Judges what came in since the last day closed."""
