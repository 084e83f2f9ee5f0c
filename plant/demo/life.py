"""What the demo's people did about what was found: days judged as they closed, deviations taken on, told, closed."""

from __future__ import annotations

import datetime as dt

from plant import clock
from plant.demo.make import Demo
from plant.demo.simulate import Simulated
from plant.deviations import actions as deviations
from plant.deviations import queries
from plant.deviations.queries import DeviationView

_QUIET_DAYS = 2
_LEFT_OPEN_DAYS = 5
_AT_ONCE_DAYS = 7
_HEAVY = ("regulatory", "action")
_WHAT_WAS_DONE = {
    "feeder_drift": "pump opened, membrane and valves renewed, draw-down checked",
    "weak_product": "lot tested, supplier written to, setting raised until the tank is used up",
    "leak": "leak found and tightened; the tank watched for two shifts",
    "raw_water_change": "setting follows the harder water; laboratory informed",
    "wrong_reading": "looked up on paper; the reading is set aside",
    "stuck_sensor": "gauge freed and checked with a dip rod",
    "meter_error": "meter checked against the clearwell",
    "unbooked_delivery": "delivery note found and booked",
    "missing_readings": "talked over at hand-over; the round goes on the other shift's list",
    "aged_stock": "older stock used first, next load ordered smaller",
    "stale_design": "design dose restated",
}
_TALKED_OVER = "looked at together at hand-over; watched for two days"


def last_full_month(history: Simulated) -> dt.date:
    """The first day of the last month whose closing round was done by the end of a history."""
    calendar = history.grid.calendar
    first = calendar.day_of(history.until - dt.timedelta(minutes=50)).replace(day=1)
    return (first - dt.timedelta(days=1)).replace(day=1)


class Life:
    """Judges the last days of a history as they close, and lets the people act on what is found.

    Far back a week is judged at a time, which says the same and takes a third of the time; the last week, and days on which
    something short and grave happened, are judged the morning after.
    """

    def __init__(self, demo: Demo) -> None:
        self.demo = demo
        grid = demo.history.grid
        self.last = grid.last
        # From the last full month on; what lies before is history nobody need look at again.
        self.judged = max(last_full_month(demo.history), grid.first) - dt.timedelta(days=1)
        self.close_looks = {grid.date(int(item.start)) for item in demo.history.incidents if item.what == "feeder_stop"}

    def each_day(self, day: dt.date, now: dt.datetime) -> None:
        """Judges closed days when it is time, then does the morning's work on what is open."""
        waited = (day - self.judged).days
        if waited <= 0:
            return
        if waited >= _AT_ONCE_DAYS or day in self.close_looks or (self.last - day).days <= _AT_ONCE_DAYS:
            deviations.judge(book=self.demo.book, days=clock.days(self.judged + dt.timedelta(days=1), day), now=now)
            self.judged = day
            self._morning(day, now + dt.timedelta(minutes=12))

    def finish(self) -> None:
        """Judges the present day as far as it has gone."""
        day = self.demo.calendar.day_of(self.demo.history.until)
        deviations.judge(book=self.demo.book, days=[day - dt.timedelta(days=1), day], now=self.demo.history.until)

    def _morning(self, day: dt.date, now: dt.datetime) -> None:
        fresh = (self.demo.history.grid.last - day).days < _LEFT_OPEN_DAYS
        for number, view in enumerate(queries.open_ones(self.demo.book)):
            at = now + dt.timedelta(seconds=20 * number)
            if view.tellings_owed:
                self._tell(view, at)
            if view.state == "raised" and (not fresh or view.level in _HEAVY):
                by = "paula" if view.level in _HEAVY else "nora"
                deviations.acknowledge(book=self.demo.book, ref=view.ref, by=self.demo.cast[by], now=at)
            elif (day - view.last_day).days >= _QUIET_DAYS and view.state in ("acknowledged", "acting") and not fresh:
                self._finish_off(view, at)

    def _tell(self, view: DeviationView, now: dt.datetime) -> None:
        for owed in view.tellings_owed:
            # Told on the day itself where the night shift saw it; otherwise this morning.
            at = min(now, view.since + dt.timedelta(hours=5))
            deviations.tell(
                book=self.demo.book,
                ref=view.ref,
                who=owed.who,
                how="telephone",
                reference=f"call of {self.demo.calendar.local(at):%d.%m. %H:%M}",
                by=self.demo.cast["paula"],
                now=now,
                at=at,
            )

    def _finish_off(self, view: DeviationView, now: dt.datetime) -> None:
        cause = self._cause(view)
        paula = self.demo.cast["paula"]
        try:
            deviations.act(
                book=self.demo.book,
                ref=view.ref,
                cause=cause,
                action=_WHAT_WAS_DONE.get(cause, _TALKED_OVER),
                by=paula,
                now=now,
            )
            deviations.verify(book=self.demo.book, ref=view.ref, by=paula, now=now)
            deviations.close(book=self.demo.book, ref=view.ref, by=paula, now=now)
        except deviations.NotPossible:
            # Not back inside yet, or a correction to approve: it stays as it is until tomorrow's look.
            return

    def _cause(self, view: DeviationView) -> str:
        """What the people found out in the end, which here is the truth where there was an incident."""
        for incident in self.demo.history.incidents:
            start, end = self.demo.history.span(incident)
            about = incident.subject.partition(":")[0]
            if incident.cause and about == view.subject and start - dt.timedelta(days=2) <= view.since <= end:
                return incident.cause
        return view.likely_causes[0] if view.likely_causes else "unknown"
