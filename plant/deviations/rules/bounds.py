"""Above or below a bound. Equality is inside: limits in law are worded as "exceed" (40 CFR 141.173(a)(2)) or "not
less than" (40 CFR 141.72(b)(2)).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal

from plant.deviations.rules import rounding
from plant.deviations.rules.observed import Breach, Observed

CENSORED = ("certain", "as_bound", "half", "zero")
"""How a value below (or above) the measuring range is compared: ``certain`` (only what must be true counts),
``as_bound`` (the bound itself), ``half`` of it, or ``zero``. The last two are for ``<`` only."""


@dataclass(frozen=True)
class Bound:
    """A low and a high bound in the unit of the values, and how they are compared."""

    low: Decimal | None = None
    high: Decimal | None = None
    rounds: bool = False
    censored: str = "certain"

    def __post_init__(self) -> None:
        if self.low is None and self.high is None:
            raise ValueError("a bound needs a low or a high")
        if self.censored not in CENSORED:
            raise ValueError(f"censored is one of {', '.join(CENSORED)}, not {self.censored!r}")


def substituted(value: Decimal, qualifier: str, censored: str) -> Decimal:
    """The number that stands for a censored value in a comparison or a mean. ``certain`` gives the bound itself."""
    if qualifier == "<" and censored == "half":
        return value / 2
    if qualifier == "<" and censored == "zero":
        return Decimal(0)
    return value


def below(observed: Observed, bound: Bound) -> bool | None:
    """Whether a value is below the low bound; None when a censored value leaves it open."""
    if bound.low is None:
        return False
    value = substituted(observed.value, observed.qualifier, bound.censored)
    if bound.rounds:
        value = rounding.to_limit(value, bound.low)
    if bound.censored == "certain" and observed.qualifier == "<":
        return True if value <= bound.low else None
    if bound.censored == "certain" and observed.qualifier == ">":
        return False if value >= bound.low else None
    return value < bound.low


def above(observed: Observed, bound: Bound) -> bool | None:
    """Whether a value is above the high bound; None when a censored value leaves it open."""
    if bound.high is None:
        return False
    value = substituted(observed.value, observed.qualifier, bound.censored)
    if bound.rounds:
        value = rounding.to_limit(value, bound.high)
    if bound.censored == "certain" and observed.qualifier == ">":
        return True if value >= bound.high else None
    if bound.censored == "certain" and observed.qualifier == "<":
        return False if value <= bound.high else None
    return value > bound.high


def outside(observed: Observed, bound: Bound) -> str:
    """``low``, ``high``, ``open`` (a censored value that can't be judged) or empty for inside."""
    is_below, is_above = below(observed, bound), above(observed, bound)
    if is_below:
        return "low"
    if is_above:
        return "high"
    return "open" if is_below is None or is_above is None else ""


def judge(values: Sequence[Observed], bound: Bound) -> list[Breach]:
    """One breach a side: since the first value outside, showing the worst."""
    out = []
    for side in ("low", "high"):
        hits = [item for item in values if outside(item, bound) == side]
        if not hits:
            continue
        worst = (min if side == "low" else max)(hits, key=lambda item: item.value)
        limit = bound.low if side == "low" else bound.high
        last = max(values, key=lambda item: item.at)
        back = None if outside(last, bound) == side else last.at
        word = "below" if side == "low" else "above"
        out.append(
            Breach(
                since=min(item.at for item in hits),
                until=back,
                value=worst.text,
                limit=f"{'≥' if side == 'low' else '≤'} {limit}",
                sentence=f"{len(hits)} of {len(values)} readings {word} {limit}; worst {worst.text}",
                refs=tuple(item.ref for item in hits),
            )
        )
    return out
