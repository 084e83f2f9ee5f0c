"""Water quality: what was due, what is there, what is doubtful; lowest, middle, highest; means where they mean something."""

from __future__ import annotations

import datetime as dt
from itertools import pairwise
from statistics import fmean, median

from plant.deviations.rules import running, shares
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.parts import expected, judged, values
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text
from plant.works.described import Limit

KEY, TITLE = "quality", "Water quality"
WIDTH = 13  # cells of a row without a second mean
NEVER_AVERAGED = frozenset({"pH", "total_coliform", "e_coli"})
SUBSTITUTES = {"zero": "zero", "half": "half of x", "full": "x itself"}


def section(month: Month) -> Section:
    """Statistics per sample point and parameter, shares of the month, running means."""
    due = {(line.site, line.parameter): line for line in expected.lines(month)}
    blocks: list[Block] = []
    for point in month.stated.sample_points(month.at):
        table = _site(month, point.code, point.name, due)
        if table is not None:
            blocks.append(table)
    if not blocks:
        return Section(KEY, TITLE, (Text("No sample point has a reading in the month, and none was due."),))
    blocks.append(Text(_how(month), "small"))
    shares_table, means = _shares(month), _running(month)
    blocks += [table for table in (shares_table, means) if table is not None]
    return Section(KEY, TITLE, tuple(blocks))


def substitute(month: Month) -> str:
    """How a value below detection enters a mean: stated by the works, half of its bound otherwise."""
    return str(month.works_value.get("censored_in_means", "half"))


def _how(month: Month) -> str:
    means = SUBSTITUTES[substitute(month)]
    stated = (
        "as stated by the works"
        if "censored_in_means" in month.works_value
        else "no setting is stated; common practice, no source"
    )
    return (
        "Lowest, middle (median), highest and mean are of settled readings; a second mean includes the doubtful ones "
        "that nobody has "
        f"settled. “<x” enters a mean as {means} ({stated}); “>x” as x. pH is never averaged. Late: entered more than "
        f"{values.LATE_HOURS} hours after it was taken. Missing: due by the round and neither a value nor a result in "
        "words is there. "
        f"Doubtful: marked at entry and not settled. A dash under due means that no line of the round asks for it."
    )


def _site(month: Month, site: str, name: str, due: dict[tuple[str, str], expected.Due]) -> Table | None:
    found = dict(values.of_site(month, site))
    names = list(found) + [parameter for (where, parameter) in due if where == site and parameter not in found]
    body = []
    for parameter in names:
        points = found.get(parameter, [])
        line = due.get((site, parameter)) if "|" not in parameter else None
        body.append(_row(month, parameter, points, line))
    if not body:
        return None
    counted = [
        Column(head) for head in ("due", "present", "missing", "late", "corrected", "below/ above", "doubtful", "set aside")
    ]
    means = [Column("mean")] + ([Column("mean with doubtful")] if any(len(row) > WIDTH for row in body) else [])
    width = WIDTH + len(means) - 1
    return Table(
        f"quality-{site}",
        f"{site}, {name}",
        (
            Column("Parameter", number=False),
            *counted,
            Column("lowest"),
            Column("middle"),
            Column("highest"),
            *means,
        ),
        tuple((*row, Cell(""))[:width] for row in body),
        1,
    )


def _row(month: Month, parameter: str, points: list[Point], line: expected.Due | None) -> tuple[Cell, ...]:
    label, unit, places = values.printed(month, parameter)
    taken = [point for point in points if point.state != "not_taken"]
    usable = [point for point in taken if point.usable]
    doubtful = [point for point in taken if point.value is not None and point.doubtful]
    counts = (
        Cell(measures.UNKNOWN) if line is None else _count(line.slots),
        _count(len(taken)),
        Cell(measures.UNKNOWN) if line is None else _count(line.missing),
        _count(sum(1 for point in taken if values.is_late(month, point))),
        _count(sum(1 for point in taken if point.corrected)),
        _count(sum(1 for point in taken if point.qualifier)),
        _count(len(doubtful)),
        _count(sum(1 for point in taken if point.settled == "set_aside")),
    )
    averaged = parameter.partition("|")[0] not in NEVER_AVERAGED
    return (
        Cell(f"{label}, {unit}" if unit else label),
        *counts,
        values.cell(month, min(usable, key=values.order), places) if usable else Cell(measures.UNKNOWN),
        _middle(month, usable, places),
        values.cell(month, max(usable, key=values.order), places) if usable else Cell(measures.UNKNOWN),
        _mean(month, usable, places) if averaged else Cell("not averaged" if usable else measures.UNKNOWN),
        *([_mean(month, usable + doubtful, places)] if averaged and doubtful else []),
    )


def _count(number: int) -> Cell:
    return Cell(str(number), float(number))


def _middle(month: Month, usable: list[Point], places: int) -> Cell:
    """The median; below a bound where the middle itself lies below one."""
    if not usable:
        return Cell(measures.UNKNOWN)
    ordered = sorted(usable, key=values.order)
    half = len(ordered) // 2
    middle = ordered[half : half + 1] if len(ordered) % 2 else ordered[half - 1 : half + 1]
    qualifier = next((point.qualifier for point in reversed(middle) if point.qualifier), "")
    known = month.parameters.get(usable[0].parameter)
    value = month.measures.shown(median(point.value or 0.0 for point in middle), known.unit if known else usable[0].unit)
    return measures.cell(value, places, prefix=qualifier)


