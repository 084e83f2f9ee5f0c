"""Limits as the rules want them: exact decimals in the unit of the readings, with the works' way of comparing."""

from __future__ import annotations

import datetime as dt
from decimal import Decimal
from typing import Any

from chemistry import errors, units
from plant.deviations.rules import bounds, rounding
from plant.works import described, parameters
from plant.works.described import Limit
from plant.works.stated import Stated


def works_value(stated: Stated, at: dt.datetime) -> dict[str, Any]:
    """All that is stated of the works itself."""
    return next((value for _, value in stated.in_force("works", at)), {})


def rounds(stated: Stated, at: dt.datetime) -> bool:
    """Whether values are rounded to the limit's own digits before they are compared; not unless stated."""
    return bool(works_value(stated, at).get("round_to_limit", False))


def number(stated: Stated, at: dt.datetime, limit: Limit, key: str) -> Decimal | None:
    """A number of the limit as an exact decimal in the canonical unit of its parameter, with its stated digits."""
    if limit.keys.get(key) is None:
        return None
    value = Decimal(str(limit.keys[key]))
    if (decimals := limit.keys.get("decimals")) is not None:
        value = rounding.half_up(value, int(decimals))
    if not limit.unit or not limit.parameter:
        return value
    try:
        own = parameters.own_unit(stated, at, limit.parameter)
        if limit.unit == parameters.unit_at(stated, at, limit.subject, limit.parameter):
            return value
        return Decimal(units.canonical_text(str(value), limit.unit, limit.parameter, own))
    except (errors.ChemistryError, KeyError):
        return value


def bound(stated: Stated, at: dt.datetime, limit: Limit) -> bounds.Bound | None:
    """The limit's low and high; None when it has neither."""
    low, high = number(stated, at, limit, "low"), number(stated, at, limit, "high")
    if low is None and high is None:
        return None
    return bounds.Bound(low, high, rounds(stated, at))


def versions(stated: Stated, limit: Limit, start: dt.datetime, end: dt.datetime) -> list[tuple[dt.datetime, Limit | None]]:
    """What the limit was from which moment within [start, end): each reading is held against what was in force then."""
    at_start = stated.value("limit", limit.code, start)
    out: list[tuple[dt.datetime, Limit | None]] = [(start, described.limit(limit.code, at_start) if at_start else None)]
    for item in stated.history("limit", limit.code):
        if start < item.effective_from < end:
            held = None if item.withdrawn else described.limit(limit.code, item.value)
            out.append((item.effective_from, held))
    return out


def unit_words(stated: Stated, at: dt.datetime, subject: str, parameter: str) -> str:
    """The unit to print after a value; empty where it has none."""
    try:
        unit = parameters.unit_at(stated, at, subject, parameter)
    except KeyError:
        return ""
    return f" {unit}" if unit else ""
