"""From marks to use: what passed between two readings, and how much of it belongs to a day.

Pure. A *mark* is an amount at an instant (a totaliser, a vessel's content). A *spell* is the time between two marks with
what passed in it. Within a spell the rate is taken as even in elapsed time, so a boundary inside it is interpolated by the
clock's true hours, whatever the wall clock did.
"""

from __future__ import annotations

import bisect
import datetime as dt
import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass, field

LONGEST_SPELL = dt.timedelta(hours=30)
"""Readings further apart than this say nothing about a boundary between them (the works' formats, "comparison")."""


@dataclass(frozen=True)
class Mark:
    """An amount at an instant, with the standard uncertainty of that one reading, in the same unit."""

    at: dt.datetime
    amount: float
    sd: float = 0.0
    ref: str = ""
    corrected: bool = False
    begins: bool = False
    """True where the count or the content starts anew here: nothing passed between the mark before and this one."""


@dataclass(frozen=True)
class Movement:
    """What came in (positive) or went out (negative) other than by use, in the unit of the marks."""

    at: dt.datetime
    amount: float
    sd: float = 0.0
    ref: str = ""


@dataclass(frozen=True)
class Spell:
    """The time between two marks: what was used, and which readings it came from."""

    start: Mark
    end: Mark
    used: float
    movements: tuple[Movement, ...] = ()
    remarks: tuple[str, ...] = ()

    @property
    def hours(self) -> float:
        return (self.end.at - self.start.at).total_seconds() / 3600

    def share(self, start: dt.datetime, end: dt.datetime) -> float:
        """The part of this spell, 0 to 1, that lies in [start, end), by elapsed time."""
        overlap = min(self.end.at, end) - max(self.start.at, start)
        if overlap <= dt.timedelta(0):
            return 0.0
        return overlap / (self.end.at - self.start.at)


@dataclass
class Used:
    """What was used in a span: amount, its standard uncertainty from the readings, and what it rests on."""

    amount: float | None
    sd: float = 0.0
    interpolated: bool = False
    corrected: bool = False
    refs: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()
    pieces: list[tuple[Spell, float]] = field(default_factory=list)


def content_spells(marks: Sequence[Mark], movements: Sequence[Movement] = ()) -> list[Spell]:
    """Spells of a vessel: start + in - out - end. A negative use stays negative and is remarked on, never clipped.

    A movement at the very time of a mark is counted after it, unless the mark itself shows that it came before.
    """
    spells = []
    ordered = sorted(marks, key=lambda mark: (mark.at, mark.begins))
    waiting = sorted(movements, key=lambda movement: movement.at)
    for index, (start, end) in enumerate(itertools.pairwise(ordered)):
        if end.at <= start.at:
            continue
        inside = [movement for movement in waiting if _inside(movement, start, end)]
        taken = {id(movement) for movement in inside}
        waiting = [movement for movement in waiting if id(movement) not in taken and movement.at >= start.at]
        if end.begins:
            following = ordered[index + 2] if index + 2 < len(ordered) else None
            spells += _before_change(start, end, following, waiting)
            continue
        used = start.amount + sum(movement.amount for movement in inside) - end.amount
        sd = math.sqrt(start.sd**2 + end.sd**2 + sum(movement.sd**2 for movement in inside))
        remarks = ("negative use",) if used < -2 * sd and used < -1e-9 else ()
        spells.append(Spell(start, end, used, tuple(inside), remarks))
    return spells


GUESSED_SD = 0.3
"""Relative standard uncertainty of a use that was estimated from the rate after a change (common practice, no source)."""


def _before_change(start: Mark, change: Mark, following: Mark | None, movements: Sequence[Movement]) -> list[Spell]:
    """The use up to a change of container that was not weighed when it left: estimated at the rate after the change."""
    if following is None or following.begins or following.at <= change.at:
        return []
    after = change.amount - following.amount
    after += sum(movement.amount for movement in movements if change.at <= movement.at < following.at)
    used = after * ((change.at - start.at) / (following.at - change.at))
    left = Mark(change.at, start.amount - used, GUESSED_SD * abs(used))
    return [Spell(start, left, used, (), ("container changed without weighing the old one: use before it estimated",))]


def _inside(movement: Movement, start: Mark, end: Mark) -> bool:
    if movement.at == start.at:
        return True
    if movement.at == end.at:
        # The dip that closes the spell already shows it: without it the use would be absurd.
        shown = end.amount - start.amount
        return shown / movement.amount > 0.5 if movement.amount else False
    return start.at < movement.at < end.at


