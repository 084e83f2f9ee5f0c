"""Readings that somebody has to look at: marked at entry and not settled."""

from __future__ import annotations

from collections.abc import Iterator

from plant.deviations.evidence import Day
from plant.deviations.findings import Cause, Finding
from plant.readings import marks
from plant.readings.queries import Point

CODE = "suspicious-reading"


def suspicious(day: Day) -> Iterator[Finding]:
    """One finding for each series of the day that holds a doubtful reading."""
    found: dict[tuple[str, str], list[Point]] = {}
    for point in day.all_points():
        if point.doubtful:
            found.setdefault((point.site, point.parameter), []).append(point)
    for (site, parameter), points in found.items():
        first = points[0]
        said = f"{first.qualifier}{first.typed} {first.typed_unit}".strip()
        words = marks.in_words(first.marks)
        yield Finding(
            code=CODE,
            kind="suspicious_reading",
            level="alert",
            subject_kind=day.stated.site_kind(site, day.moment) or "sample_point",
            subject=site,
            parameter=parameter,
            day=day.day,
            since=first.at,
            value=said[:80],
            limit="settled by somebody",
            sentence=f"{len(points)} doubtful: {words}",
            refs=tuple(point.ref for point in points),
            causes=(Cause("wrong_reading", 0.9, f"{said}: {words}"),),
        )
