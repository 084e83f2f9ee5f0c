"""Kinds of limit on doses: against design, against need, the certified maximum, drift."""

from __future__ import annotations

import dataclasses
import datetime as dt
import math
from collections.abc import Iterator, Sequence

from plant.deviations import clues, defaults, findings
from plant.deviations.evidence import Day
from plant.deviations.findings import Finding
from plant.deviations.rules import doses, drift
from plant.dosing.figures import DayDose
from plant.works.described import DosingPoint, Limit
from plant.works.stated import NotStated

LEAST_RATIO, MOST_RATIO = doses.PLAUSIBLE
"""Outside of these a day is no drift; the limit against design speaks of it."""
STATED_SDS = 2.0
DEFAULT_SDS = 3.5
MATERIAL = 0.04
"""A lasting change of less than 4 % may be sure and is still nobody's business (common practice, no source)."""
OF_ACCEPTED = 0.8
"""The dose's share of the false alarms that the works accepts of a point; the rest is left to the reading that answers."""
CALIBRATION_SD = 0.02
"""What a feeder's calibration leaves as a standing difference from design (common practice, no source)."""


def _dosed(row: DayDose) -> doses.Dosed:
    return doses.Dosed(
        row.used_mg_l.value,
        row.used_mg_l.sd,
        row.design_mg_l.value,
        row.need_mg_l.value,
        row.volume_ml.value,
        row.active_kg.value,
        row.product_kg.value,
        row.weak,
    )


def newest(day: Day, code: str) -> list[DayDose]:
    """The point's days up to each that became known today, as long as use was expected on it: one list a day."""
    rows = day.rows(code)
    if not rows or not day.newly_known(rows[-1]) or not rows[-1].expected:
        return []
    return rows


def dose_vs(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Used against designed or needed."""
    if limit.subject_kind != "dosing_point" or not day.in_service("dosing_point", limit.subject):
        return
    rows = newest(day, limit.subject)
    if not rows:
        return
    to = "design" if limit.kind == "dose_vs_design" else "need"
    found = doses.difference([_dosed(row) for row in rows], to=to)
    pct = float(limit.keys.get("pct", defaults.DOSE_PCT))
    sds = DEFAULT_SDS if defaults.is_default(limit.code) else STATED_SDS
    back = clues.given_back(rows[-2:])
    if (found is None or not doses.off_by(found, pct=pct, sds=sds)) and rows[-1].weak and back:
        # A day may be weak only because a wrong reading took its use away: the day before had it.
        found = doses.difference([dataclasses.replace(_dosed(rows[-1]), weak=False)], to=to)
    if found is None or not doses.off_by(found, pct=pct, sds=sds):
        return
    span = f"over {found.days} days" if found.days > 1 else f"on {rows[-1].day.isoformat()}"
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        since=day.of.calendar.start_of(rows[-1].day),
        value=f"{found.used:.4g} mg/L ({found.pct:+.1f} %)",
        limit=f"{found.reference:.4g} mg/L ± {pct:g} %",
        sentence=f"used {found.used:.4g} mg/L {span}, {abs(found.pct):.1f} % {found.word} {to}",
        # What a wrong reading took from one day and gave to the next is one thing, off to neither side.
        size=None if back else found.pct / 100,
    )


def certified_maximum(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Dose as product over at most seven days against the certificate of the product."""
    days = int(limit.keys.get("days", defaults.MAXIMUM_DAYS))
    points = [
        point
        for point in day.stated.dosing_points(day.moment)
        if (limit.subject_kind == "dosing_point" and point.code == limit.subject)
        or (limit.subject_kind == "product" and point.product == limit.subject)
    ]
    if not points or not any(day.in_service("dosing_point", point.code) for point in points):
        return
    try:
        high = day.stated.product(points[0].product, day.moment).certified_maximum_mg_per_L
    except NotStated:
        return
    means = []
    for point in points:
        rows = newest(day, point.code)
        mean = doses.product_over([_dosed(row) for row in rows], days=days) if rows else None
        if mean is not None:
            means.append((point.code, *mean))
    # Two points of one product dose the same water: what they add is added.
    total = sum(mean for _, mean, _ in means)
    if high is None or total <= high:
        return
    counted = min(count for _, _, count in means)
    first = day.day - dt.timedelta(days=days - 1)
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        since=day.of.calendar.start_of(first),
        value=f"{total:.4g} mg/L as product",
        limit=f"≤ {high:g} mg/L as product over {days} days",
        sentence=f"mean over {counted} days with data, mass ÷ volume",
        size=total / high - 1,
    )


