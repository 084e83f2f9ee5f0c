"""Kinds of limit on readings: bound, held below or above, share of the month, running mean, rate of change, stuck."""

from __future__ import annotations

import calendar as calendars
import datetime as dt
import math
from collections.abc import Iterator

from chemistry import errors, vessels
from plant.deviations import findings
from plant.deviations.evidence import Day, observed
from plant.deviations.findings import Finding
from plant.deviations.judging import limits
from plant.deviations.rules import bounds, durations, running, shape, shares
from plant.deviations.rules.observed import Breach
from plant.readings.queries import Point
from plant.works.described import Limit, Vessel
from plant.works.stated import NotStated

LONGEST_HELD_DAYS = 30
STUCK_DAYS = 12


def _finding(day: Day, limit: Limit, ref: str, breach: Breach, **rest: object) -> Finding:
    unit = limits.unit_words(day.stated, day.moment, limit.subject, limit.parameter) if limit.parameter else ""
    return findings.of_limit(
        limit,
        ref,
        day.day,
        since=breach.since,
        value=f"{breach.value}{unit}",
        limit=f"{breach.limit}{unit}",
        sentence=breach.sentence,
        refs=breach.refs,
        until=breach.until,
        **rest,
    )


def bound(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Each reading of the day against the limit in force when it was taken."""
    values = observed(day.points(limit.subject, limit.parameter))
    versions = limits.versions(day.stated, limit, day.start, day.until)
    if len(versions) == 1 and versions[0][1] is None:
        versions = [(day.start, limit)]
    spans = zip(versions, [*[at for at, _ in versions[1:]], day.until], strict=True)
    for (since, held), until in spans:
        if held is None or held.kind != "bound":
            continue
        test = limits.bound(day.stated, since, held)
        inside = [item for item in values if since <= item.at < until]
        if test is not None and inside:
            for breach in bounds.judge(inside, test):
                yield _finding(day, held, ref, breach)


def held(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Times outside that lasted longer than stated and reach into this day."""
    level = limits.number(day.stated, day.moment, limit, "limit")
    hours = float(limit.keys.get("hours", 0))
    if level is None:
        return
    back = min(math.ceil(hours / 24) + 3, LONGEST_HELD_DAYS)
    points = [point for point in day.points(limit.subject, limit.parameter, days_back=back) if not point.date_only]
    for breach in durations.held(
        observed(points),
        limit=level,
        hours=hours,
        low=limit.kind == "held_below",
        until=day.until,
        rounds=limits.rounds(day.stated, day.moment),
    ):
        # Singled out from the unit: what is found is a time.
        if breach.until is None or breach.until > day.start:
            yield findings.of_limit(
                limit,
                ref,
                day.day,
                since=breach.since,
                value=breach.value,
                limit=breach.limit,
                sentence=breach.sentence,
                refs=breach.refs,
                until=breach.until,
            )


def share_of_month(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """At the end of the month: the share of its measurements that meet the limit, by count."""
    if not _last_of_month(day.day) or not day.over:
        return
    level = limits.number(day.stated, day.moment, limit, "limit")
    if level is None:
        return
    points = day.points(limit.subject, limit.parameter, days_back=day.day.day - 1)
    values = observed(points)
    test = bounds.Bound(high=level, rounds=limits.rounds(day.stated, day.moment))
    share = shares.share_met([bounds.above(item, test) for item in values])
    pct = limit.keys.get("at_least_pct", 95)
    if share.at_least(pct) is False:
        over = [item for item in values if bounds.above(item, test) is not False]
        yield findings.of_limit(
            limit,
            ref,
            day.day,
            since=min(item.at for item in over),
            value=f"{share.met} of {share.of} ({share.pct:.2f} %)",
            limit=f"at least {pct:g} % ≤ {level}",
            sentence=f"{len(over)} of {share.of} measurements of the month above {level}",
            refs=tuple(item.ref for item in over)[:200],
        )


def running_mean(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """At the end of each quarter (of each month, where the months are no whole quarters): the mean of the last months."""
    months = int(limit.keys.get("months", 12))
    by_quarter = months % 3 == 0
    if not day.over or not _last_of_month(day.day) or (by_quarter and day.day.month % 3):
        return
    means = _monthly_means(day, limit, months)
    parts = [running.quarter_mean(means[n : n + 3]) for n in range(0, months, 3)] if by_quarter else means
    while parts and parts[0] is None:
        parts.pop(0)
    found = [value for value in parts if value is not None]
    if not found:
        return
    total = months // 3 if by_quarter else months
    missing = len(parts) - len(found)
    mean = sum(found) / len(found)
    high, low = limit.keys.get("high"), limit.keys.get("low")
    word = "quarters" if by_quarter else "months"
    words = f"mean of {len(found)} of {total} {word}" + (f", {missing} without a sample" if missing else "")
    complete = len(parts) == total
    unit = limits.unit_words(day.stated, day.moment, limit.subject, limit.parameter)
    start = _month_start(day, months)
    if high is not None:
        level = float(limits.number(day.stated, day.moment, limit, "high") or 0)
        certain = sum(found) / total > level
        if (complete and mean > level) or (not complete and certain):
            early = "" if complete else "; certain already, whatever is still to come (40 CFR 141.133(a)(3))"
            yield findings.of_limit(
                limit, ref, day.day, since=start, value=f"{mean:.4g}{unit}", limit=f"≤ {high}{unit}", sentence=words + early
            )
    if low is not None and complete:
        level = float(limits.number(day.stated, day.moment, limit, "low") or 0)
        if mean < level:
            yield findings.of_limit(
                limit, ref, day.day, since=start, value=f"{mean:.4g}{unit}", limit=f"≥ {low}{unit}", sentence=words
            )


def _last_of_month(day: dt.date) -> bool:
    return day.day == calendars.monthrange(day.year, day.month)[1]


def _months(day: dt.date, count: int) -> list[tuple[int, int]]:
    last = day.year * 12 + day.month - 1
    return [divmod(index, 12) for index in range(last - count + 1, last + 1)]


def _month_start(day: Day, months: int) -> dt.datetime:
    year, month = _months(day.day, months)[0]
    return day.of.calendar.start_of(dt.date(year, month + 1, 1))


def _monthly_means(day: Day, limit: Limit, months: int) -> list[float | None]:
    start = _month_start(day, months)
    points = day.of.far_back(limit.subject, limit.parameter, start, day.until)
    censored = str(limits.works_value(day.stated, day.moment).get("censored_in_means", "half"))
    by_month: dict[tuple[int, int], list[float]] = {}
    for item in observed(points):
        on = day.of.calendar.day_of(item.at)
        value = bounds.substituted(item.value, item.qualifier, "as_bound" if censored == "full" else censored)
        by_month.setdefault((on.year, on.month - 1), []).append(float(value))
    return [sum(by_month[key]) / len(by_month[key]) if key in by_month else None for key in _months(day.day, months)]


def rate_of_change(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Neighbouring readings too far apart for the time between them; the later one belongs to this day."""
    per_hour = limits.number(day.stated, day.moment, limit, "per_hour")
    if per_hour is None:
        return
    values = observed(day.points(limit.subject, limit.parameter, days_back=2), "reading")
    hits = [item for item in shape.rate_of_change(values, per_hour=per_hour) if item.until and item.until >= day.start]
    if hits:
        worst = max(hits, key=lambda item: abs(float(item.value.split(" ", 1)[0])))
        yield _finding(day, limit, ref, worst)


def stuck(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Readings that no longer move while something should be moving them."""
    need = int(limit.keys.get("readings", 4))
    for subject_kind, subject, parameter in _watched(day, limit):
        points = [point for point in day.points(subject, parameter, days_back=STUCK_DAYS) if point.usable]
        values = observed(points, "reading")
        for breach in shape.stuck(values, readings=need):
            last = next(item for item in reversed(values) if item.ref == breach.refs[-1])
            if last.at < day.start or not _should_move(day, subject_kind, subject, breach, points):
                continue
            yield findings.of_limit(
                limit,
                ref,
                day.day,
                subject_kind=subject_kind,
                subject=subject,
                parameter=parameter,
                since=breach.since,
                value=breach.value,
                limit=breach.limit,
                sentence=breach.sentence,
                refs=breach.refs,
                until=breach.until,
            )


def _watched(day: Day, limit: Limit) -> list[tuple[str, str, str]]:
    """The series a limit of kind stuck is about: a dosing point's are the counts it is reckoned from."""
    if limit.parameter:
        return [(limit.subject_kind, limit.subject, limit.parameter)]
    if limit.subject_kind == "vessel":
        return [("vessel", limit.subject, name) for name in ("level", "weight")]
    if limit.subject_kind == "meter":
        return [("meter", limit.subject, "totaliser")]
    if limit.subject_kind == "dosing_point":
        return [("meter", code, "totaliser") for code in own_meters(day, limit.subject)]
    return [(limit.subject_kind, site, parameter) for site, parameter in day.of.points if site == limit.subject]


def own_meters(day: Day, dosing_point: str) -> list[str]:
    """The meters that this dosing point is the first to use, so that what is shared is judged once."""
    taken: set[str] = set()
    for point in day.stated.dosing_points(day.moment):
        mine = [code for code in (point.meter, point.feed_meter) if code and code not in taken]
        if point.code == dosing_point:
            return mine
        taken.update(mine)
    return []


def _should_move(day: Day, subject_kind: str, subject: str, breach: Breach, points: list[Point]) -> bool:
    """Whether what is measured must have moved by more than the gauge can hide."""
    if subject_kind == "sample_point":
        return day.in_service("works", subject)
    feeds = [
        point
        for point in day.stated.dosing_points(day.moment)
        if subject in point.vessels or subject in (point.meter, point.feed_meter)
    ]
    if not feeds or not all(day.all_day("dosing_point", point.code) for point in feeds):
        return False
    if subject_kind == "meter":
        return True
    try:
        vessel = day.stated.vessel(subject, day.moment)
    except NotStated:
        return False
    times = [point.at for point in points if point.ref in breach.refs]
    days = (max(times) - min(times)) / dt.timedelta(days=1)
    used = sum(_usual_kg(day, point.code) / len(point.vessels) for point in feeds) * days
    return used > 3 * gauge_kg(day, vessel, points[-1])


def _usual_kg(day: Day, dosing_point: str) -> float:
    found = sorted(row.product_kg.value for row in day.rows(dosing_point)[-21:] if row.product_kg.value)
    return found[len(found) // 2] if found else 0.0


def gauge_kg(day: Day, vessel: Vessel, point: Point) -> float:
    """The standard uncertainty of one reading, or its last digit where that is coarser, kg of product."""
    digit = 10.0 ** -max(len(point.text.partition(".")[2]), 0)
    if vessel.on_scale:
        return max(float(vessel.form.get("weight_sd_kg") or 0.0), digit)
    product = day.stated.product(vessel.product, day.moment)
    try:
        level = float(vessels.level_from_pct(vessel.form, point.value)) if point.unit == "%" else float(point.value or 0.0)
        litres = float(vessels.dvolume_dlevel_l_per_m(vessel.form, level))
    except errors.ChemistryError:
        return math.inf
    coarse = digit * vessels.full_level_m(vessel.form) / 100 if point.unit == "%" else digit
    return max(vessel.level_sd_m, coarse) * litres * (product.density_kg_per_L or 1.0)
