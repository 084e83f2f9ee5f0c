"""The daily table: water treated and product dosed, one row an operating day; then the water itself, site by site."""

from __future__ import annotations

import datetime as dt

from plant.dosing.figures import DayDose, Figure
from plant.readings.queries import Point
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.parts import values
from plant.reports.pdf.document import Block, Cell, Column, Section, Table, Text

KEY, TITLE = "daily", "Daily table"


def section(month: Month) -> Section:
    """The doses of each day, and the lowest and highest value of each parameter of each day."""
    blocks: list[Block] = []
    if month.doses:
        blocks.append(_doses(month))
    else:
        blocks.append(Text("No dosing point is stated."))
    blocks += [
        _water(month, point.code, point.name) for point in month.stated.sample_points(month.at) if _read(month, point.code)
    ]
    return Section(KEY, TITLE, tuple(blocks))


def basis_words(basis: str) -> str:
    """What a dose is stated as, as printed after mg/L."""
    return {"product": "as product", "active": "as active substance"}.get(basis, f"as {basis}")


def _doses(month: Month) -> Table:
    show = month.measures
    by_day = {(row.day, row.dosing_point): row for row in month.doses}
    codes = list(dict.fromkeys(row.dosing_point for row in month.doses))
    periods = {row.dosing_point: row for row in month.periods}
    meters = meters_of(month, codes)
    columns = [Column("Day", number=False)]
    columns += [Column(f"Treated {meter}", show.label("ML")) for meter in meters]
    series: list[tuple[str, str, str, list[Figure | None], Figure | None]] = [
        ("ML", "", "", [_figure(by_day.get((day, code)), "volume_ml") for day in month.days], periods[code].volume_ml)
        for code in meters.values()
    ]
    for code in codes:
        rows = [by_day.get((day, code)) for day in month.days]
        total = periods[code]
        for head, field, unit in (
            ("product", "product_kg", "kg"),
            ("used", "used_mg_l", "mg/L"),
            ("design", "design_mg_l", "mg/L"),
            ("need", "need_mg_l", "mg/L"),
        ):
            columns.append(Column(head, show.label(unit), code))
            series.append((unit, code, field, [_figure(row, field) for row in rows], getattr(total, field)))
            if field == "used_mg_l":
                columns.append(Column("± 2 sd", unit, code))
                series.append((unit, code, "sd", [_twice_sd(figure) for figure in series[-1][3]], _twice_sd(total.used_mg_l)))
    places = _places(month, series)
    body = [
        (
            Cell(month.day_words(day)),
            *(
                _cell(month, one, one[3][position], places[index], _mark(by_day.get((day, one[1])), one[2]))
                for index, one in enumerate(series)
            ),
        )
        for position, day in enumerate(month.days)
    ]
    body.append((Cell("Month"), *(_cell(month, one, one[4], places[index], "") for index, one in enumerate(series))))
    return Table(
        "doses", "Water treated and product dosed, by operating day", tuple(columns), tuple(body), 1, 1, _notes(month, codes)
    )


def meters_of(month: Month, codes: list[str]) -> dict[str, str]:
    """Each meter once, with a dosing point that counts by it."""
    out: dict[str, str] = {}
    for code in codes:
        point = month.points_by_code.get(code)
        out.setdefault(point.meter if point else code, code)
    return out


def _figure(row: DayDose | None, field: str) -> Figure | None:
    return None if row is None else getattr(row, field)


def _twice_sd(figure: Figure | None) -> Figure | None:
    if figure is None or figure.value is None or figure.sd is None:
        return None
    return Figure(2 * figure.sd, figure.unit, None, figure.key)


def _places(month: Month, series: list[tuple[str, str, str, list[Figure | None], Figure | None]]) -> list[int]:
    """Decimals per column; used, its spread, design and need of one point share theirs."""
    show = month.measures
    out = []
    of_point: dict[str, list[float | None]] = {}
    for _, code, field, figures, _ in series:
        if field in ("used_mg_l", "design_mg_l", "need_mg_l"):
            of_point.setdefault(code, []).extend(figure.value for figure in figures if figure is not None)
    for unit, code, field, figures, _ in series:
        if code and field != "product_kg":
            out.append(measures.decimals(of_point[code], figures=4, most=3))
        else:
            known = [show.shown(figure.value, unit) for figure in figures if figure is not None]
            out.append(measures.decimals(known, figures=4 if field == "product_kg" else 5, most=3))
    return out