def drift_of_dose(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """A lasting change of the dose, however small, that chance does not explain."""
    if limit.subject_kind != "dosing_point" or not day.in_service("dosing_point", limit.subject):
        return
    rows = newest(day, limit.subject)
    if not rows or rows[-1].used_mg_l.value is None:
        return
    try:
        point = day.stated.dosing_point(limit.subject, day.moment)
        series, kept, lasting = series_of(day, point, rows)
    except NotStated:
        return
    if not kept or kept[-1].day != rows[-1].day:
        return
    mean_days = float(limit.keys.get("mean_days_between_false_alarms", defaults.FALSE_ALARM_DAYS))
    shift = drift.watch(series, mean_days_between_false_alarms=mean_days / OF_ACCEPTED, lasting_sd=lasting)
    if shift is None or not shift.on or abs(shift.size) < MATERIAL:
        return
    began = kept[shift.since].day
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        since=day.of.calendar.start_of(began),
        value=f"{shift.pct:+.1f} % since {began.isoformat()}",
        limit=f"no lasting change (one false alarm in {mean_days:g} days accepted)",
        sentence=(
            f"used is {abs(shift.pct):.1f} % {'above' if shift.size > 0 else 'below'} what it was against design; "
            f"statistic {shift.statistic:.1f}, threshold {shift.threshold:.2f}"
        ),
        size=shift.size,
    )


def series_of(day: Day, point: DosingPoint, rows: Sequence[DayDose]) -> tuple[list[drift.Day], list[DayDose], float]:
    """The days the drift test looks at, their rows, and the standing difference that is to be expected."""
    product = day.stated.product(point.product, day.moment)
    meter = day.stated.meter(point.meter, day.moment).accuracy_pct / 100
    strength = 0.0 if product.dose_basis == "product" else product.strength_sd_pct / 100
    anew = _restated(day, point, rows)
    kept: list[DayDose] = []
    series: list[drift.Day] = []
    for row in rows:
        design, used = row.design_mg_l.value, row.used_mg_l.value
        if used is None or not design or not row.expected or not LEAST_RATIO <= used / design <= MOST_RATIO:
            continue
        lasting = used * math.hypot(meter, strength)
        gauge = math.sqrt(max((row.used_mg_l.sd or 0.0) ** 2 - lasting**2, 0.0)) / design
        follows = bool(kept) and kept[-1].day == row.day - dt.timedelta(days=1)
        start, end = day.of.calendar.bounds(row.day)
        reset = any(start <= at < end for at in anew) or (
            not follows and any(kept[-1].day < day.of.calendar.day_of(at) <= row.day for at in anew if kept)
        )
        kept.append(row)
        series.append(drift.Day(used / design - 1, gauge, follows, reset))
    return series, kept, math.sqrt(meter**2 + strength**2 + CALIBRATION_SD**2)


def _restated(day: Day, point: DosingPoint, rows: Sequence[DayDose]) -> list[dt.datetime]:
    """When something that the ratio rests on was stated anew within the rows."""
    if not rows:
        return []
    start = day.of.calendar.start_of(rows[0].day)
    subjects = [
        ("design_dose", point.code),
        ("dosing_point", point.code),
        ("product", point.product),
        ("meter", point.meter),
        *(("vessel", code) for code in point.vessels),
    ]
    return [
        item.effective_from
        for kind, subject in subjects
        for item in day.stated.history(kind, subject)
        if start < item.effective_from <= day.until
    ]