def _mean(month: Month, points: list[Point], places: int) -> Cell:
    if not points:
        return Cell(measures.UNKNOWN)
    share = {"zero": 0.0, "half": 0.5, "full": 1.0}[substitute(month)]
    numbers = [(point.value or 0.0) * (share if point.qualifier == "<" else 1.0) for point in points]
    known = month.parameters.get(points[0].parameter)
    unit = known.unit if known else points[0].unit
    if all(point.qualifier == "<" for point in points):
        highest = max(point.value or 0.0 for point in points)
        return measures.cell(month.measures.shown(highest, unit), places, prefix="<")
    return measures.cell(month.measures.shown(fmean(numbers), unit), places + 1)


def _of_limit(month: Month, limit: Limit) -> list[Point]:
    return [
        point for point in month.series.get((limit.subject, limit.parameter), []) if point.statistic in ("reading", "day_max")
    ]


def _shares(month: Month) -> Table | None:
    """The count rule: how many measurements are at or below the limit, by counting, never an interpolated percentile."""
    body = []
    for limit in month.stated.limits(month.at):
        if limit.kind != "share_of_month":
            continue
        label, unit, places = values.printed(month, limit.parameter)
        row = [Cell(limit.subject), Cell(label), Cell(f"{limit.keys['limit']:g} {limit.unit or unit}".strip())]
        points = judged.while_in_force(month, limit, _of_limit(month, limit))
        settled = [point for point in points if point.usable and point.decimal is not None]
        test = judged.outside(month, limit, "limit", low=False)
        verdicts = [test(item) for item in judged.observed(settled)]
        share = shares.share_met(verdicts)
        above = [point for point, verdict in zip(settled, verdicts, strict=True) if verdict]
        row += [_count(share.of), _count(share.met), measures.cell(share.pct, 1), Cell(f"{limit.keys['at_least_pct']:g}")]
        listed = "; ".join(f"{month.local(point.at)[5:]} {values.cell(month, point, places).text}" for point in above)
        row.append(Cell(listed or "none"))
        body.append(tuple(row))
    if not body:
        return None
    return Table(
        "shares",
        "Share of the month's measurements at or below a limit",
        (
            Column("Site", number=False),
            Column("Parameter", number=False),
            Column("limit", number=False),
            Column("measured"),
            Column("at or below"),
            Column("share", "%"),
            Column("stated", "%"),
            Column("above the limit: when, value", number=False, wraps=True),
        ),
        tuple(body),
        2,
        0,
        ("By counting (40 CFR 141.173(a), 141.551), not by an interpolated percentile.",),
    )


def _running(month: Month) -> Table | None:
    body = []
    for limit in month.stated.limits(month.at):
        if limit.kind != "running_mean":
            continue
        months = int(limit.keys["months"])
        means = _monthly_means(month, limit, months)
        known = [mean for mean in means if mean is not None]
        label, unit, places = values.printed(month, limit.parameter)
        quarters = [running.quarter_mean(means[first : first + 3]) for first in range(0, months, 3)] if months == 12 else []
        value = running.annual(quarters).value if quarters else (fmean(known) if known else None)
        parameter = month.parameters.get(limit.parameter)
        value = month.measures.shown(value, parameter.unit if parameter else limit.unit)
        stated = ", ".join(
            f"{word} {limit.keys[key]:g}" for key, word in (("low", "at least"), ("high", "at most")) if key in limit.keys
        )
        body.append(
            (
                Cell(limit.subject),
                Cell(label),
                _count(months),
                _count(len(known)),
                measures.cell(value, places + 1),
                Cell(unit),
                Cell(stated),
            )
        )
    if not body:
        return None
    return Table(
        "running",
        f"Running means up to {month.words}",
        (
            Column("Site", number=False),
            Column("Parameter", number=False),
            Column("months"),
            Column("with readings"),
            Column("mean"),
            Column("Unit", number=False),
            Column("stated limit", number=False),
        ),
        tuple(body),
        2,
        0,
        (
            "Means of monthly means of all samples; over twelve months by quarter (40 CFR 141.133(c)(1)(i)). Months "
            "without samples are "
            "left out of the mean and counted.",
        ),
    )


def _monthly_means(month: Month, limit: Limit, months: int) -> list[float | None]:
    out: list[float | None] = []
    first = month.first
    starts: list[dt.date] = [first]
    for _ in range(months - 1):
        first = (first - dt.timedelta(days=1)).replace(day=1)
        starts.insert(0, first)
    edges = [month.calendar.start_of(date) for date in starts] + [month.end]
    points = readings.series(month.book, limit.subject, limit.parameter, start=edges[0], end=edges[-1], known=month.ask)
    share = {"zero": 0.0, "half": 0.5, "full": 1.0}[substitute(month)]
    for start, end in pairwise(edges):
        numbers = [
            (point.value or 0.0) * (share if point.qualifier == "<" else 1.0)
            for point in points
            if start <= point.at < end and point.value is not None and point.settled != "set_aside"
        ]
        out.append(fmean(numbers) if numbers else None)
    return out