def _cell(
    month: Month, one: tuple[str, str, str, list[Figure | None], Figure | None], figure: Figure | None, places: int, mark: str
) -> Cell:
    if figure is None:
        return Cell(measures.UNKNOWN, None, "", mark)
    return measures.cell(month.measures.shown(figure.value, one[0]), places, key=figure.key, mark=mark)


def _mark(row: DayDose | None, field: str) -> str:
    """One letter beside the used dose: what a reader must know of that day."""
    if row is None or field != "used_mg_l":
        return ""
    if not row.expected:
        return "o"
    return ("w" if row.weak else "") + ("c" if row.corrected else "")


def _notes(month: Month, codes: list[str]) -> tuple[str, ...]:
    rows = month.doses
    names = []
    for code in codes:
        row = next(item for item in rows if item.dosing_point == code)
        point, product = month.points_by_code.get(code), month.products.get(row.product)
        names.append(
            f"{code}: {product.name if product else row.product}"
            + (f", {point.name}" if point else "")
            + f"; doses in mg/L {basis_words(row.dose_basis)}."
        )
    marks = {
        "w": "w: weak, the day's use is under 5 % of the vessel; the seven-day figure is the one judged.",
        "c": "c: rests on a corrected record.",
        "o": "o: not in service.",
    }
    used = {letter for row in rows for letter in _mark(row, "used_mg_l")}
    interpolated = len({row.day for row in rows if row.interpolated})
    notes = [" ".join(names), *(words for letter, words in marks.items() if letter in used)]
    if interpolated:
        notes.append(
            f"On {interpolated} of {len(month.days)} days a reading was interpolated to the start or end of the operating day."
        )
    long = [
        f"{month.day_words(day)} has {hours:g} hours" for day in month.days if (hours := month.calendar.hours_in(day)) != 24
    ]
    if long:
        notes.append("Change of clocks: " + "; ".join(long) + ".")
    notes.append(f"{measures.UNKNOWN}: not known; the reasons stand under Missing data. The month's dose is mass over volume.")
    return tuple(notes)


def _read(month: Month, site: str) -> bool:
    return any(key[0] == site for key in month.series)


def _water(month: Month, site: str, name: str) -> Table:
    """Each day's number of readings, lowest and highest; one column where there is never more than one reading a day."""
    columns = [Column("Day", number=False)]
    fields: list[tuple[str, dict[dt.date, list[Point]], int]] = []
    steady: dict[int, list[str]] = {}
    for parameter, points in values.of_site(month, site):
        by_day: dict[dt.date, list[Point]] = {}
        for point in points:
            if point.usable:
                by_day.setdefault(month.calendar.day_of(point.at), []).append(point)
        label, unit, places = values.printed(month, parameter)
        counts = {len(found) for found in by_day.values()}
        if max(counts, default=0) <= 1:
            columns.append(Column(label, unit))
            fields.append(("one", by_day, places))
            continue
        if len(counts) == 1:
            # The same number on every day needs no column of its own.
            steady.setdefault(counts.pop(), []).append(label)
        else:
            columns.append(Column("n", "", label))
            fields.append(("count", by_day, places))
        columns += [Column("lowest", unit, label), Column("highest", unit, label)]
        fields += [("lowest", by_day, places), ("highest", by_day, places)]
    body = []
    for day in month.days:
        cells = [Cell(month.day_words(day))]
        for what, by_day, places in fields:
            cells.append(_water_cell(month, what, by_day.get(day, []), places))
        body.append(tuple(cells))
    return Table(
        f"water-{site}",
        f"{site}, {name}: each operating day",
        tuple(columns),
        tuple(body),
        1,
        0,
        (
            *(f"{count} readings on each day read: {', '.join(labels)}." for count, labels in sorted(steady.items())),
            "Readings that are doubtful and not settled, or set aside, are left out here and counted under Water quality.",
        ),
    )


def _water_cell(month: Month, what: str, points: list[Point], places: int) -> Cell:
    if what == "count":
        return Cell(str(len(points)), float(len(points)))
    if not points:
        return Cell(measures.UNKNOWN)
    chosen = max(points, key=values.order) if what == "highest" else min(points, key=values.order)
    return values.cell(month, chosen, places)
