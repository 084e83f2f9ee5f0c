"""The inactivation ratio of the day: lowest residual, lowest temperature, highest pH and peak flow of the day.

CT = residual x T10 at the end of each segment (40 CFR 141.74(b)(3)), over the CT required for the stated logs; the ratios
of the segments are added (40 CFR 141.74(b)(4)). Taking the worst of each grab reading is common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from chemistry import disinfection, errors, units
from plant.deviations import findings
from plant.deviations.evidence import Day
from plant.deviations.findings import Finding
from plant.deviations.rules import inactivation
from plant.works.described import ContactSegment, Limit

DISINFECTANTS = {
    "free_chlorine": "free chlorine",
    "chlorine_dioxide": "chlorine dioxide",
    "ozone": "ozone",
    "total_chlorine": "chloramines",
}


def inactivation_ratio(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """The day's total ratio below the stated minimum (1.0 where none is stated). A day that lacks a reading is not judged."""
    segments = [
        segment
        for segment in day.stated.contact_segments(day.moment)
        if limit.subject_kind != "contact_segment" or segment.code == limit.subject
    ]
    if not day.over or not segments or not day.in_service("works", ""):
        return
    ratios = [ratio_of(day, segment) for segment in segments]
    known = [ratio for ratio in ratios if ratio is not None]
    total = inactivation.total_ratio(known) if len(known) == len(ratios) else None
    low = float(limit.keys.get("low", 1.0))
    if total is None or inactivation.adequate(total, low):
        return
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        subject_kind="sample_point",
        subject=segments[-1].sample_point,
        since=day.start,
        value=f"{total:.3f}",
        limit=f"≥ {low:g}",
        sentence=f"inactivation ratio over {len(segments)} segment{'s' if len(segments) > 1 else ''}",
        size=total,
    )


def ratio_of(day: Day, segment: ContactSegment) -> float | None:
    """The ratio of one segment on the day; None where a reading is lacking or leaves the tables."""
    site = segment.sample_point
    parameter = next((name for name in DISINFECTANTS if day.points(site, name)), None)
    if parameter is None:
        return None
    residual = _extreme(day, site, parameter, lowest=True)
    temperature = _extreme(day, site, "temperature", lowest=True)
    ph = _extreme(day, site, "pH", lowest=False)
    flow = _peak_flow_m3_h(day, segment.peak_flow_meter)
    if residual is None or temperature is None or not flow or (ph is None and parameter == "free_chlorine"):
        return None
    if residual <= 0:
        return 0.0
    best: float | None = None
    try:
        time = float(disinfection.t10_min(segment.volume_m3, flow, segment.baffling_factor))
        ct = float(disinfection.ct_mg_min_l(residual, time))
        for organism, logs in (("Giardia", segment.required_log_giardia), ("virus", segment.required_log_virus)):
            if logs:
                required = float(
                    disinfection.required_ct_mg_min_l(organism, DISINFECTANTS[parameter], logs, temperature, ph, residual)
                )
                best = ct / required if best is None else min(best, ct / required)
    except errors.ChemistryError:
        return None
    return best


def _extreme(day: Day, site: str, parameter: str, *, lowest: bool) -> float | None:
    """The lowest or highest usable value of the day; below detection counts as nothing."""
    found = [
        0.0 if point.qualifier == "<" else point.value
        for point in day.points(site, parameter)
        if point.usable and point.value is not None
    ]
    return (min if lowest else max)(found) if found else None


def _peak_flow_m3_h(day: Day, meter: str) -> float | None:
    """The highest peak hourly flow read; without one, the highest mean flow between two counts, which is less."""
    read = [point.value for point in day.points(meter, "peak_hourly_flow") if point.usable and point.value is not None]
    if read:
        return max(read)
    stated = day.stated.value("meter", meter, day.moment)
    if stated is None:
        return None
    counts = [point for point in day.points(meter, "totaliser", days_back=1) if point.usable and point.value is not None]
    flows = []
    for earlier, later in pairwise(counts):
        hours = (later.at - earlier.at).total_seconds() / 3600
        passed = (later.value or 0.0) - (earlier.value or 0.0)
        if hours > 0 and passed > 0 and later.at > day.start:
            flows.append(float(units.convert(passed, stated["unit"], "m3")) / hours)
    return max(flows) if flows else None
