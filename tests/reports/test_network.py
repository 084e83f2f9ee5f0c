"""Samples of the network counted a to e, and V, by hand; terms of 40 CFR 141.75(b)(2)(iii), V of 141.72(b)(3)(i)."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace

import pytest

from plant.readings.queries import Point
from plant.reports.parts.network import Counts, counted

DAY = dt.date(2026, 3, 2)


def point(site: str, hour: int, parameter: str, value: float | None, qualifier: str = "", day: int = 2) -> Point:
    at = dt.datetime(2026, 3, day, hour, tzinfo=dt.UTC)
    blank = Point(
        "1.1", site, parameter, at, value, "", "", qualifier, "taken", "", "", "reading", "", "", (), "", False, False, 1
    )
    return replace(blank, pk=hash((site, hour, parameter, day)))


def count(*points: Point, threshold: float | None = None) -> Counts:
    return counted(points, {one: one.at.date() for one in points}, threshold)


def test_each_letter_once():
    found = count(
        point("A", 8, "free_chlorine", 0.4),
        point("B", 8, "free_chlorine", 0.02, "<"),
        point("C", 8, "free_chlorine", 0.0),
        point("C", 9, "heterotrophic_plate_count", 501),
        point("D", 8, "heterotrophic_plate_count", 12),
        point("E", 8, "heterotrophic_plate_count", 800),
    )
    assert found == Counts(a=3, b=2, c=1, d=1, e=1)
    assert found.share_pct == pytest.approx(100 * 3 / 5)


def test_a_plate_count_of_500_counts_as_detectable_501_does_not():
    none = point("A", 8, "free_chlorine", 0.0)
    assert count(none, point("A", 9, "heterotrophic_plate_count", 500)) == Counts(a=1)
    assert count(none, point("A", 9, "heterotrophic_plate_count", 501)) == Counts(a=1, d=1)
    assert count(point("A", 9, "heterotrophic_plate_count", 500)) == Counts(b=1)


def test_free_and_total_of_one_sample_are_one_and_either_detects():
    assert count(point("A", 8, "free_chlorine", 0.0), point("A", 8, "total_chlorine", 0.3)) == Counts(a=1)


def test_below_the_stated_threshold_nothing_is_detected_at_it_something_is():
    """30 TAC 290.110(f)(6): samples under 0.2 mg/L free chlorine."""
    assert count(point("A", 8, "free_chlorine", 0.19), threshold=0.2) == Counts(a=1, c=1)
    assert count(point("A", 8, "free_chlorine", 0.2), threshold=0.2) == Counts(a=1)
    assert count(point("A", 8, "free_chlorine", 0.19)) == Counts(a=1)


def test_a_plate_count_of_another_day_belongs_to_nothing():
    found = count(point("A", 8, "free_chlorine", 0.0), point("A", 8, "heterotrophic_plate_count", 9, day=3))
    assert found == Counts(a=1, b=1, c=1)


def test_five_in_a_hundred_is_five_percent_and_nothing_measured_is_no_share():
    samples = [point(f"S{n}", 8, "total_chlorine", 0.0 if n < 5 else 0.4) for n in range(100)]
    assert count(*samples).share_pct == 5.0
    assert count().share_pct is None
    assert count(point("A", 8, "free_chlorine", None)) == Counts()
