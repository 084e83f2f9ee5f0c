"""How readings are ordered, printed and counted, the same in every section."""

from __future__ import annotations

from plant.readings.queries import LATE, Point
from plant.reports import measures
from plant.reports.month import Month
from plant.reports.pdf.document import Cell

LATE_HOURS = int(LATE.total_seconds() // 3600)
STATISTICS = {"reading": "", "day_min": "recorder's minimum", "day_max": "recorder's maximum", "day_mean": "recorder's mean"}


def printed(month: Month, parameter: str) -> tuple[str, str, int]:
    """Label, printed unit and decimals of a parameter, or of ``parameter|statistic`` of a recorder."""
    name, _, statistic = parameter.partition("|")
    known = month.parameters.get(name)
    label = known.label if known else name.replace("_", " ")
    if statistic:
        label += f", {STATISTICS.get(statistic, statistic)}"
    if known is None:
        return label, "", 2
    return label, month.measures.label(known.unit), known.decimals


def in_sentence(label: str) -> str:
    """A label in the middle of a sentence: pH and E. coli stay as they are."""
    return label if label[1:2].isupper() or label[1:2] == "." else label[:1].lower() + label[1:]


def of_site(month: Month, site: str) -> list[tuple[str, list[Point]]]:
    """The site's readings by parameter and statistic, in the order in which parameters are known."""
    order = {name: number for number, name in enumerate(month.parameters)}
    out: dict[str, list[Point]] = {}
    for (where, parameter), points in month.series.items():
        if where != site:
            continue
        for point in points:
            key = parameter if point.statistic == "reading" else f"{parameter}|{point.statistic}"
            out.setdefault(key, []).append(point)
    return sorted(out.items(), key=lambda item: (order.get(item[0].partition("|")[0], len(order)), item[0]))


def order(point: Point) -> tuple[float, int]:
    """Ascending; below a bound stands before the bound itself, above it after."""
    value = point.value if point.value is not None else 0.0
    return value, {"<": -1, ">": 1}.get(point.qualifier, 0)


def cell(month: Month, point: Point, places: int) -> Cell:
    """A reading as printed: its qualifier, its value in the works' units, and its own trail."""
    unit = month.parameters[point.parameter].unit if point.parameter in month.parameters else point.unit
    value = month.measures.shown(point.value, unit)
    digits = places if value is not None else 0
    if point.text and value == point.value:
        # As many decimals as were read, where that is more.
        digits = max(digits, min(len(point.text.partition(".")[2].rstrip("0")), 4))
    return measures.cell(value, digits, key=f"reading:{point.ref}", prefix=point.qualifier)


def is_late(month: Month, point: Point) -> bool:
    """Entered more than a day after it was taken."""
    recorded = month.recorded.get(int(point.ref.partition(".")[0]))
    return recorded is not None and (recorded - point.at).total_seconds() > LATE_HOURS * 3600
