"""How well deviations were found, against the truth of a simulated works: recall, days, false alarms, causes.

An incident is found when something is raised about one of its subjects while it lasts, or within three days after its end. A
false alarm is whatever is raised of a dose, a vessel or a meter where nothing had been wrong with it for five days. Missed
rounds, empty lines and late entries are no incidents: what is raised of a dose because of them is false.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from statistics import median

from plant.demo.plan import Incident
from plant.demo.simulate import Simulated

OF_DOSES = frozenset({"drift", "dose_vs_design", "dose_vs_need", "stock_loss", "stuck"})
AFTER_DAYS = 3
CALM_DAYS = 5
LOT_DAYS = 25
WHATS = ("feeder_ramp", "feeder_step", "leak", "meter_error", "unbooked_delivery", "stuck", "weak_lot", "demand_change")


@dataclass(frozen=True)
class Alarm:
    """One deviation: the operating day it was raised for, what about, and its likely causes, likeliest first."""

    day: dt.date
    kind: str
    subject: str
    causes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Outcome:
    """One incident: how many days until something was raised (None: never), and the causes that stood beside it."""

    incident: Incident
    days: int | None
    causes: tuple[str, ...] = ()


@dataclass
class Score:
    """Of one works or of several together."""

    outcomes: list[Outcome] = field(default_factory=list)
    false: list[Alarm] = field(default_factory=list)
    point_days: int = 0

    def __add__(self, other: Score) -> Score:
        return Score(self.outcomes + other.outcomes, self.false + other.false, self.point_days + other.point_days)

    def of(self, *whats: str) -> list[Outcome]:
        return [item for item in self.outcomes if not whats or item.incident.what in whats]

    def recall(self, *whats: str) -> float:
        """Share found; 1 where there was nothing to find."""
        chosen = self.of(*whats)
        return sum(item.days is not None for item in chosen) / len(chosen) if chosen else 1.0

    def median_days(self, *whats: str) -> float | None:
        found = [item.days for item in self.of(*whats) if item.days is not None]
        return median(found) if found else None

    @property
    def false_alarms(self) -> float:
        """Per dosing point and 90 days."""
        return 90 * len(self.false) / self.point_days

    def cause_in_first(self, count: int) -> float:
        """The share of incidents found whose true cause stands among the first so many."""
        found = [item for item in self.outcomes if item.days is not None and item.causes]
        return sum(item.incident.cause in item.causes[:count] for item in found) / len(found) if found else 0.0


def score(history: Simulated, alarms: Iterable[Alarm]) -> Score:
    """Scores one works."""
    of_doses = sorted((item for item in alarms if item.kind in OF_DOSES), key=lambda item: (item.day, not item.causes))
    told = [(item, *_span(history, item), _subjects(history, item)) for item in history.incidents if item.what in WHATS]
    out = Score(point_days=len(history.plan.feeds) * history.grid.days)
    for incident, start, end, subjects in told:
        if start is None:
            continue
        until = end + dt.timedelta(days=AFTER_DAYS)
        found = next((item for item in of_doses if item.subject in subjects and start <= item.day <= until), None)
        days = (found.day - start).days if found else None
        out.outcomes.append(Outcome(incident, days, found.causes if found else ()))
    for alarm in of_doses:
        calm = dt.timedelta(days=CALM_DAYS)
        if not any(
            start and alarm.subject in subjects and start <= alarm.day <= end + calm for _, start, end, subjects in told
        ):
            out.false.append(alarm)
    return out


def _span(history: Simulated, incident: Incident) -> tuple[dt.date | None, dt.date]:
    """First and last operating day; of a load, from when it came (None: it never did)."""
    days = tuple(history.grid.calendar.day_of(moment) for moment in history.span(incident))
    if incident.what not in ("weak_lot", "unbooked_delivery"):
        return days
    load = next((item for item in history.book.loads if item.load.incident is incident), None)
    if load is None:
        return None, days[1]
    came = history.grid.calendar.day_of(load.at)
    return came, came + dt.timedelta(days=LOT_DAYS if incident.what == "weak_lot" else 2)


def _subjects(history: Simulated, incident: Incident) -> set[str]:
    """The dosing points and vessels an incident shows in, and the meter itself."""
    site = incident.subject.partition(":")[0]
    feeds = history.plan.feeds
    if incident.what == "demand_change":
        chosen = [feed for feed in feeds if feed.wants == "chlorine"]
    else:
        chosen = [feed for feed in feeds if site in (feed.code, feed.tank["code"], feed.point["meter"])]
    return {site} | {name for feed in chosen for name in (feed.code, str(feed.tank["code"]))}


def rows(results: Sequence[tuple[str, Score]]) -> list[str]:
    """The table, one line a method."""
    head = ("", "found", "recall", "false", "ramps", "days", "steps", "days", "weak lots", "demand", "first", "first two")
    out = [" | ".join(f"{word:>9}" for word in head)]
    for name, item in results:
        found = sum(outcome.days is not None for outcome in item.outcomes)
        causes = [f"{item.cause_in_first(n):.2f}" if any(o.causes for o in item.outcomes) else "-" for n in (1, 2)]
        cells = [
            name, f"{found}/{len(item.outcomes)}", f"{item.recall():.2f}", f"{item.false_alarms:.2f}",
            f"{item.recall('feeder_ramp'):.2f}", f"{item.median_days('feeder_ramp')}", f"{item.recall('feeder_step'):.2f}",
            f"{item.median_days('feeder_step')}", f"{item.recall('weak_lot'):.2f}", f"{item.recall('demand_change'):.2f}",
            *causes,
        ]  # fmt: skip
        out.append(" | ".join(f"{cell:>9}" for cell in cells))
    return out
