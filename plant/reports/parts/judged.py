"""Readings held against a limit for print: each against what the limit was when the reading was taken."""

from __future__ import annotations

import bisect
from collections.abc import Callable

from plant.deviations.judging import limits
from plant.deviations.rules import bounds
from plant.deviations.rules.observed import Observed
from plant.readings.queries import Point
from plant.reports.month import Month
from plant.works.described import Limit


def observed(points: list[Point]) -> list[Observed]:
    """Points with an exact number as the rules take them."""
    return [Observed(point.at, point.decimal, point.qualifier, point.ref) for point in points if point.decimal is not None]


def outside(month: Month, limit: Limit, key: str, *, low: bool) -> Callable[[Observed], bool | None]:
    """A test of one reading: below the number under ``key`` (or above it); False where no limit was in force then."""
    versions = limits.versions(month.stated, limit, month.start, month.end)
    rounds = limits.rounds(month.stated, month.at)
    stated: list[bounds.Bound | None] = []
    for start, version in versions:
        number = None if version is None else limits.number(month.stated, start, version, key)
        stated.append(None if number is None else bounds.Bound(number if low else None, None if low else number, rounds))
    starts = [start for start, _ in versions]

    def test(item: Observed) -> bool | None:
        bound = stated[max(bisect.bisect_right(starts, item.at) - 1, 0)]
        if bound is None:
            return False
        return bounds.below(item, bound) if low else bounds.above(item, bound)

    return test


def while_in_force(month: Month, limit: Limit, points: list[Point]) -> list[Point]:
    """The points taken while the limit was stated."""
    versions = limits.versions(month.stated, limit, month.start, month.end)
    starts = [start for start, _ in versions]
    return [point for point in points if versions[max(bisect.bisect_right(starts, point.at) - 1, 0)][1] is not None]
