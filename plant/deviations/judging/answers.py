"""Drift seen in the water: the reading that answers to a dose has moved, and the dose has not."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Iterator
from statistics import median

from plant.deviations import clues, defaults, findings
from plant.deviations.evidence import DOSE_DAYS, Day
from plant.deviations.findings import Finding
from plant.deviations.judging import limits
from plant.deviations.rules import drift, response
from plant.dosing.need import RESIDUAL_OF
from plant.works.described import DosingPoint, Limit, Product
from plant.works.stated import NotStated

RARER = 8.0
"""Measured on made-up series with seasons and memory: what is learnt from four weeks of readings makes alarms that much
more frequent than the table of thresholds says."""


def drift_of_answer(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """The day's median of the answering reading against the weeks before. Only of a day that is over."""
    if limit.subject_kind != "dosing_point" or not day.over or not day.all_day("dosing_point", limit.subject):
        return
    try:
        point = day.stated.dosing_point(limit.subject, day.moment)
        product = day.stated.product(point.product, day.moment)
    except NotStated:
        return
    name = _own_answer(day, point)
    if not name or not point.sample_point:
        return
    medians = clues.daily_medians(day, point.sample_point, name, min(DOSE_DAYS, response.MOST_DAYS + 4))
    days = sorted(medians)
    if not days or days[-1] != day.day:
        return
    values = [medians[on] for on in days]
    if product.chemical in RESIDUAL_OF:
        values = _less_the_dose(day, point, days, values)
    mean_days = float(limit.keys.get("mean_days_between_false_alarms", defaults.FALSE_ALARM_DAYS))
    found = response.watch(values, mean_days_between_false_alarms=RARER * mean_days)
    if found is None or not found[0].on:
        return
    shift, size = found
    if abs(size) < _material(day, point, name):
        return
    began = days[max(len(days) - response.MOST_DAYS, 0) + shift.since + 1]
    unit = limits.unit_words(day.stated, day.moment, point.sample_point, name)
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        parameter=name,
        since=day.of.calendar.start_of(began),
        value=f"{size:+.3g}{unit} since {began.isoformat()}",
        limit=f"no lasting change of {name} against the dose",
        sentence=(
            f"{name.replace('_', ' ')} at {point.sample_point} moved by {size:+.3g}{unit}, and the dose does not explain it; "
            f"statistic {shift.statistic:.1f}, threshold {shift.threshold:.2f}"
        ),
        size=size * answer_sign(point, product),
    )


def _material(day: Day, point: DosingPoint, name: str) -> float:
    """How far the reading must have moved to matter: 0.15 of a pH unit, a twelfth of the design dose for a residual, 8 % of
    itself otherwise. Smaller changes are real and nobody’s business (common practice, no source).
    """
    if name == "pH":
        return 0.15
    design = day.stated.design_dose_mg_l(point.code, day.moment)
    if design and name in RESIDUAL_OF.values():
        return design / 12
    known = clues.daily_medians(day, point.sample_point or "", name, 20).values()
    return 0.08 * abs(median(known)) if known else math.inf


def answer_sign(point: DosingPoint, product: Product) -> int:
    """+1 where more of the product raises the reading, -1 where it lowers it."""
    return clues.response_of(point, product)[1]


def _own_answer(day: Day, point: DosingPoint) -> str:
    """The reading that answers to this point; empty where there is none, or where an earlier point has the same one."""
    for other in day.stated.dosing_points(day.moment):
        try:
            name, _ = clues.response_of(other, day.stated.product(other.product, day.moment))
        except NotStated:
            continue
        if other.code == point.code:
            return name
        mine = clues.response_of(point, day.stated.product(point.product, day.moment))[0]
        if (other.sample_point, name) == (point.sample_point, mine):
            return ""
    return ""


def _less_the_dose(day: Day, point: DosingPoint, days: list[dt.date], values: list[float]) -> list[float]:
    """The residual less what the dose's own movement explains, as far as its gauges can be trusted day by day."""
    rows = {row.day: row for row in day.rows(point.code)}
    known = [row for row in rows.values() if row.used_mg_l.value is not None and row.design_mg_l.value]
    if not known:
        return values
    design = median(row.design_mg_l.value or 0.0 for row in known)
    gauge = median((row.used_mg_l.sd or 0.0) for row in known) / design
    share = drift.PRIOR_SD**2 / (drift.PRIOR_SD**2 + gauge**2)
    used = [rows[on].used_mg_l.value if on in rows else None for on in days]
    usable = [value if value is not None and math.isfinite(value) and value >= 0 else None for value in used]
    return response.freed(values, usable, design, share)
