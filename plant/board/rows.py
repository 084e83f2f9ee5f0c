"""Rows of the board's tables and of their exports, from figures and readings."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from plant import clock
from plant.board import pictures, shown
from plant.board.tables import Cell
from plant.dosing.figures import DayDose, Figure, VesselStock
from plant.readings.queries import Point
from plant.scene import numbers
from plant.works import described
from plant.works.parameters import Parameter

DOSE_HEADER = (
    "operating_day", "dosing_point", "volume_ml", "product_kg", "active_kg", "used_mg_per_L", "used_sd_mg_per_L",
    "design_mg_per_L", "need_mg_per_L", "remarks",
)  # fmt: skip
STOCK_HEADER = (
    "vessel", "product", "book_kg", "dip_kg", "difference_kg", "difference_sd_kg", "active_kg", "usable_active_kg",
    "strength", "days_of_supply", "order_from", "order_by", "remarks",
)  # fmt: skip
READING_HEADER = (
    "site", "timestamp", "parameter", "value", "unit", "qualifier", "note", "sample", "statistic", "marks", "settled",
    "corrected", "ref",
)  # fmt: skip
BASES = {
    "g_per_L_available_chlorine": "g/L as Cl₂",
    "trade_pct": "trade %",
    "weight_pct_available_chlorine": "weight % as Cl₂",
    "weight_pct": "weight %",
}


def said_every_day(rows: Sequence[DayDose]) -> list[str]:
    """Remarks that each of many days carries: said once over the table rather than in every row of it."""
    spoken = [row.remarks for row in rows if row.remarks]
    if len(spoken) < 7:
        return []
    return [remark for remark in spoken[-1] if all(remark in other for other in spoken)]


def doses(
    rows: Iterable[DayDose],
    *,
    works: described.Works,
    now: dt.datetime,
    calendar: clock.Calendar,
    code: str,
    spread: bool,
    leave_out: Sequence[str] = (),
) -> list[dict[str, Any]]:
    """Rows of the table of days; ``spread`` shows two standard uncertainties beside the dose used.

    ``leave_out`` are remarks that stand elsewhere on the page.
    """

    def cell(one: Figure, *, with_spread: bool = False) -> Cell:
        words = str(shown.figure(one, works, spread=with_spread))
        return Cell(one.value, words, pictures.trail_path(code, one))

    return [
        {
            "day": Cell(row.day, shown.day(row.day, now, calendar)),
            "volume": cell(row.volume_ml),
            "product": cell(row.product_kg),
            "active": cell(row.active_kg),
            "used": cell(row.used_mg_l, with_spread=spread),
            "design": cell(row.design_mg_l),
            "need": cell(row.need_mg_l),
            "ratio": Cell(row.ratio, "" if row.ratio is None else f"{100 * row.ratio:.0f} %"),
            "remarks": "; ".join(remark for remark in row.remarks if remark not in leave_out),
            "corrected": row.corrected,
        }
        for row in rows
    ]


def dose_export(rows: Iterable[DayDose]) -> list[list[Any]]:
    """The columns of ``manage.py comparison``."""
    return [
        [
            row.day.isoformat(), row.dosing_point, row.volume_ml.value, row.product_kg.value, row.active_kg.value,
            row.used_mg_l.value, row.used_mg_l.sd, row.design_mg_l.value, row.need_mg_l.value, "; ".join(row.remarks),
        ]
        for row in rows
    ]  # fmt: skip


def stock(
    rows: Iterable[VesselStock],
    *,
    works: described.Works,
    names: Mapping[str, str],
) -> list[dict[str, Any]]:
    """Rows of the table of vessels."""

    def kg(value: float | None) -> Cell:
        return Cell(value, str(shown.amount(value, "kg", works)))

    out = []
    for row in rows:
        difference = kg(row.difference_kg)
        if row.difference_kg is not None and row.difference_sd_kg:
            value, unit = shown.in_units(row.difference_kg, "kg", works)
            spread, _ = shown.in_units(2 * row.difference_sd_kg, "kg", works)
            words = f"{numbers.with_spread(value, spread)} {shown.unit_name(unit)}"
            difference = Cell(row.difference_kg, words)
        strength = Cell(None, "not known")
        if row.strength is not None:
            basis = BASES.get(row.strength_basis, row.strength_basis)
            strength = Cell(row.strength, f"{row.strength:.1f} {basis}")
        out.append(
            {
                "vessel": names.get(row.vessel, row.vessel),
                "book": kg(row.book_kg),
                "dip": kg(row.dip_kg),
                "difference": difference,
                "active": kg(row.active_kg),
                "usable": kg(row.usable_active_kg),
                "strength": strength,
                "remarks": "; ".join(row.remarks),
            }
        )
    return out


def stock_export(rows: Iterable[VesselStock]) -> list[list[Any]]:
    """The columns of ``manage.py stock``."""
    return [
        [
            row.vessel, row.product, row.book_kg, row.dip_kg, row.difference_kg, row.difference_sd_kg, row.active_kg,
            row.usable_active_kg, row.strength, row.days_of_supply,
            row.order_from.isoformat() if row.order_from else None,
            row.order_by.isoformat() if row.order_by else None, "; ".join(row.remarks),
        ]
        for row in rows
    ]  # fmt: skip


def readings(
    points: Sequence[Point],
    *,
    works: described.Works,
    known: Mapping[str, Parameter],
    names: Mapping[str, str],
    now: dt.datetime,
    calendar: clock.Calendar,
    code: str,
) -> list[dict[str, Any]]:
    """Rows of the list of readings."""
    out = []
    for point in points:
        parameter = known.get(point.parameter)
        written = shown.reading(point, parameter, works)
        when = (
            shown.day(calendar.local(point.at).date(), now, calendar)
            if point.date_only
            else shown.moment(point.at, now, calendar)
        )
        out.append(
            {
                "at": Cell(point.at, when),
                "site": names.get(point.site, point.site),
                "parameter": parameter.label if parameter else point.parameter.replace("_", " "),
                "value": Cell(point.value, str(written), f"/w/{code}/reading/{point.ref}/"),
                "remarks": "; ".join(_reading_remarks(point)),
                "corrected": point.corrected,
            }
        )
    return out


def _reading_remarks(point: Point) -> list[str]:
    settled = {"stands": "looked at: stands", "set_aside": "looked at: set aside"}.get(point.settled, "")
    parts = [
        "corrected" if point.corrected else "",
        "doubtful: " + ", ".join(mark.replace("_", " ") for mark in point.marks) if point.marks else "",
        settled,
        "" if point.statistic == "reading" else point.statistic.replace("_", " "),
        f"sample {point.sample}" if point.sample else "",
        point.note,
    ]
    return [part for part in parts if part]


def reading_export(points: Iterable[Point], calendar: clock.Calendar) -> list[list[Any]]:
    """The columns of a record file, in canonical units, so that it can be brought in again elsewhere."""
    return [
        [
            point.site,
            f"{calendar.local(point.at):%Y-%m-%d}" if point.date_only else calendar.local(point.at).isoformat(),
            point.parameter,
            f"{point.qualifier}{point.text}" if point.text else "" if point.state == "not_taken" else point.typed,
            point.unit, point.qualifier, point.note, point.sample, point.statistic, " ".join(point.marks), point.settled,
            "yes" if point.corrected else "", point.ref,
        ]
        for point in points
    ]  # fmt: skip
