"""The inactivation ratio of each operating day, segment by segment, from the day's readings on the safe side.

CT = residual x T10 with the residual, pH and temperature at the end of the segment (40 CFR 141.74(b)(3)); ratio = logs
achieved over logs required, the lesser of Giardia and virus where both are required. With grab readings the lowest
residual, highest pH and lowest temperature of the day are used, whenever the peak flow was: common practice, no source.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from itertools import pairwise

from chemistry import disinfection, errors, units
from plant.readings.queries import Point
from plant.reports.month import Month
from plant.works.described import ContactSegment

DISINFECTANTS = {
    "free_chlorine": "free chlorine",
    "chlorine_dioxide": "chlorine dioxide",
    "ozone": "ozone",
    "total_chlorine": "chloramines",
}


@dataclass(frozen=True)
class SegmentDay:
    """One segment on one day; ``ratio`` None where something is lacking, which ``remark`` names."""

    segment: str
    residual_mg_l: float | None = None
    t10_min: float | None = None
    temperature_c: float | None = None
    ph: float | None = None
    peak_flow_m3_h: float | None = None
    ct_mg_min_l: float | None = None
    ct_required_mg_min_l: float | None = None
    ratio: float | None = None
    remark: str = ""
    evidence: tuple[str, ...] = ()


def days(month: Month) -> dict[dt.date, list[SegmentDay]]:
    """Every day of the month with each stated segment."""
    segments = month.stated.contact_segments(month.at)
    return {day: [_one(month, segment, day) for segment in segments] for day in month.days}


def total(results: list[SegmentDay]) -> float | None:
    """The sum over segments (40 CFR 141.74(b)(4)); None where one is unknown."""
    ratios = [result.ratio for result in results]
    known = [ratio for ratio in ratios if ratio is not None]
    return sum(known) if ratios and len(known) == len(ratios) else None


def notes(month: Month, found: dict[dt.date, list[SegmentDay]]) -> tuple[str, ...]:
    """How it was computed, and which table cells nobody has opened."""
    evidence = sorted({words for results in found.values() for result in results for words in result.evidence})
    return (
        "Lowest residual, highest pH and lowest temperature of the day, with the day's peak flow; required CT from the "
        "table row on the "
        "safe side (40 CFR 141.74(b)). The ratio is logs achieved over logs required and is never rounded up to 1.",
        *evidence,
    )


def _one(month: Month, segment: ContactSegment, day: dt.date) -> SegmentDay:
    start, end = month.calendar.bounds(day)
    if end > month.now:
        return SegmentDay(segment.code, remark="the day is not over")
    lacking = []
    parameter = next((name for name in DISINFECTANTS if _within(month, segment.sample_point, name, start, end)), None)
    residual = _extreme(month, segment.sample_point, parameter, start, end, lowest=True) if parameter else None
    temperature = _extreme(month, segment.sample_point, "temperature", start, end, lowest=True)
    acidity = _extreme(month, segment.sample_point, "pH", start, end, lowest=False)
    flow, flow_words = peak_flow(month, segment.peak_flow_meter, start, end)
    if residual is None:
        lacking.append("residual")
    if temperature is None:
        lacking.append("temperature")
    if acidity is None and parameter == "free_chlorine":
        lacking.append("pH")
    if not flow:
        lacking.append("peak flow")
    known = SegmentDay(segment.code, residual, None, temperature, acidity, flow)
    if parameter is None or residual is None or temperature is None or not flow or lacking:
        return SegmentDay(
            segment.code,
            residual,
            None,
            temperature,
            acidity,
            flow,
            remark=f"no {', '.join(lacking)} at {segment.sample_point}",
        )
    if residual <= 0:
        return SegmentDay(segment.code, residual, None, temperature, acidity, flow, 0.0, None, 0.0, "no residual")
    try:
        return _computed(segment, DISINFECTANTS[parameter], known, flow_words)
    except errors.ChemistryError as problem:
        return SegmentDay(segment.code, residual, None, temperature, acidity, flow, remark=str(problem))


def _computed(segment: ContactSegment, disinfectant: str, known: SegmentDay, flow_words: str) -> SegmentDay:
    if known.residual_mg_l is None or known.temperature_c is None or known.peak_flow_m3_h is None:
        raise ValueError("a segment is computed from a residual, a temperature and a flow")
    t10 = float(disinfection.t10_min(segment.volume_m3, known.peak_flow_m3_h, segment.baffling_factor))
    ct = float(disinfection.ct_mg_min_l(known.residual_mg_l, t10))
    wanted = [("Giardia", segment.required_log_giardia), ("virus", segment.required_log_virus)]
    best: tuple[float, float] | None = None
    evidence: list[str] = []
    for organism, logs in wanted:
        if not logs:
            continue
        where = (known.temperature_c, known.ph, known.residual_mg_l)
        required = float(disinfection.required_ct_mg_min_l(organism, disinfectant, logs, *where))
        evidence += [
            f"{organism} by {disinfectant}: {cell.evidence}"
            for cell in disinfection.cells_behind(organism, disinfectant, logs, *where)
        ]
        if required > 0 and (best is None or ct / required < best[0]):
            best = (ct / required, required)
    remark = flow_words if best else "; ".join(filter(None, (flow_words, "no required logs are stated")))
    return SegmentDay(
        segment.code,
        known.residual_mg_l,
        t10,
        known.temperature_c,
        known.ph,
        known.peak_flow_m3_h,
        ct,
        best[1] if best else None,
        best[0] if best else None,
        remark,
        tuple(dict.fromkeys(evidence)),
    )


def _extreme(month: Month, site: str, parameter: str, start: dt.datetime, end: dt.datetime, *, lowest: bool) -> float | None:
    """The lowest or highest usable value of the day; below detection counts as zero."""
    found = [
        0.0 if point.qualifier == "<" else point.value
        for point in _within(month, site, parameter, start, end)
        if point.usable and point.value is not None
    ]
    return (min if lowest else max)(found) if found else None


def _within(month: Month, site: str, parameter: str, start: dt.datetime, end: dt.datetime) -> list[Point]:
    return [point for point in month.series.get((site, parameter), []) if start <= point.at < end]


def peak_flow(month: Month, meter: str, start: dt.datetime, end: dt.datetime) -> tuple[float | None, str]:
    """The day's highest ``peak_hourly_flow``; without one, the highest mean flow between two counts, which is less."""
    read = [
        point.value
        for point in _within(month, meter, "peak_hourly_flow", start, end)
        if point.usable and point.value is not None
    ]
    if read:
        return max(read), ""
    stated = month.stated.value("meter", meter, start)
    if stated is None:
        return None, ""
    counts = [
        point
        for point in month.counts_with_day_before(meter)
        if start - dt.timedelta(days=1) <= point.at < end and point.usable and point.value is not None
    ]
    flows = [
        flow
        for earlier, later in pairwise(counts)
        if later.at > start and (flow := _mean_flow(earlier, later, stated["unit"])) is not None
    ]
    return (max(flows), "peak from totaliser steps") if flows else (None, "")


def _mean_flow(earlier: Point, later: Point, unit: str) -> float | None:
    hours = (later.at - earlier.at).total_seconds() / 3600
    change = (later.value or 0.0) - (earlier.value or 0.0)
    return float(units.convert(change, unit, "m3")) / hours if hours > 0 and change > 0 else None
