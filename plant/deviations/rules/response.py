"""Does the water still answer as it did? A sequential test on the reading that shows a dose's effect.

A weak lot and a change of demand leave the dose as it was; only the reading moves. The series is freed of what the dose
itself did, of its own memory (first-order autoregression: Box & Jenkins, Time Series Analysis, ch. 3, from memory) and
scaled by its own scatter; then it goes through the same test as the dose.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from statistics import median

from plant.deviations.rules import drift

LEAST_DAYS = 20
MOST_DAYS = 36
"""Water changes with the seasons: only the last weeks say what is usual, and only changes of some days are looked for."""
NEWEST_DAYS = 8
WINDOW = 6
LASTING_SD = 2.0
HEDGE = 1.3
"""A scatter learnt from four weeks may be too small; it is taken a little larger (common practice, no source)."""
MOST_MEMORY = 0.8


def freed(values: Sequence[float], doses: Sequence[float | None], design: float, share: float) -> list[float]:
    """Values less what the dose's own movement explains: ``share`` (0 to 1) of how far it was from design, mg/L each."""
    return [value - (share * (dose - design) if dose is not None else 0.0) for value, dose in zip(values, doses, strict=True)]


def memory(values: Sequence[float]) -> float:
    """How much of a day's departure lasts into the next, 0 to 0.8: the robust lag-one correlation.

    From the scatter of sums and of differences of neighbours, each by its median absolute deviation (Gnanadesikan &
    Kettenring, Biometrics 28 (1972) 81-124; from memory).
    """
    middle = median(values)
    pairs = [(first - middle, second - middle) for first, second in pairwise(values)]
    if len(pairs) < LEAST_DAYS // 2:
        return 0.0
    plus, minus = _spread([a + b for a, b in pairs]), _spread([a - b for a, b in pairs])
    if plus + minus <= 0:
        return 0.0
    return min(max((plus**2 - minus**2) / (plus**2 + minus**2), 0.0), MOST_MEMORY)


def watch(values: Sequence[float], *, mean_days_between_false_alarms: float) -> tuple[drift.Shift, float] | None:
    """The state of the test after the last value, and the size of the change in the values' own unit.

    None with fewer than twenty values, or for a series that does not vary.
    """
    if len(values) < LEAST_DAYS:
        return None
    values = list(values)[-MOST_DAYS:]
    usual = values[:-NEWEST_DAYS]
    middle, scale = median(usual), _spread(usual)
    if scale <= 0:
        return None
    lasts = memory(usual)
    scaled = [(value - middle) / scale for value in values]
    fresh = [second - lasts * first for first, second in pairwise(scaled)]
    spread = max(HEDGE * _spread(fresh[:-NEWEST_DAYS]), 1e-9)
    days = [drift.Day(value / spread * drift.PRIOR_SD) for value in fresh]
    shift = drift.watch(
        days,
        mean_days_between_false_alarms=mean_days_between_false_alarms,
        lasting_sd=LASTING_SD * drift.PRIOR_SD,
        window=WINDOW,
        least_size=0.0,
    )
    if shift is None:
        return None
    newest = values[shift.since + 1 :]  # the first value has no innovation of its own
    return shift, median(newest) - middle


def _spread(values: Sequence[float]) -> float:
    middle = median(values)
    return 1.4826 * median(abs(value - middle) for value in values)