def counter_spells(
    marks: Sequence[Mark],
    *,
    digits: int | None,
    most_per_hour: float | None,
) -> list[Spell]:
    """Spells of a totaliser, in its own unit.

    A fall is a rollover (modulo 10**digits) only if the flow it implies is possible: at most ``most_per_hour`` where that is
    stated, else at most half the counter. A reading that is impossible between its neighbours is passed over and named; where
    it is the count itself that broke, nothing is known between the two and the spell is left out.
    """
    ordered = sorted(marks, key=lambda mark: mark.at)
    spells: list[Spell] = []
    last: Mark | None = None
    skipped: list[Mark] = []
    for index, mark in enumerate(ordered):
        if last is None or mark.begins:
            last, skipped = mark, []
            continue
        if mark.at <= last.at:
            continue
        passed = _passed(last, mark, digits, most_per_hour)
        if passed is None:
            following = ordered[index + 1] if index + 1 < len(ordered) else None
            if following is not None and not following.begins and _passed(last, following, digits, most_per_hour) is not None:
                skipped.append(mark)
                continue
            last, skipped = mark, []
            continue
        amount, rolled = passed
        remarks = ["totaliser rolled over"] if rolled else []
        remarks += [f"totaliser reading of {item.at:%Y-%m-%d %H:%M} UTC passed over: impossible" for item in skipped]
        spells.append(Spell(last, mark, amount, (), tuple(remarks)))
        last, skipped = mark, []
    return spells


def _passed(start: Mark, end: Mark, digits: int | None, most_per_hour: float | None) -> tuple[float, bool] | None:
    hours = (end.at - start.at).total_seconds() / 3600
    most = math.inf if most_per_hour is None else most_per_hour * hours
    amount = end.amount - start.amount
    if amount >= 0:
        return (amount, False) if amount <= most else None
    if digits is None:
        return None
    full = 10.0**digits
    amount += full
    return (amount, True) if 0 <= amount <= min(most, full / 2) else None


def used_between(spells: Sequence[Spell], start: dt.datetime, end: dt.datetime) -> Used:
    """What the spells say was used in [start, end): unknown unless they cover all of it, boundaries within 30 h of readings.

    The uncertainty counts each reading once, with the share it really has: a reading inside the span cancels out, one at an
    interpolated boundary keeps its part.
    """
    first = bisect.bisect_right(spells, start, key=lambda spell: spell.end.at)
    inside = itertools.takewhile(lambda spell: spell.start.at < end, itertools.islice(spells, first, None))
    pieces = [(spell, share) for spell in inside if (share := spell.share(start, end)) > 0]
    gap = _gap(pieces, start, end)
    if gap:
        return Used(None, remarks=(gap,))
    weights: dict[int, tuple[float, float]] = {}
    amount = 0.0
    interpolated = False
    for spell, share in pieces:
        amount += spell.used * share
        interpolated = interpolated or share < 1 - 1e-12
        _weigh(weights, spell.start, share)
        _weigh(weights, spell.end, -share)
        for movement in spell.movements:
            weights[id(movement)] = (share, movement.sd)
    sd = math.sqrt(sum((weight * each) ** 2 for weight, each in weights.values()))
    return Used(
        amount,
        sd,
        interpolated,
        corrected=any(mark.corrected for spell, _ in pieces for mark in (spell.start, spell.end)),
        refs=tuple(dict.fromkeys(_refs(pieces))),
        remarks=tuple(dict.fromkeys(remark for spell, _ in pieces for remark in spell.remarks)),
        pieces=pieces,
    )


def _weigh(weights: dict[int, tuple[float, float]], mark: Mark, share: float) -> None:
    before = weights.get(id(mark), (0.0, mark.sd))[0]
    weights[id(mark)] = (before + share, mark.sd)


def _refs(pieces: list[tuple[Spell, float]]) -> list[str]:
    out = []
    for spell, _ in pieces:
        out += [spell.start.ref, *(movement.ref for movement in spell.movements), spell.end.ref]
    return [ref for ref in out if ref]


def _gap(pieces: list[tuple[Spell, float]], start: dt.datetime, end: dt.datetime) -> str:
    if not pieces:
        return "no readings"
    reached = start
    for spell, _ in pieces:
        if spell.start.at > reached:
            return "readings missing"
        crosses = spell.start.at < start < spell.end.at or spell.start.at < end < spell.end.at
        if crosses and spell.end.at - spell.start.at > LONGEST_SPELL:
            return f"readings {spell.hours:.0f} h apart at the boundary, more than 30 h"
        reached = spell.end.at
    return "" if reached >= end else "readings missing at the end"
