"""Disinfection: the lowest residual of each day at the entry points, times below a stated minimum, and CT day by day."""

from __future__ import annotations

import datetime as dt

from plant.deviations.rules import durations
from plant.readings.queries import Point
from plant.reports import inactivation, measures
from plant.reports.month import Month
from plant.reports.parts import judged, values
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text

KEY, TITLE = "disinfection", "Disinfection"
RESIDUALS = ("free_chlorine", "total_chlorine", "chlorine_dioxide", "ozone")


def section(month: Month) -> Section:
    """Lowest residual per day, dips, inactivation ratio; what is lacking is said."""
    blocks: list[Block] = []
    for point in month.stated.sample_points(month.at):
        if point.stage != "entry":
            continue
        read = [(name, found) for name in RESIDUALS if (found := month.series.get((point.code, name)))]
        if read:
            blocks.append(_lowest(month, point.code, read))
    if not blocks:
        blocks.append(Text("No residual was read at an entry point in the month."))
    dips = _dips(month)
    if dips is not None:
        blocks.append(dips)
    blocks += _contact(month)
    return Section(KEY, TITLE, tuple(blocks))


def _lowest(month: Month, site: str, read: list[tuple[str, list[Point]]]) -> Table:
    """Each residual's lowest of the day, when it was read, and what it rests on."""
    columns = [Column("Day", number=False)]
    body: list[list[Cell]] = [[Cell(month.day_words(day))] for day in month.days]
    for parameter, points in read:
        label, unit, places = values.printed(month, parameter)
        columns += [
            Column("lowest", unit, label),
            Column("at", "local", label, number=False),
            Column("rests on", "", label, number=False),
        ]
        by_day: dict[dt.date, list[Point]] = {}
        for point in points:
            if point.usable and point.statistic in ("reading", "day_min"):
                by_day.setdefault(month.calendar.day_of(point.at), []).append(point)
        for cells, day in zip(body, month.days, strict=True):
            cells += _lowest_of_day(month, by_day.get(day, []), places)
    return Table(
        f"lowest-{site}",
        f"{site}: lowest residual of each operating day",
        tuple(columns),
        tuple(tuple(cells) for cells in body),
        1,
        0,
        ("Grab readings can miss the lowest value of a day; only a recorder sees it.",),
    )


def _lowest_of_day(month: Month, found: list[Point], places: int) -> list[Cell]:
    if not found:
        return [Cell(measures.UNKNOWN), Cell(measures.UNKNOWN), Cell("no usable reading")]
    recorded = [point for point in found if point.statistic == "day_min"]
    lowest = min(recorded or found, key=values.order)
    grabs = len(found) - len(recorded)
    words = "recorder's minimum of the day" if recorded else f"lowest of {grabs} grab reading{'s' if grabs != 1 else ''}"
    return [values.cell(month, lowest, places), Cell(month.local(lowest.at)[11:]), Cell(words)]


def _dips(month: Month) -> Table | None:
    """Every time outside a held-below or low limit on a residual at an entry point, however short."""
    entries = {point.code for point in month.stated.sample_points(month.at) if point.stage == "entry"}
    body = []
    asked = False
    for limit in month.stated.limits(month.at):
        if limit.subject not in entries or limit.parameter not in RESIDUALS:
            continue
        low = (
            limit.keys.get("limit") if limit.kind == "held_below" else limit.keys.get("low") if limit.kind == "bound" else None
        )
        if low is None:
            continue
        asked = True
        key = "limit" if limit.kind == "held_below" else "low"
        points = month.series.get((limit.subject, limit.parameter), [])
        observed = judged.observed([point for point in points if point.settled != "set_aside"])
        label, unit, _ = values.printed(month, limit.parameter)
        for dip in durations.dips(observed, judged.outside(month, limit, key, low=True)):
            until = dip.end or min(month.end, month.now)
            body.append(
                (
                    Cell(limit.subject),
                    Cell(label),
                    Cell(f"{low:g} {limit.unit or unit}"),
                    Cell(limit.level),
                    Cell(month.local(dip.start)),
                    Cell(month.local(dip.end) if dip.end else "not back by the end"),
                    measures.cell(dip.hours(until), 2),
                    Cell(dip.worst.text, float(dip.worst.value), f"reading:{dip.worst.ref}"),
                )
            )
    if not asked:
        return None
    return Table(
        "dips",
        "Times below a stated minimum residual",
        (
            Column("Site", number=False),
            Column("Residual", number=False),
            Column("below", number=False),
            Column("level", number=False),
            Column("from", number=False),
            Column("first reading back", number=False),
            Column("hours"),
            Column("lowest"),
        ),
        tuple(body),
        2,
        0,
        (
            "From the first reading below to the first reading back (40 CFR 141.72(b)(2)), each against the limit in "
            "force when it was "
            "taken; doubtful readings that nobody has settled are included. Who was told stands under Deviations.",
        ),
        "No reading lay below a stated minimum.",
    )


def _contact(month: Month) -> list[Block]:
    segments = month.stated.contact_segments(month.at)
    if not segments:
        return [Text("No contact segment is stated, so no inactivation ratio is computed.")]
    days = inactivation.days(month)
    body = []
    for day in month.days:
        body += [_segment(month, day, result) for result in days[day]]
        if len(segments) > 1:
            total = inactivation.total(days[day])
            body.append(
                (
                    Cell(month.day_words(day)),
                    Cell("all segments"),
                    *(Cell("") for _ in range(7)),
                    measures.cell(total, 2),
                    Cell(""),
                )
            )
    return [
        Table(
            "ct",
            "Inactivation by CT, by operating day and segment",
            (
                Column("Day", number=False),
                Column("Segment", number=False),
                Column("residual", "mg/L"),
                Column("T10", "min"),
                Column("temp.", month.measures.label("°C")),
                Column("pH"),
                Column("peak flow", month.measures.label("m3/h")),
                Column("CT", "mg·min/L"),
                Column("CT required", "mg·min/L"),
                Column("ratio"),
                Column("Remarks", number=False, wraps=True),
            ),
            tuple(body),
            2,
            0,
            inactivation.notes(month, days),
        ),
    ]


def _segment(month: Month, day: dt.date, result: inactivation.SegmentDay) -> tuple[Cell, ...]:
    return (
        Cell(month.day_words(day)),
        Cell(result.segment),
        measures.cell(result.residual_mg_l, 2),
        measures.cell(result.t10_min, 1),
        measures.cell(month.measures.shown(result.temperature_c, "°C"), 1),
        measures.cell(result.ph, 2),
        measures.cell(month.measures.shown(result.peak_flow_m3_h, "m3/h"), 1),
        measures.cell(result.ct_mg_min_l, 1),
        measures.cell(result.ct_required_mg_min_l, 1),
        measures.cell(result.ratio, 2),
        Cell(result.remark),
    )
