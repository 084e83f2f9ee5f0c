"""The summary: the month in a few sentences and a handful of numbers, each of which stands in a section below."""

from __future__ import annotations

from collections import Counter

from plant.reports import changes, measures
from plant.reports.month import Month
from plant.reports.parts import chemicals, daily, deviations, expected, values
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text

KEY, TITLE = "summary", "Summary"


def section(month: Month) -> Section:
    """What was treated, what was dosed against design, what was outside, what is missing."""
    blocks: list[Block] = [Text(_water(month) + " " + _outside(month), "lead"), Text(_records(month))]
    if month.periods:
        blocks.append(_doses(month))
    lowest = _entry(month)
    if lowest is not None:
        blocks.append(lowest)
    if month.periods:
        blocks.append(chemicals.strips(month))
    return Section(KEY, TITLE, tuple(blocks))


def _water(month: Month) -> str:
    show = month.measures
    seen: dict[str, float | None] = {}
    for row in month.periods:
        point = month.points_by_code.get(row.dosing_point)
        if point is not None:
            seen.setdefault(point.meter, row.volume_ml.value)
    parts = [
        f"{measures.significant(show.shown(volume, 'ML'), 4)} {show.label('ML')} by {meter}"
        if volume is not None
        else f"an unknown volume by {meter}"
        for meter, volume in seen.items()
    ]
    if not parts:
        return f"{month.words} has {len(month.days)} operating days."
    return f"In {month.words}, {len(month.days)} operating days, the works treated {', '.join(parts)}."


def _outside(month: Month) -> str:
    counted = Counter(view.level for view in deviations.views(month))
    if not counted:
        return "No deviation was raised."
    levels = ", ".join(f"{counted[level]} {level}" for level in deviations.LEVELS if counted[level])
    still = sum(1 for view in deviations.views(month) if view.state not in ("closed", "corrected_away"))
    return f"Deviations: {levels}; {still or 'none'} still open."


def _records(month: Month) -> str:
    lines = expected.lines(month)
    due, missing = sum(line.slots for line in lines), sum(line.missing for line in lines)
    corrected = sum(
        1
        for change in changes.corrections(month.book, month.start, month.end, until=month.known)
        if change.kind != "settlement"
    )
    late = sum(1 for point in month.points if values.is_late(month, point))
    doubtful = sum(1 for point in month.points if point.doubtful)
    asked = (
        f"{due} values were due by the round, {missing} of them are not on record. "
        if due
        else "No round is stated, so nothing was due. "
    )
    return (
        f"{asked}{len(month.points)} readings are on record: {corrected} corrected, {late} entered more than "
        f"{values.LATE_HOURS} hours late, "
        f"{doubtful} doubtful and not settled."
    )


def _doses(month: Month) -> Table:
    body = []
    for row in month.periods:
        places = measures.decimals([row.used_mg_l.value, row.design_mg_l.value, row.need_mg_l.value], figures=4, most=3)
        share = (
            None
            if row.used_mg_l.value is None or not row.design_mg_l.value
            else 100 * row.used_mg_l.value / row.design_mg_l.value
        )
        product = month.products.get(row.product)
        body.append(
            (
                Cell(row.dosing_point),
                Cell(product.name if product else row.product),
                measures.cell(row.used_mg_l.value, places, key=row.used_mg_l.key),
                measures.cell(None if row.used_mg_l.sd is None else 2 * row.used_mg_l.sd, places, key=row.used_mg_l.key),
                measures.cell(row.design_mg_l.value, places, key=row.design_mg_l.key),
                measures.cell(row.need_mg_l.value, places, key=row.need_mg_l.key),
                measures.cell(share, 0, key=row.used_mg_l.key),
                Cell(f"{row.days_counted}/{row.days_expected}"),
                Cell(daily.basis_words(row.dose_basis)),
            )
        )
    return Table(
        "summary-doses",
        "Dose of the month",
        (
            Column("Dosing point", number=False),
            Column("Product", number=False),
            Column("used", "mg/L"),
            Column("± 2 sd", "mg/L"),
            Column("design", "mg/L"),
            Column("need", "mg/L"),
            Column("used / design", "%"),
            Column("days", "known/due"),
            Column("stated as", number=False),
        ),
        tuple(body),
        2,
    )


def _entry(month: Month) -> Table | None:
    """Lowest and highest of each parameter at the entry points."""
    body = []
    for point in month.stated.sample_points(month.at):
        if point.stage != "entry":
            continue
        for parameter, points in values.of_site(month, point.code):
            usable = [item for item in points if item.usable]
            if not usable:
                continue
            label, unit, places = values.printed(month, parameter)
            body.append(
                (
                    Cell(point.code),
                    Cell(label),
                    Cell(str(len(usable)), float(len(usable))),
                    values.cell(month, min(usable, key=values.order), places),
                    values.cell(month, max(usable, key=values.order), places),
                    Cell(unit),
                )
            )
    if not body:
        return None
    return Table(
        "summary-entry",
        "Water leaving the works",
        (
            Column("Site", number=False),
            Column("Parameter", number=False),
            Column("readings"),
            Column("lowest"),
            Column("highest"),
            Column("Unit", number=False),
        ),
        tuple(body),
        2,
    )
