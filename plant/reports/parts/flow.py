"""Flow: what each meter counted in the month, its highest and lowest day, and the peak hour."""

from __future__ import annotations

import datetime as dt

from plant.reports import inactivation, measures
from plant.reports.month import Month
from plant.reports.parts import daily
from plant.reports.pdf.document import Cell, Column, Section, Table, Text

KEY, TITLE = "flow", "Flow"


def section(month: Month) -> Section:
    """One row a meter that doses are counted by."""
    meters = daily.meters_of(month, list(dict.fromkeys(row.dosing_point for row in month.doses)))
    if not meters:
        return Section(KEY, TITLE, (Text("No dosing point is stated, so no meter is counted by."),))
    show = month.measures
    columns = (
        Column("Meter", number=False),
        Column("month", show.label("ML")),
        Column("mean of a day", show.label("ML")),
        Column("volume", show.label("ML"), "highest day"),
        Column("on", group="highest day", number=False),
        Column("volume", show.label("ML"), "lowest day"),
        Column("on", group="lowest day", number=False),
        Column("days", "known/due"),
        Column("flow", show.label("m3/h"), "peak hour"),
        Column("on", group="peak hour", number=False),
        Column("rests on", group="peak hour", number=False, wraps=True),
    )
    rows = tuple(_row(month, meter, point) for meter, point in meters.items())
    note = (
        "The month is the sum of the days known. Peak hour: the highest recorded peak hourly flow; where none is recorded, the "
        "highest mean flow between two counts, which can only be lower than the true peak."
    )
    return Section(KEY, TITLE, (Table("flow", "", columns, rows, 1, 0, (note,)),))


def _row(month: Month, meter: str, point: str) -> tuple[Cell, ...]:
    show = month.measures
    days = [
        (row.day, volume, row.volume_ml.key)
        for row in month.doses
        if row.dosing_point == point and (volume := show.shown(row.volume_ml.value, "ML")) is not None
    ]
    peak, on, rests = _peak(month, meter)
    known = [volume for _, volume, _ in days]
    places = measures.decimals(known, figures=4, most=3)
    if not days:
        return (
            Cell(meter),
            *(Cell(measures.UNKNOWN) for _ in range(6)),
            Cell(f"0/{len(month.days)}"),
            *_peak_cells(month, peak, on, rests),
        )
    high, low = max(days, key=lambda item: item[1]), min(days, key=lambda item: item[1])
    total = sum(known)
    return (
        Cell(meter),
        measures.cell(total, measures.decimals([total], figures=5, most=3), key=_key(month, point)),
        measures.cell(total / len(known), places),
        measures.cell(high[1], places, key=high[2]),
        Cell(month.day_words(high[0])),
        measures.cell(low[1], places, key=low[2]),
        Cell(month.day_words(low[0])),
        Cell(f"{len(known)}/{len(month.days)}"),
        *_peak_cells(month, peak, on, rests),
    )


def _key(month: Month, point: str) -> str:
    return next((row.volume_ml.key for row in month.periods if row.dosing_point == point), "")


def _peak(month: Month, meter: str) -> tuple[float | None, dt.date | None, str]:
    """The month's highest hourly flow in m³/h, its day, and what it rests on."""
    found = []
    for day in month.days:
        start, end = month.calendar.bounds(day)
        value, words = inactivation.peak_flow(month, meter, start, end)
        if value is not None:
            found.append((value, day, words or "recorded peak hourly flow"))
    return max(found, key=lambda item: item[0]) if found else (None, None, "no flow and no two counts")


def _peak_cells(month: Month, peak: float | None, on: dt.date | None, rests: str) -> tuple[Cell, Cell, Cell]:
    shown = month.measures.shown(peak, "m3/h")
    when = measures.UNKNOWN if on is None else month.day_words(on)
    return measures.cell(shown, measures.decimals([shown], figures=4, most=1)), Cell(when), Cell(rests)
