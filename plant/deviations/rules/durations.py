"""Held below or above a limit for longer than so many hours.

The time runs from the first reading outside to the first reading back (40 CFR 141.72(b)(2): the residual "cannot be
less than 0.2 mg/l for more than 4 hours"): exactly N hours passes, and readings in between do not restart it.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from decimal import Decimal

from plant.deviations.rules import bounds
from plant.deviations.rules.observed import Breach, Observed


@dataclass(frozen=True)
class Dip:
    """A time outside: from the first reading outside to the first one back (None: not back yet)."""

    start: dt.datetime
    end: dt.datetime | None
    worst: Observed
    refs: tuple[str, ...] = ()

    def hours(self, until: dt.datetime) -> float:
        """Elapsed hours, up to ``until`` while it lasts. Instants are UTC, so a change of clocks does not matter."""
        return ((self.end or until) - self.start).total_seconds() / 3600


def dips(values: Sequence[Observed], outside: Callable[[Observed], bool | None], *, low: bool = True) -> list[Dip]:
    """All times outside. A censored value that leaves it open neither starts nor ends one."""
    out: list[Dip] = []
    run: list[Observed] = []
    for item in sorted(values, key=lambda each: each.at):
        verdict = outside(item)
        if verdict:
            run.append(item)
        elif verdict is False and run:
            out.append(_dip(run, item.at, low))
            run = []
    if run:
        out.append(_dip(run, None, low))
    return out


def _dip(run: list[Observed], end: dt.datetime | None, low: bool) -> Dip:
    worst = (min if low else max)(run, key=lambda item: item.value)
    return Dip(run[0].at, end, worst, tuple(item.ref for item in run))


def held(
    values: Sequence[Observed],
    *,
    limit: Decimal,
    hours: float,
    low: bool,
    until: dt.datetime,
    rounds: bool = False,
    censored: str = "certain",
) -> list[Breach]:
    """Times outside that lasted more than ``hours`` by ``until``. ``low``: held below; otherwise held above."""
    bound = bounds.Bound(limit if low else None, None if low else limit, rounds, censored)
    test = bounds.below if low else bounds.above
    out = []
    for dip in dips([item for item in values if item.at <= until], lambda item: test(item, bound), low=low):
        lasted = dip.hours(until)
        if lasted > hours:
            word = "below" if low else "above"
            still = "" if dip.end else ", and not back yet"
            out.append(
                Breach(
                    since=dip.start,
                    until=dip.end,
                    value=f"{lasted:.2f} h",
                    limit=f"≤ {hours:g} h {word} {limit}",
                    sentence=f"{word} {limit} for {lasted:.2f} h{still}; worst {dip.worst.text}",
                    refs=dip.refs,
                )
            )
    return out
