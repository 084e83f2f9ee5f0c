"""Is it back inside? By the newest reading after the last one outside, or by the newest day that could be judged."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from plant.deviations import judging
from plant.deviations.evidence import Evidence, gather, observed
from plant.deviations.judging import limits
from plant.deviations.queries import DeviationView
from plant.deviations.rules import bounds
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.stock import queries as stock
from plant.stock.models import Delivery, Transfer
from plant.works import queries as works
from plant.works.described import Limit

BY_READING = frozenset({"bound", "held_below", "held_above", "rate_of_change", "stuck", "missing", "suspicious_reading"})
BY_DOSE = frozenset({"dose_vs_design", "dose_vs_need", "drift", "certified_maximum"})


@dataclass(frozen=True)
class Verdict:
    """Whether it is back inside, in words, and the reading that shows it (empty for a day's figure)."""

    inside: bool
    words: str
    ref: str = ""


def back_inside(book: Book, view: DeviationView, now: dt.datetime) -> Verdict:
    """Looks at what came after the last finding. Never later than ``now``."""
    stated = works.stated(book)
    today = stated.calendar(now).day_of(now)
    first = max(view.last_day, today - dt.timedelta(days=14))
    evidence = gather(book, stated, first, today, now=now)
    if view.kind == "suspicious_reading" and view.subject_kind == "vessel" and not view.parameter:
        return _by_movement(book, view, evidence, now)
    if view.kind in BY_READING:
        return _by_reading(book, evidence, view, now)
    return _by_day(evidence, view, today)


def _by_movement(book: Book, view: DeviationView, evidence: Evidence, now: dt.datetime) -> Verdict:
    """A load against a check is behind us once it has been reversed, or the vessel has been stated back in service."""
    start, end = view.since, now + dt.timedelta(days=1)
    rows: list[Delivery | Transfer] = [*stock.deliveries(book, start=start, end=end, vessels=[view.subject])]
    rows += stock.transfers(book, start=start, end=end, vessels=[view.subject])
    if not any(row.ref in view.refs and row.marks for row in rows):
        return Verdict(True, "the load has been taken out of the reckoning")
    if evidence.stated.state("vessel", view.subject, now) == "in_service":
        return Verdict(True, "the vessel has been stated back in service")
    return Verdict(False, "the vessel is still out of service: state it in service once it is emptied and clean")


def _by_reading(book: Book, evidence: Evidence, view: DeviationView, now: dt.datetime) -> Verdict:
    start = evidence.calendar.start_of(view.last_day)
    found = readings.series(book, view.subject, view.parameter, start=start, end=now + dt.timedelta(microseconds=1))
    taken = [item for item in found if item.usable]
    last_out = max((item.at for item in found if item.ref in view.refs), default=view.since)
    after = [item for item in taken if item.at > last_out]
    if not after:
        return Verdict(False, "no reading has been taken since the last one outside: take one first")
    newest = after[-1]
    said = f"{newest.typed} {newest.typed_unit}".strip()
    at = f"{evidence.calendar.local(newest.at):%Y-%m-%d %H:%M}"
    limit = _limit(evidence, view, now)
    if limit is not None and view.kind in ("bound", "held_below", "held_above"):
        number = limits.number(evidence.stated, now, limit, "limit")
        test = limits.bound(evidence.stated, now, limit)
        if number is not None:
            test = bounds.Bound(number, None) if view.kind == "held_below" else bounds.Bound(None, number)
        values = observed([newest])
        if test is not None and values and bounds.outside(values[0], test):
            return Verdict(False, f"the newest reading, {said} at {at}, is not inside yet", newest.ref)
    elif limit is not None:
        day = evidence.day(evidence.calendar.day_of(newest.at))
        if any(
            item.key[2:] == (view.subject, view.parameter) and newest.ref in item.refs for item in judging.judge_day(day, limit)
        ):
            return Verdict(False, f"the newest reading, {said} at {at}, does not clear it yet", newest.ref)
    return Verdict(True, f"{said} at {at}", newest.ref)


def _by_day(evidence: Evidence, view: DeviationView, today: dt.date) -> Verdict:
    limit = _limit(evidence, view, evidence.now)
    if limit is None:
        return Verdict(True, "the limit is not in force any more")
    if view.kind in BY_DOSE:
        return _by_dose(evidence, view, limit)
    day = evidence.day(today)
    found = judging.judge_day(day, limit)
    if any(item.subject == view.subject for item in found):
        return Verdict(False, f"it is still outside: {found[0].value}, limit {found[0].limit}")
    if today <= view.last_day and view.kind not in ("stock_loss", "days_of_supply", "holding", "lot_age", "strength_low"):
        return Verdict(False, f"nothing later than {view.last_day.isoformat()} has been judged yet")
    return Verdict(True, f"inside on {today.isoformat()}")


def _by_dose(evidence: Evidence, view: DeviationView, limit: Limit) -> Verdict:
    on = evidence.last
    while on > view.last_day:
        day = evidence.day(on)
        rows = day.rows(view.subject)
        if rows and day.newly_known(rows[-1]):
            found = [item for item in judging.judge_day(day, limit) if item.subject == view.subject]
            if found:
                return Verdict(False, f"it is still outside on {on.isoformat()}: {found[0].value}")
            used = rows[-1].used_mg_l.value or 0.0
            return Verdict(True, f"used {used:.4g} mg/L on {rows[-1].day.isoformat()}")
        on -= dt.timedelta(days=1)
    return Verdict(False, f"no dose is known yet after {view.last_day.isoformat()}: levels and totaliser are needed")


def _limit(evidence: Evidence, view: DeviationView, now: dt.datetime) -> Limit | None:
    day = evidence.day(evidence.calendar.day_of(now))
    return next((limit for limit, _ in judging.limits_of(day) if limit.code == view.code), None)
