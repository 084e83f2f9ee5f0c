"""Walks one vessel through time: its spells, its contents, what was drawn each day.

Pure. One pass in the order of events; the use of a spell is spread evenly over its elapsed time and leaves at the strength
that the contents have just then.
"""

from __future__ import annotations

import bisect
import datetime as dt
import itertools
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from plant.dosing.contents import Contents, Decay, Drawn, Pour, StrengthTest
from plant.dosing.spells import Spell, Used, used_between


@dataclass
class Walk:
    """A vessel over a time: what it was asked for stands ready by day, and its contents at any instant."""

    in_kg: bool
    spells: list[Spell]
    contents: list[Contents] = field(default_factory=list)
    drawn: dict[tuple[dt.datetime, dt.datetime], Drawn] = field(default_factory=dict)

    def used(self, start: dt.datetime, end: dt.datetime) -> Used:
        """Amount used in [start, end), in the vessel's own unit."""
        return used_between(self.spells, start, end)

    def contents_at(self, at: dt.datetime, decay: Decay) -> Contents | None:
        """Strength and density at an instant; None before anything is known."""
        index = bisect.bisect_right(self.contents, at, key=lambda item: item.at)
        return self.contents[index - 1].aged(at, decay) if index else None

    def amount_at(self, at: dt.datetime) -> float | None:
        """What is in it at an instant, by the readings on both sides; None where they do not reach."""
        for spell in self.spells:
            if spell.start.at <= at <= spell.end.at:
                moved = sum(movement.amount for movement in spell.movements if movement.at <= at)
                passed = (at - spell.start.at) / (spell.end.at - spell.start.at)
                return spell.start.amount + moved - spell.used * passed
        return None


def walk(
    *,
    spells: list[Spell],
    first: Contents,
    pours: Sequence[Pour],
    tests: Sequence[StrengthTest],
    decay: Decay,
    in_kg: bool,
    cuts: Sequence[dt.datetime],
) -> Walk:
    """The walk. ``cuts`` are the boundaries of the days asked for, in order; ``first`` holds from its own time on."""
    out = Walk(in_kg, spells, [first])
    events = sorted({*cuts, *(pour.at for pour in pours), *(test.at for test in tests)})
    now = first
    sums = {span: [0.0, 0.0, 0.0] for span in itertools.pairwise(cuts)}
    marks = sorted({mark.at for spell in spells for mark in (spell.start, spell.end)})
    times = [at for at in sorted({*events, *marks}) if at >= first.at]
    position = _Position(spells)
    poured: dict[dt.datetime, list[Pour]] = {}
    for pour in pours:
        poured.setdefault(pour.at, []).append(pour)
    tested = {test.at: test for test in tests}
    for at, following in zip(times, [*times[1:], None][: len(times)], strict=True):
        now = now.aged(at, decay)
        held_kg = _kg(position.before(at), now, in_kg) if at in poured else 0.0
        for pour in poured.get(at, ()):
            now = now.mixed(held_kg, pour.contents.aged(at, decay), pour.kg, pour.water_l)
            held_kg += pour.kg + pour.water_l
            out.contents.append(now)
        if at in tested:
            now = replace(now, fraction=tested[at].fraction)
            out.contents.append(now)
        if following is None:
            break
        spell = position.spell(at, following)
        span = _span(cuts, at)
        if spell is not None and span is not None:
            amount = spell.used * spell.share(at, following)
            halfway = now.aged(at + (following - at) / 2, decay)
            kg = _kg(amount, halfway, in_kg, signed=True)
            for index, value in enumerate((amount, kg, kg * halfway.fraction)):
                sums[span][index] += value
    out.contents.append(now)
    out.drawn = {span: Drawn(*values) for span, values in sums.items()}
    return out


class _Position:
    """Finds spells by time; the walk only goes forward, so it need not look back."""

    def __init__(self, spells: list[Spell]) -> None:
        self._spells = spells
        self._starts = [spell.start.at for spell in spells]

    def spell(self, start: dt.datetime, end: dt.datetime) -> Spell | None:
        index = bisect.bisect_right(self._starts, start) - 1
        if index < 0:
            return None
        spell = self._spells[index]
        return spell if spell.end.at >= end else None

    def before(self, at: dt.datetime) -> float:
        """The amount held just before an event: the last mark less what was used since; 0 where nothing is known."""
        index = bisect.bisect_right(self._starts, at) - 1
        if index < 0:
            return 0.0
        spell = self._spells[index]
        if at > spell.end.at:
            return max(spell.end.amount, 0.0)
        passed = (at - spell.start.at) / (spell.end.at - spell.start.at)
        moved = sum(movement.amount for movement in spell.movements if movement.at < at)
        return max(spell.start.amount + moved - spell.used * passed, 0.0)


def _kg(amount: float, contents: Contents, in_kg: bool, signed: bool = False) -> float:
    kg = amount if in_kg else amount * (contents.density_kg_l or 0.0)
    return kg if signed else max(kg, 0.0)


def _span(cuts: Sequence[dt.datetime], at: dt.datetime) -> tuple[dt.datetime, dt.datetime] | None:
    index = bisect.bisect_right(cuts, at) - 1
    return (cuts[index], cuts[index + 1]) if 0 <= index < len(cuts) - 1 else None
