"""Expected use ahead, with a band.

Pure. The dose of the last four weeks goes on, scaled by design changes that are already stated; the water follows the same
weeks of last year where they are known, half-heartedly (a year is one witness). How far such a forecast goes wrong is taken
from the works' own past: the same reckoning is made at the end of each past week and held against what came.
"""

from __future__ import annotations

import datetime as dt
import math
import statistics
from collections.abc import Callable, Mapping
from dataclasses import dataclass

RECENT_DAYS = 28
SEASON_WEIGHT = 0.5
"""How much of last year's change is believed (common practice, no source)."""
SEASON_BOUNDS = (0.6, 1.6)
USUAL_ERROR = 0.15
"""Relative standard error of a forecast where the past is too short to tell (common practice, no source)."""
FEWEST_PAST = 8
BAND = 1.895
"""Half-width of the band in standard errors: nine of ten by Student's t for eight past weeks, the fewest that are used (t
table, from memory). The weeks overlap, so many of them tell little more than eight."""


@dataclass(frozen=True)
class DayUse:
    """What one dosing point or product used on a day (kg, in the dose basis) and the water it went into (ML)."""

    active_kg: float
    volume_ml: float


History = Mapping[dt.date, DayUse]
Design = Callable[[dt.date], float | None]


@dataclass(frozen=True)
class Forecast:
    """Expected use for each day ahead, from the day after ``made_on``; ``error`` gives the relative sd of a sum over n days."""

    made_on: dt.date
    per_day_kg: tuple[float, ...]
    errors: tuple[float, ...]
    season_used: bool
    past_checked: int

    def total(self, days: int) -> float:
        """Expected use of the next n days, kg."""
        return math.fsum(self.per_day_kg[:days])

    def error(self, days: int) -> float:
        """Relative standard error of ``total(days)``."""
        return self.errors[min(max(days - 1, 0) // 7, len(self.errors) - 1)]

    def band(self, days: int) -> tuple[float, float]:
        """Low and high total of the next n days, kg: nine of ten."""
        total, error = self.total(days), self.error(days)
        return max(total * (1 - BAND * error), 0.0), total * (1 + BAND * error)

    def lasts_days(self, active_kg: float, *, high: bool = False) -> float | None:
        """Days until so much is used up, at the expected use or at the high edge of the band; None beyond the horizon."""
        used = 0.0
        for index, day_kg in enumerate(self.per_day_kg):
            factor = 1 + BAND * self.error(index + 1) if high else 1.0
            if used + day_kg * factor >= active_kg and day_kg > 0:
                return index + (active_kg - used) / (day_kg * factor)
            used += day_kg * factor
        return None


def no_design(day: dt.date) -> float | None:
    """For uses that follow no stated design."""
    return None


def forecast(
    history: History, made_on: dt.date, *, horizon: int = 120, design: Design = no_design, check_past: bool = True
) -> Forecast | None:
    """The forecast as it could be made at the end of ``made_on``; None while fewer than three days are known."""
    expected = _expected(history, made_on, horizon, design)
    if expected is None:
        return None
    per_day, season = expected
    errors, checked = _past_errors(history, made_on, design) if check_past else ((USUAL_ERROR,), 0)
    return Forecast(made_on, per_day, errors, season, checked)


def naive(history: History, made_on: dt.date, days: int) -> float | None:
    """The mean of the last 30 days, carried on: what a forecast has to beat."""
    known = [history[day].active_kg for day in _back(made_on, 30) if day in history]
    return statistics.fmean(known) * days if known else None


def _back(day: dt.date, count: int) -> list[dt.date]:
    return [day - dt.timedelta(days=n) for n in range(count)]


def _expected(history: History, made_on: dt.date, horizon: int, design: Design) -> tuple[tuple[float, ...], bool] | None:
    recent = [day for day in _back(made_on, RECENT_DAYS) if day in history and history[day].volume_ml > 0]
    if len(recent) < 3:
        return None
    scaled = [history[day].active_kg * _ratio(design, made_on, day) for day in recent]
    dose = math.fsum(scaled) / math.fsum(history[day].volume_ml for day in recent)
    # The last two weeks say more about the water of the next two than the last four do.
    water = statistics.fmean(history[day].volume_ml for day in recent[:14])
    season, out = False, []
    base = _last_year(history, made_on, -13, 0)
    for ahead in range(1, horizon + 1):
        day = made_on + dt.timedelta(days=ahead)
        factor = 1.0
        then = _last_year(history, day, -6, 7) if base else None
        if base and then:
            season = True
            factor = min(max(1 + SEASON_WEIGHT * (then / base - 1), SEASON_BOUNDS[0]), SEASON_BOUNDS[1])
        out.append(dose * water * factor * _ratio(design, day, made_on))
    return tuple(out), season


def _ratio(design: Design, wanted: dt.date, known: dt.date) -> float:
    """How a stated design scales a dose known on one day to another."""
    there, here = design(wanted), design(known)
    return there / here if there and here else 1.0


def _last_year(history: History, day: dt.date, first: int, last: int) -> float | None:
    """Mean water around the same date a year (52 weeks) before; None unless most of it is known."""
    centre = day - dt.timedelta(days=364)
    found = [centre + dt.timedelta(days=n) for n in range(first, last + 1)]
    known = [history[item].volume_ml for item in found if item in history]
    return statistics.fmean(known) if len(known) * 2 > len(found) else None


def _past_errors(history: History, made_on: dt.date, design: Design) -> tuple[tuple[float, ...], int]:
    """Relative standard error by weeks ahead (1 to 6), from forecasts made at the end of past weeks."""
    errors: list[list[float]] = [[] for _ in range(6)]
    for weeks in range(1, 53):
        then = made_on - dt.timedelta(days=7 * weeks)
        # Nothing after ``then`` is looked at: the recent days lie before it, and last year's of six weeks ahead do too.
        expected = _expected(history, then, 42, design)
        if expected is None:
            break
        came = said = 0.0
        for ahead in range(1, 7):
            days = [then + dt.timedelta(days=n) for n in range(7 * ahead - 6, 7 * ahead + 1)]
            if days[-1] > made_on or any(day not in history for day in days):
                break
            came += math.fsum(history[day].active_kg for day in days)
            said += math.fsum(expected[0][7 * ahead - 7 : 7 * ahead])
            if came > 0 and said > 0:
                errors[ahead - 1].append(came / said - 1)
    if len(errors[0]) < FEWEST_PAST:
        return (USUAL_ERROR,), len(errors[0])
    out: list[float] = []
    for found in errors:
        if len(found) >= FEWEST_PAST:
            own = math.sqrt(math.fsum(error**2 for error in found) / len(found))
            out.append(max(own, out[-1] if out else 0.0))
    return tuple(out), len(errors[0])
