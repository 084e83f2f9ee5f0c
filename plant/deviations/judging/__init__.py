"""One operating day of one works held against everything that is stated of it. Reads evidence, writes nothing."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from plant.deviations import causes, defaults
from plant.deviations.evidence import Day
from plant.deviations.findings import Finding
from plant.deviations.judging import answers, contact, doses, doubts, late, stocks, values
from plant.works.described import Limit

Rule = Callable[[Day, Limit, str], Iterator[Finding]]


def drift(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """A drift of the dose; without one, of the reading that answers to it. One cause is not raised twice."""
    found = list(doses.drift_of_dose(day, limit, ref))
    yield from found or answers.drift_of_answer(day, limit, ref)


RULES: dict[str, Rule] = {
    "bound": values.bound,
    "held_below": values.held,
    "held_above": values.held,
    "share_of_month": values.share_of_month,
    "running_mean": values.running_mean,
    "rate_of_change": values.rate_of_change,
    "stuck": values.stuck,
    "missing": late.missing,
    "dose_vs_design": doses.dose_vs,
    "dose_vs_need": doses.dose_vs,
    "certified_maximum": doses.certified_maximum,
    "drift": drift,
    "stock_loss": stocks.stock_loss,
    "days_of_supply": stocks.days_of_supply,
    "holding": stocks.holding,
    "lot_age": stocks.lot_age,
    "strength_low": stocks.strength_low,
    "inactivation_ratio": contact.inactivation_ratio,
}
"""The rule of each kind of limit."""

OF_WATER = frozenset({"bound", "held_below", "held_above", "rate_of_change", "stuck", "missing"})
"""Kinds that say nothing while the works is off: what stands in the pipes is no process value."""

OF_READINGS = frozenset({"bound", "held_below", "held_above", "share_of_month", "running_mean", "rate_of_change", "missing"})
"""Kinds that need no doses to be judged."""


def limits_of(day: Day) -> list[tuple[Limit, str]]:
    """All limits that hold for the day, stated ones and defaults, each with the ref of its statement."""
    stated = day.stated
    found = []
    for limit in stated.limits(day.moment):
        saying = stated.saying("limit", limit.code, day.moment)
        found.append((limit, saying.ref if saying else ""))
    return found + [(limit, "") for limit in defaults.holding(stated, day.moment)]


def judge_day(day: Day, only: Limit | None = None) -> list[Finding]:
    """All that is outside on the day, each with its likely causes. ``only`` tries one limit and nothing else."""
    if day.until <= day.start:
        return []
    found: list[Finding] = []
    for limit, ref in limits_of(day) if only is None else [(only, "")]:
        if limit.kind in OF_WATER and not day.in_service("works", ""):
            continue
        found += RULES[limit.kind](day, limit, ref)
    if only is None:
        found += doubts.suspicious(day)
        found += doubts.movements(day)
    unique = _one_for_one_cause(_once(found))
    return [replace(item, causes=causes.likely(item, day, unique)) for item in unique]


def _once(found: list[Finding]) -> list[Finding]:
    """One finding for each key: of several of one limit and subject, the longest-standing carries the others' refs."""
    out: dict[tuple[str, str, str, str], Finding] = {}
    for item in found:
        held = out.get(item.key)
        if held is None:
            out[item.key] = item
            continue
        first, other = sorted((held, item), key=lambda each: each.since)
        sentence = first.sentence if other.sentence == first.sentence else f"{first.sentence}; {other.sentence}"
        out[item.key] = replace(first, sentence=sentence, refs=(*first.refs, *other.refs), until=other.until)
    return list(out.values())


def _one_for_one_cause(found: list[Finding]) -> list[Finding]:
    """A drift of a dose says all that the default limit against design says: then that one is left out."""
    drifting = {item.subject for item in found if item.kind == "drift" and not item.parameter}
    return [
        item
        for item in found
        if not (item.kind == "dose_vs_design" and defaults.is_default(item.code) and item.subject in drifting)
    ]
