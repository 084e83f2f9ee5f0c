"""Readings and loads that somebody has to look at: marked at entry and not settled."""

from __future__ import annotations

from collections.abc import Iterator

from plant.deviations.evidence import Day
from plant.deviations.findings import Cause, Finding
from plant.readings import marks
from plant.readings.queries import Point
from plant.stock.models import Delivery, Transfer

CODE = "suspicious-reading"
MOVED = "suspicious-movement"
DANGEROUS = frozenset({marks.WRONG_PRODUCT, marks.OVERFILL})


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


def movements(day: Day) -> Iterator[Finding]:
    """One finding for each vessel that was filled against a check, or of whose loads two contradict each other."""
    found: dict[str, list[Delivery | Transfer]] = {}
    moved: list[Delivery | Transfer] = [*day.of.deliveries, *day.of.transfers]
    for row in moved:
        if row.marks and day.start <= row.taken_at < day.until:
            found.setdefault(row.vessel if isinstance(row, Delivery) else row.to_vessel, []).append(row)
    for vessel, rows in found.items():
        first = rows[0]
        words = marks.in_words(first.marks)
        yield Finding(
            code=MOVED,
            kind="suspicious_reading",
            level="action" if any(DANGEROUS & set(row.marks) for row in rows) else "alert",
            subject_kind="vessel",
            subject=vessel,
            parameter="",
            day=day.day,
            since=first.taken_at,
            value=f"{first.quantity:g} {first.unit}"[:80],
            limit="the checks before connecting",
            sentence=f"{first}: {words}",
            refs=tuple(row.ref for row in rows),
            causes=(Cause("wrong_reading", 0.5, f"{first}: {words}"),),
        )
