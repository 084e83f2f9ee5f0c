"""The instant answer beside a field: not a number, hard to believe, or outside a limit.

A line's definition is plain JSON, made once from what is stated (``definitions.py``) and served to the tablet, where
``static/intake/rules.js`` decides by the same definition and the same steps. Both reckon exactly, in fractions, so
that a value on the limit is judged alike on both sides and as the server later judges the stored decimal.

Only what is not a number is stopped. A doubt asks for one more look; a limit says what to do.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

EMPTY, STOPPED, READ = "empty", "stopped", "read"

IMPOSSIBLE, LOST_POINT, LOWER, FASTER, UNUSUAL = "impossible", "lost_point", "lower", "faster", "unusual"
LONGEST = 30

_TYPED = re.compile(r"[ \t\u00a0]*([<>]?)[ \t\u00a0]*([+\-\u2212]?)([0-9]*)([.,]?)([0-9]*)[ \t\u00a0]*")

Definition = dict[str, Any]


@dataclass(frozen=True)
class Answer:
    """What to say of a typed value. ``plain`` is the number as it was read; ``doubt`` and ``limit`` name what fits."""

    state: str
    plain: str = ""
    qualifier: str = ""
    doubt: str = ""
    limit: str = ""
    side: str = ""

    @property
    def asks(self) -> bool:
        """Whether one tap (or a repeat) is wanted before it is sent."""
        return bool(self.doubt)


def answer(definition: Definition, typed: str, unit: str, at_s: int = 0) -> Answer:
    """The answer to a typed value in one of the definition's units, taken at so many seconds of the epoch."""
    if not typed.strip(" \t\u00a0"):
        return Answer(EMPTY)
    read = parse(typed, commas=bool(definition["commas"]))
    scale = definition["units"].get(unit)
    if read is None or scale is None:
        return Answer(STOPPED)
    plain, qualifier, pointed = read
    value = Fraction(plain) * Fraction(scale["scale"]) + Fraction(scale["offset"])
    rules = definition["as"][scale["as"]]
    return Answer(
        READ, plain, qualifier, _doubt(rules, value, qualifier, pointed=pointed, at_s=at_s), *_limit(rules, value, qualifier)
    )


def parse(typed: str, *, commas: bool) -> tuple[str, str, bool] | None:
    """(plain decimal, qualifier, whether a decimal sign was typed), or None for what is not a number."""
    found = _TYPED.fullmatch(typed)
    if found is None or len(typed.strip(" \t\u00a0")) > LONGEST:
        return None
    qualifier, sign, whole, mark, part = found.groups()
    if not (whole or part) or (mark == "," and not commas):
        return None
    minus = "-" if sign in ("-", "\u2212") else ""
    return f"{minus}{whole or '0'}{'.' + part if part else ''}", qualifier, bool(mark)


def _doubt(rules: Definition, value: Fraction, qualifier: str, *, pointed: bool, at_s: int) -> str:
    """The one thing most worth a second look, or ""."""
    if _outside(value, rules["possible"]):
        return IMPOSSIBLE
    if qualifier:
        return ""
    if not pointed and _lost_point(value, rules["lost"]):
        return LOST_POINT
    counted = _counter(value, rules["counter"], at_s)
    if counted:
        return counted
    return UNUSUAL if _outside(value, rules["usual"]) else ""


def _outside(value: Fraction, bounds: list[str | None]) -> bool:
    low, high = bounds
    return (low is not None and value < Fraction(low)) or (high is not None and value > Fraction(high))


def _lost_point(value: Fraction, series: list[str] | None) -> bool:
    """Above five times the highest of the series, while a tenth, hundredth or thousandth falls within it."""
    if series is None:
        return False
    low, high = Fraction(series[0]), Fraction(series[1])
    if high <= 0 or value <= 5 * high:
        return False
    return any(Fraction(4, 5) * low <= value / 10**places <= Fraction(5, 4) * high for places in (1, 2, 3))


def _counter(value: Fraction, counter: Definition | None, at_s: int) -> str:
    """A totaliser that went back without being able to roll over, or ran faster than the meter can pass."""
    if counter is None or at_s <= counter["at_s"]:
        return ""
    passed = value - Fraction(counter["last"])
    if passed < 0:
        if counter["modulo"] is None or counter["most_per_hour"] is None:
            return LOWER
        passed += Fraction(counter["modulo"])
    most = counter["most_per_hour"]
    if most is not None and passed * 3600 > Fraction(most) * (at_s - counter["at_s"]):
        return LOWER if value < Fraction(counter["last"]) else FASTER
    return ""


def _limit(rules: Definition, value: Fraction, qualifier: str) -> tuple[str, str]:
    """The code of the worst limit that the value is certainly outside of, and the side: low or high."""
    for limit in rules["limits"]:
        low, high = limit["low"], limit["high"]
        seen = value if limit["digits"] is None else _rounded(value, limit["digits"])
        if low is not None and qualifier != ">" and (seen < Fraction(low) or (qualifier == "<" and seen == Fraction(low))):
            return str(limit["code"]), "low"
        if high is not None and qualifier != "<" and (seen > Fraction(high) or (qualifier == ">" and seen == Fraction(high))):
            return str(limit["code"]), "high"
    return "", ""


def _rounded(value: Fraction, digits: int) -> Fraction:
    """Half up, away from zero, as plant.deviations rounds to a limit's own digits where the works has stated so."""
    scaled = abs(value) * 10**digits
    whole = (2 * scaled.numerator + scaled.denominator) // (2 * scaled.denominator)
    return Fraction(whole if value >= 0 else -whole, 10**digits)
