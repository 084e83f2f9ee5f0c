"""Slow or sudden change of a dose that should stay where it was set: a sequential test on used over expected.

Two steps. First the days are made independent: a gauge's error at the end of one day is given back the next, so the
running sum of (used / expected - 1) is filtered as a random walk (the feeder's scatter) seen through noise (the
gauge), and the filter's standardised innovations are kept (Kalman, J. Basic Eng. 82 (1960) 35-45; from memory).
Then a generalised likelihood ratio over the unknown time and size of the change: for every m up to the window, how much
better a change over the last m days explains the innovations than none; the root of twice the largest logarithm of
that ratio is held against a threshold chosen by the mean time between false alarms that the works accepts (Lorden, Ann.
Math. Statist. 42 (1971) 1897-1908; Willsky & Jones, IEEE Trans. Autom. Control 21 (1976) 108-112; both from memory).
Changes smaller than LEAST_SIZE are not looked for: a smaller one has to look like one of that size, which it does later,
and chance has fewer ways to look like one. Innovations are clipped at the threshold, so one bad value alone, whatever its
size, raises nothing.

The relative difference is used instead of the logarithm of the ratio: up to a third off they agree within a sixth,
and differences of mass add up, so that errors of gauges cancel to the last digit.
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Sequence
from dataclasses import dataclass, replace
from statistics import median

LEAST_SIZE = 0.11
"""The smallest change looked for, as a share of the dose. Half of it lasting is found too, only later. From simulated works."""

WINDOW = 30
"""The longest change looked for, in days with data."""

CLIP = 3.0
"""Single values count for at most so many standard deviations (common practice, no source)."""

PRIOR_SD = 0.035
"""Day-to-day scatter of feeding before the point's own is known: between the 1 % of metering pumps and gravimetric
feeders and the 3-5 % of volumetric ones (from memory)."""

COARSE = 0.7
"""Below this gain of the filter the gauge, not the feeder, makes the day-to-day scatter."""

HEDGE = 0.5

PRIOR_SPREAD = 0.6
"""How far the prior variance may be off, as a share of it (common practice, no source)."""

LEAST_DAYS = 5
NEWEST_DAYS = 10
"""The newest days are what is being tested; where the ratio stands is learnt from the days before them."""
NEAR_SDS = 2.5
ROUNDS = 4

Table = tuple[tuple[float, float], ...]
THRESHOLDS: Table = (
    (45.0, 2.37),
    (90.0, 2.67),
    (180.0, 2.95),
    (365.0, 3.00),
    (730.0, 3.22),
    (1500.0, 3.44),
    (3000.0, 3.63),
)
"""Mean days between false alarms -> threshold, two-sided, WINDOW days, clipped at CLIP, for changes of LEAST_SIZE and more in a
dose that scatters by 4.5 % a day: at 3.5 % false alarms are fewer by far. From a simulation of 1,500
series of independent normal values; the tests repeat it."""

OF_ANY_SIZE: Table = (
    (45.0, 2.59),
    (90.0, 2.87),
    (180.0, 3.04),
    (365.0, 3.28),
    (730.0, 3.50),
    (1500.0, 3.71),
    (3000.0, 3.89),
)
"""The same where changes of any size are looked for. From a simulation of 20,000 series; the tests repeat it."""


@dataclass(frozen=True)
class Day:
    """One day: used over expected less one, the standard deviation that its two gauge readings give it, and whether
    the day before is known (otherwise its errors are not given back). ``reset``: something was stated anew.
    """

    off: float
    gauge_sd: float = 0.0
    follows: bool = True
    reset: bool = False


@dataclass(frozen=True)
class Shift:
    """The state after the last day: whether a change is on, since which index, how large, how sure."""

    on: bool
    since: int
    size: float
    statistic: float
    threshold: float
    centre: float
    scatter: float

    @property
    def pct(self) -> float:
        """The change in per cent of the expected dose."""
        return 100 * self.size


def threshold(mean_days_between_false_alarms: float, table: Table = THRESHOLDS) -> float:
    """The threshold for a mean time between false alarms, by interpolation in its logarithm; the ends hold outside
    45 to 3,000 days.
    """
    days = [row[0] for row in table]
    if mean_days_between_false_alarms <= days[0]:
        return table[0][1]
    if mean_days_between_false_alarms >= days[-1]:
        return table[-1][1]
    index = bisect_left(days, mean_days_between_false_alarms)
    (low, at_low), (high, at_high) = table[index - 1], table[index]
    part = math.log(mean_days_between_false_alarms / low) / math.log(high / low)
    return at_low + part * (at_high - at_low)


def threshold_for(mean_days_between_false_alarms: float, least_sds: float) -> float:
    """The threshold where the smallest change looked for is so many standard deviations of a day.

    The coarser the days, the less the size helps to tell a change from chance: between the two tables by the square of
    ``least_sds``, which the simulations at 1.1, 1.6 and 2.2 follow within 0.02.
    """
    sized = threshold(mean_days_between_false_alarms, THRESHOLDS)
    plain = threshold(mean_days_between_false_alarms, OF_ANY_SIZE)
    return plain + (sized - plain) * min(least_sds / (LEAST_SIZE / 0.045), 1.0) ** 2


def scatter(days: Sequence[Day], prior: float = PRIOR_SD) -> float:
    """Day-to-day scatter of feeding beyond what the gauges explain.

    From the median absolute deviation less the gauges' share, joined with the prior by the inverse of their
    variances: where gauges drown the feeder, little is known of it and the prior holds. Half a standard error is
    added, since a scatter taken too small costs more than one taken too large. The standard error of a
    variance from n median absolute deviations is 1.65 of it over the root of n (Hampel's efficiency of 37 %, from
    memory). Never below 1 %, so that quiet points don't cry out.
    """
    if len(days) < LEAST_DAYS:
        return prior
    total = (1.4826 * median(abs(off) for off in _about_their_own(days))) ** 2
    gauge = median(day.gauge_sd for day in days) ** 2
    own = max(total - gauge, 0.0)
    own_se = 1.65 * max(total, gauge) / math.sqrt(len(days))
    prior_se = PRIOR_SPREAD * prior**2
    weight = prior_se**2 / (prior_se**2 + own_se**2)
    doubt = prior_se * own_se / math.hypot(prior_se, own_se)
    return max(math.sqrt(weight * own + (1 - weight) * prior**2 + HEDGE * doubt), 0.01)


def _about_their_own(days: Sequence[Day]) -> list[float]:
    """Each day less the median of the days between the same two resets; short pieces are left as they are."""
    pieces: list[list[float]] = [[]]
    for day in days:
        if day.reset and pieces[-1]:
            pieces.append([])
        pieces[-1].append(day.off)
    out = []
    for piece in pieces:
        own = median(piece) if len(piece) >= LEAST_DAYS else 0.0
        out += [off - own for off in piece]
    return out


def centre(days: Sequence[Day], lasting_sd: float, spread: float) -> tuple[float, float]:
    """Where the ratio stands when nothing is wrong, and the standard deviation of that: between 0 (as designed)
    and the mean of the days before the newest, those that lie
    near it.

    ``lasting_sd`` is what strength, meter and calibration leave as a standing difference; a larger one than
    twice that is not taken as normal.
    """
    first = list(days)[: max(len(days) - NEWEST_DAYS, 0)]
    if len(first) < LEAST_DAYS or lasting_sd <= 0:
        return 0.0, max(lasting_sd, 0.0)
    found, sd = 0.0, lasting_sd
    for _ in range(ROUNDS):
        # Days far from where the centre is thought to be belong to some change, and say nothing about it.
        near = [day for day in first if abs(day.off - found) <= NEAR_SDS * math.hypot(spread, day.gauge_sd)]
        if len(near) < LEAST_DAYS:
            break
        # The gauges' errors cancel within the span, all but the first and the last.
        noise = spread**2 / len(near) + (median(day.gauge_sd for day in near) / len(near)) ** 2
        weight = lasting_sd**2 / (lasting_sd**2 + noise)
        mean = sum(day.off for day in near) / len(near)
        found, sd = min(max(weight * mean, -2 * lasting_sd), 2 * lasting_sd), math.sqrt(weight * noise)
    return found, sd


def watch(
    days: Sequence[Day],
    *,
    mean_days_between_false_alarms: float = 365.0,
    lasting_sd: float = 0.03,
    window: int = WINDOW,
    least_size: float = LEAST_SIZE,
) -> Shift | None:
    """Runs the test on the last day, over all spans that end with it and begin after the last reset. None with fewer
    than five days. ``least_size`` 0 looks for changes of any size. What is usual scatter is learnt from all days, where
    the ratio stands from those since the reset.

    A change is on while the statistic is above the threshold and the newest days lie nearer to the change than
    to the centre: one that is over is not carried on by what it was.
    """
    if len(days) < LEAST_DAYS:
        return None
    starts = [index for index, day in enumerate(days) if day.reset]
    first = starts[-1] if starts else 0
    mine = list(days[first:])
    spread = scatter(days)
    middle, middle_sd = centre(mine, lasting_sd, spread)
    mine = evened(mine, middle, spread)
    values, per_day = innovations(mine, middle, spread)
    statistic, length = _largest(values, per_day, middle_sd, window, least_size)
    most = [CLIP * math.hypot(spread, day.gauge_sd) for day in mine]
    raw = [min(max(day.off - middle, -cap), cap) for day, cap in zip(mine, most, strict=True)]
    limit = threshold_for(mean_days_between_false_alarms, least_size * math.sqrt(sum(gain**2 for gain in per_day) / len(mine)))
    on = statistic > limit and _lasts(raw, length, sum(raw[-length:]) / length)
    size = median(day.off for day in mine[-length:]) - middle
    return Shift(on, first + len(mine) - length, size, statistic, limit, middle, spread)


def evened(days: Sequence[Day], middle: float, spread: float) -> list[Day]:
    """The days with what one wrong reading took from one and gave to the next shared evenly: their sum is right.

    A pair is such where both are off to opposite sides by more than they can be, and together by no more than they can be.
    """
    out = list(days)
    for index in range(len(out) - 1):
        first, second = out[index], out[index + 1]
        most = CLIP * math.hypot(spread, max(first.gauge_sd, second.gauge_sd))
        one, other = first.off - middle, second.off - middle
        if second.follows and not second.reset and one * other < 0 and min(abs(one), abs(other)) > most > abs(one + other) / 2:
            out[index] = replace(first, off=(first.off + second.off) / 2)
            out[index + 1] = replace(second, off=(first.off + second.off) / 2)
    return out


def innovations(days: Sequence[Day], middle: float, spread: float) -> tuple[list[float], list[float]]:
    """Standardised, clipped innovations of the running sum, and what a standing difference of 1 adds to each."""
    values: list[float] = []
    per_day: list[float] = []
    total = estimate = 0.0
    variance = 0.0
    for index, day in enumerate(days):
        noise = day.gauge_sd**2 / 2
        if index == 0 or not day.follows:
            # A new start: only the first reading's own error is known of it.
            estimate, variance = total, noise
        total += day.off - middle
        variance += spread**2
        expected = variance + noise
        gain = variance / expected
        step = total - estimate
        most = CLIP * math.sqrt(expected)
        values.append(min(max(step, -most), most) / math.sqrt(expected))
        per_day.append(1 / (gain * math.sqrt(expected)))
        # With a coarse gauge a wild reading is most likely wrong, and must not drag the estimate along.
        estimate += gain * (step if gain > COARSE else min(max(step, -most), most))
        variance *= 1 - gain
    return values, per_day


def _largest(
    values: Sequence[float], per_day: Sequence[float], centre_sd: float, window: int, least_size: float
) -> tuple[float, int]:
    """The largest statistic of the spans that end with the last day, and that span's length in days.

    With A the sum of innovations weighted by what a change of 1 adds to each, and B the sum of those squares, a change of
    d makes A = d B; the doubt about the centre makes A's variance B + (sd B)^2.
    """
    best, at = -1.0, 1
    seen = weight = 0.0
    for length in range(1, min(len(values), window) + 1):
        seen += values[-length] * per_day[-length]
        weight += per_day[-length] ** 2
        variance = weight + (centre_sd * weight) ** 2
        # No more than what a clipped day can show, or a fine gauge could never show anything.
        least = min(least_size, CLIP / math.sqrt(weight / length))
        size = max(abs(seen) / weight, least)
        ratio = size * weight / variance * (abs(seen) - size * weight / 2)
        statistic = math.sqrt(2 * max(ratio, 0.0))
        if statistic > best:
            best, at = statistic, length
    return best, at


def _lasts(values: Sequence[float], length: int, size: float) -> bool:
    """Whether the newest days, up to four, lie nearer to the change than to the centre."""
    newest = values[-min(length, 4) :]
    mean = sum(newest) / len(newest)
    return abs(mean - size) < abs(mean) or ((mean > 0) == (size > 0) and abs(mean) > abs(size))
