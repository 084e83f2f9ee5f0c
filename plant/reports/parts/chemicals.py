"""Chemical use: mass and dose against design and need, for the month and the year to date, and the certified maximum."""

from __future__ import annotations

import datetime as dt

from plant.deviations.rules import doses
from plant.dosing.figures import DayDose, PeriodDose
from plant.reports import measures
from plant.reports.month import SEVEN_DAYS, Month
from plant.reports.parts import daily
from plant.reports.pdf.document import Block, Cell, Column, Picture, Section, Table, Text

KEY, TITLE = "chemicals", "Chemical use"
TOLERANCE_PCT = 10.0


def section(month: Month) -> Section:
    """Month and year to date per dosing point; then the highest seven-day dose where a maximum is stated."""
    if not month.periods:
        return Section(KEY, TITLE, (Text("No dosing point is stated."),))
    blocks: list[Block] = [
        _table(month, "use-month", f"Use per volume treated, {month.words}", month.periods),
        _table(
            month,
            "use-year",
            f"Year to date, {month.year_first:%Y-%m-%d} to {month.last:%Y-%m-%d}",
            [month.year_to_date[row.dosing_point] for row in month.periods if row.dosing_point in month.year_to_date],
        ),
    ]
    maximum = _maximum(month)
    if maximum is not None:
        blocks.append(maximum)
    return Section(KEY, TITLE, tuple(blocks))


def strips(month: Month) -> Picture:
    """The month's dose strips; their numbers stand in the table below them."""
    facts = []
    for row in month.periods:
        point = month.points_by_code.get(row.dosing_point)
        facts.append(
            {
                "title": f"{row.dosing_point}, mg/L {daily.basis_words(row.dose_basis)}" if point else row.dosing_point,
                "unit": "mg/L",
                "used": measures.steady(row.used_mg_l.value),
                "design": measures.steady(row.design_mg_l.value),
                "need": measures.steady(row.need_mg_l.value),
                "used_sd": measures.steady(row.used_mg_l.sd),
                "tolerance_pct": _tolerance(month, row.dosing_point),
                "why_unknown": "; ".join(row.remarks),
            }
        )
    return Picture(
        "dose_strips",
        {"strips": facts},
        "Used, designed and needed dose of each dosing point over the month.",
        "Dose of the month: used (dot), design (band), need (notch)",
    )


def _tolerance(month: Month, code: str) -> float:
    """The stated tolerance about the design, %; 10 where none is stated."""
    for limit in month.stated.limits(month.at):
        if limit.kind == "dose_vs_design" and limit.subject == code and limit.keys.get("pct"):
            return float(limit.keys["pct"])
    return TOLERANCE_PCT


def _table(month: Month, name: str, caption: str, rows: list[PeriodDose]) -> Table:
    show = month.measures
    per = f"{show.label('kg')}/{show.label('ML')}"
    columns = (
        Column("Dosing point", number=False),
        Column("Product", number=False),
        Column("Treated", show.label("ML")),
        Column("product", show.label("kg")),
        Column("product per volume", per),
        Column("as dosed", show.label("kg")),
        Column("used", "mg/L"),
        Column("± 2 sd", "mg/L"),
        Column("design", "mg/L"),
        Column("need", "mg/L"),
        Column("used / design", "%"),
        Column("days", "known/due"),
        Column("stated as", number=False),
    )
    body = []
    for row in rows:
        doses_known = [row.used_mg_l.value, row.design_mg_l.value, row.need_mg_l.value]
        places = measures.decimals(doses_known, figures=4, most=3)
        volume, product = show.shown(row.volume_ml.value, "ML"), show.shown(row.product_kg.value, "kg")
        active = show.shown(row.active_kg.value, "kg")
        each = None if product is None or not volume else product / volume
        share = (
            None
            if row.used_mg_l.value is None or not row.design_mg_l.value
            else 100 * row.used_mg_l.value / row.design_mg_l.value
        )
        body.append(
            (
                Cell(row.dosing_point),
                Cell(row.product),
                measures.cell(volume, measures.decimals([volume], figures=5, most=3), key=row.volume_ml.key),
                measures.cell(product, measures.decimals([product], figures=5, most=2), key=row.product_kg.key),
                measures.cell(each, measures.decimals([each]), key=row.product_kg.key),
                measures.cell(active, measures.decimals([active], figures=5, most=2), key=row.active_kg.key),
                measures.cell(row.used_mg_l.value, places, key=row.used_mg_l.key),
                measures.cell(None if row.used_mg_l.sd is None else 2 * row.used_mg_l.sd, places, key=row.used_mg_l.key),
                measures.cell(row.design_mg_l.value, places, key=row.design_mg_l.key),
                measures.cell(row.need_mg_l.value, places, key=row.need_mg_l.key),
                measures.cell(share, 0, key=row.used_mg_l.key),
                Cell(f"{row.days_counted}/{row.days_expected}", None),
                Cell(daily.basis_words(row.dose_basis)),
            )
        )
    return Table(
        name,
        caption,
        columns,
        tuple(body),
        2,
        0,
        (
            "Dose is mass over volume of the days on which both are known, never a mean of daily doses; design and need are "
            "weighted by the water treated. “As dosed” is the mass in the basis the dose is stated in. "
            f"1 mg/L is 1 kg/ML{' and 8.3454 lb/MG' if show.system == 'us' else ''}.",
        ),
    )


def _maximum(month: Month) -> Table | None:
    """The highest mean dose as product over seven days, against the product's certified maximum."""
    show = month.measures
    body = []
    for row in month.periods:
        product = month.products.get(row.product)
        if product is None or product.certified_maximum_mg_per_L is None:
            continue
        days = [item for item in month.doses_with_week_before if item.dosing_point == row.dosing_point]
        highest = _highest(days, month)
        worst, last, counted = highest if highest else (None, None, 0)
        places = measures.decimals([worst, product.certified_maximum_mg_per_L], most=2)
        body.append(
            (
                Cell(row.dosing_point),
                Cell(row.product),
                measures.cell(worst, places),
                Cell(measures.UNKNOWN if last is None else month.day_words(last)),
                Cell(str(counted), float(counted)),
                measures.cell(product.certified_maximum_mg_per_L, places),
            )
        )
    if not body:
        return None
    return Table(
        "maximum",
        f"Highest dose as product over {SEVEN_DAYS} days",
        (
            Column("Dosing point", number=False),
            Column("Product", number=False),
            Column("highest", "mg/L as product"),
            Column("seven days ending", number=False),
            Column("days known"),
            Column("certified maximum", "mg/L as product"),
        ),
        tuple(body),
        2,
        0,
        (
            f"Mass over volume of the seven operating days ending on the day named. Units: mg/L; {show.label('kg')} "
            "figures stand above.",
        ),
    )


def _highest(days: list[DayDose], month: Month) -> tuple[float, dt.date, int] | None:
    found = []
    for position, row in enumerate(days):
        if row.day < month.first:
            continue
        week = days[max(0, position - SEVEN_DAYS + 1) : position + 1]
        mean = doses.product_over(
            [
                doses.Dosed(
                    item.used_mg_l.value,
                    item.used_mg_l.sd,
                    item.design_mg_l.value,
                    item.need_mg_l.value,
                    item.volume_ml.value,
                    item.active_kg.value,
                    item.product_kg.value,
                    item.weak,
                )
                for item in week
            ],
            days=SEVEN_DAYS,
        )
        if mean is not None:
            found.append((mean[0], row.day, mean[1]))
    return max(found, key=lambda item: item[0]) if found else None
