"""Residual in the distribution system: how many samples, how many without a detectable residual, and the share V.

40 CFR 141.75(b)(2)(iii) names the counts a to e; V = 100 (c + d + e) / (a + b), 141.72(b)(3)(i), the formula from memory (the
opened text lost its picture). A heterotrophic plate count of at most 500/mL stands for a detectable residual, 141.72(b)(3)(i).
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass

from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "network", "Residual in the network"
RESIDUALS = ("total_chlorine", "free_chlorine", "combined_chlorine", "chlorine_dioxide")
COUNTS = "heterotrophic_plate_count"
MOST_PER_ML = 500.0


@dataclass(frozen=True)
class Counts:
    """a: residual measured; b: not measured, plate count measured; c: none detected, no plate count; d: none detected and plate
    count above 500/mL; e: not measured and plate count above 500/mL."""

    a: int = 0
    b: int = 0
    c: int = 0
    d: int = 0
    e: int = 0

    @property
    def share_pct(self) -> float | None:
        """V; None where nothing was measured."""
        return 100 * (self.c + self.d + self.e) / (self.a + self.b) if self.a + self.b else None


def counted(points: Iterable[Point], day_of: dict[Point, dt.date], threshold_mg_l: float | None) -> Counts:
    """Counts samples: a residual is one sample per site and time, whatever it was measured as; a plate count belongs to the
    residual of its site and day. Below ``threshold_mg_l`` (None: only what reads "<" or zero) nothing is detected.
    """
    residuals: dict[tuple[str, dt.datetime], bool] = {}
    days: dict[tuple[str, dt.datetime], dt.date] = {}
    plates: dict[tuple[str, dt.date], float] = {}
    for point in points:
        if not point.usable or point.value is None:
            continue
        if point.parameter == COUNTS:
            key = (point.site, day_of[point])
            plates[key] = max(plates.get(key, 0.0), point.value)
        elif point.parameter in RESIDUALS:
            sample = (point.site, point.at)
            residuals[sample] = residuals.get(sample, False) or _detected(point, threshold_mg_l)
            days[sample] = day_of[point]
    with_residual = {(site, days[site, at]) for site, at in residuals}
    c = d = 0
    for (site, at), detected in residuals.items():
        plate = plates.get((site, days[site, at]))
        c += not detected and plate is None
        d += not detected and plate is not None and plate > MOST_PER_ML
    alone = [value for key, value in plates.items() if key not in with_residual]
    return Counts(len(residuals), len(alone), c, d, sum(value > MOST_PER_ML for value in alone))


def _detected(point: Point, threshold_mg_l: float | None) -> bool:
    if point.qualifier == "<" or point.value is None or point.value <= 0:
        return False
    return threshold_mg_l is None or point.value >= threshold_mg_l


def section(month: Month) -> Section:
    """This month and the month before, since two months running decide."""
    sites = {point.code for point in month.stated.sample_points(month.at) if point.stage == "network"}
    if not sites:
        return Section(KEY, TITLE, (Text("No sample point of the network is stated."),))
    threshold = month.form.get("undetectable_below_mg_per_L")
    before = month.first - dt.timedelta(days=1)
    start = month.calendar.start_of(before.replace(day=1))
    earlier = readings.points(month.book, start=start, end=month.start, known=month.ask, sites=sites)
    rows = tuple(
        _row(name, _counts(month, [point for point in points if point.site in sites], threshold))
        for name, points in ((f"{before:%B %Y}", earlier), (month.words, month.points))
    )
    columns = (
        Column("Month", number=False), Column("a"), Column("b"), Column("c"), Column("d"), Column("e"), Column("V", "%"),
    )  # fmt: skip
    below = f"below {threshold:g} mg/L, as stated" if threshold is not None else "read as “<” or as zero"
    notes = (
        "a: residual measured; b: residual not measured, plate count measured; c: no residual detected, no plate count; "
        "d: no residual detected, plate count above 500/mL; e: residual not measured, plate count above 500/mL. "
        "V = 100 (c + d + e) / (a + b).",
        f"Not detected: {below}. Free, combined, total chlorine of one site and time are one sample, a plate count goes with "
        "the residual of its site and day. Terms of 40 CFR 141.75(b)(2)(iii); the formula from memory. The local regulator's "
        "rules say which samples count and how many months decide.",
    )
    return Section(KEY, TITLE, (Table("network", "", columns, rows, 1, 0, notes),))


def _counts(month: Month, points: list[Point], threshold: float | None) -> Counts:
    return counted(points, {point: month.calendar.day_of(point.at) for point in points}, threshold)


def _row(name: str, found: Counts) -> tuple[Cell, ...]:
    numbers = (found.a, found.b, found.c, found.d, found.e)
    return (Cell(name), *(Cell(str(one), float(one)) for one in numbers), measures.cell(found.share_pct, 1))
