"""The rules of a line as JSON, made from what is stated of the works and what its series looks like.

Served to the tablet as they are, and used here by ``rules.answer``: one definition, two readers.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from decimal import Decimal
from typing import Any

from chemistry import errors, unit_tables, units, vessels
from plant.intake import advice, ground
from plant.readings.queries import Point
from plant.works import described, parameters
from plant.works.stated import Stated

LEVELS = ("regulatory", "action", "alert", "target")
FEWEST_FOR_USUAL = 8
_SIDES = (("low", "not below"), ("high", "not above"))

CHOICES: dict[str, tuple[str, ...]] = {
    "temperature": ("°C", "°F"),
    "hardness": ("mg/L as CaCO3", "°dH", "°fH", "mmol/L", "gr/gal"),
    "alkalinity": ("mg/L as CaCO3", "mmol/L"),
    "iron": ("mg/L", "µg/L"),
    "manganese": ("mg/L", "µg/L"),
    "aluminium": ("mg/L", "µg/L"),
    "conductance": ("uS/cm", "mS/cm"),
    "feeder_setting": ("%", "L/h", "kg/h"),
    "level": ("m", "cm", "%", "L"),
    "weight": ("kg", "lb"),
}
"""Units offered on the tablet beside the one a value is kept in. Files may use any accepted unit."""


def definition(
    stated: Stated,
    at: dt.datetime,
    site: str,
    parameter: str,
    recent: list[Point],
    *,
    known: parameters.Parameter,
) -> dict[str, Any]:
    """The rules for one value due at a site. ``recent`` are the series' newest readings, oldest first."""
    kept = parameters.unit_at(stated, at, site, parameter)
    us_units = stated.works(at).units == "us"
    usable = [point for point in recent if point.usable and not point.qualifier and point.unit == kept]
    own = {"kept": _as(stated, at, site, known, usable)}
    offered = _offered(parameter, kept)
    vessel = _vessel(stated, site, at)
    if parameter == "level":
        if vessel is None or vessel.on_scale:
            offered = {unit: scale for unit, scale in offered.items() if unit not in ("%", "L")}
        else:
            own |= {"%": _plain("0", "100"), "L": _plain("0", _text(1.01 * vessels.full_volume_l(vessel.form)) or "0")}
            offered |= {"%": _scale("%"), "L": _scale("L")}
    return {
        "commas": not us_units,
        "units": offered,
        "unit": _first_unit(parameter, kept, us_units, usable),
        "as": own,
        "sends": {"L": "volume"} if parameter == "level" else {},
        "texts": _texts(known, kept, usable),
        "shows": _shows(vessel, parameter, usable),
    }


def usual_range(usable: Iterable[Point], known: parameters.Parameter) -> tuple[Decimal | None, Decimal | None]:
    """What is usual here: the middle nine tenths of the newest readings, or the parameter's own range while they are few.

    Common practice, no source.
    """
    values = sorted(point.decimal for point in usable if point.decimal is not None)
    if len(values) < FEWEST_FOR_USUAL:
        return _decimal(known.usual_low), _decimal(known.usual_high)
    cut = len(values) // 20
    return values[cut], values[len(values) - 1 - cut]


def _as(stated: Stated, at: dt.datetime, site: str, known: parameters.Parameter, usable: list[Point]) -> dict[str, Any]:
    """The rules in the unit the value is kept in."""
    return {
        "possible": _possible(stated, at, site, known),
        "usual": _asked_outside(usable, known),
        "lost": _lost(usable),
        "counter": _counter(stated, at, site, known.name, usable),
        "limits": _limits(stated, at, site, known),
    }


def _plain(low: str, high: str) -> dict[str, Any]:
    return {"possible": [low, high], "usual": [None, None], "lost": None, "counter": None, "limits": []}


def _possible(stated: Stated, at: dt.datetime, site: str, known: parameters.Parameter) -> list[str | None]:
    low, high = known.low, known.high
    vessel = _vessel(stated, site, at)
    if known.name in ("totaliser", "totaliser_reset"):
        digits = (stated.value("meter", site, at) or {}).get("digits")
        high = 10.0 ** int(digits) - 1 if digits else None
    elif known.name == "level" and vessel is not None and not vessel.on_scale:
        high = vessels.full_level_m(vessel.form) + 3 * vessel.level_sd_m
    elif known.name == "weight" and vessel is not None and vessel.form.get("capacity_kg"):
        high = float(vessel.form["capacity_kg"]) + float(vessel.form.get("tare_kg") or 0)
    return [_text(low), _text(high)]


def _asked_outside(usable: list[Point], known: parameters.Parameter) -> list[str | None]:
    """Where a second look is asked for: outside the usual range by more than its own width."""
    if parameters.METER in known.sites or known.name in ("level", "weight"):
        return [None, None]
    low, high = usual_range(usable, known)
    if len(usable) >= FEWEST_FOR_USUAL and low is not None and high is not None:
        width = max(high - low, abs(high) / 10)
        low, high = low - width, high + width
        # What the parameter's own range already knows to be wide open isn't narrowed below nothing.
        if known.low == 0 and low < 0:
            low = Decimal(0)
    return [_text(low), _text(high)]


def _lost(usable: list[Point]) -> list[str] | None:
    newest = usable[-ground.REMEMBERED :]
    pointed = [point for point in newest if "." in point.typed or "," in point.typed]
    if len(pointed) < ground.FEWEST_POINTED or 2 * len(pointed) <= len(newest):
        return None
    values = sorted(point.decimal for point in pointed if point.decimal is not None)
    return [_text(values[0]) or "0", _text(values[-1]) or "0"]


def _counter(stated: Stated, at: dt.datetime, site: str, parameter: str, usable: list[Point]) -> dict[str, Any] | None:
    meter = stated.value("meter", site, at)
    if parameter != "totaliser" or meter is None or not usable:
        return None
    most = meter.get("max_flow_m3_per_h")
    if most is not None and units.kind_of(meter["unit"]) == "volume":
        most = Decimal(units.canonical_text(_text(most) or "0", "m3", "totaliser", meter["unit"]))
    else:
        most = None
    digits = meter.get("digits")
    return {
        "last": usable[-1].text,
        "at_s": int(usable[-1].at.timestamp()),
        "modulo": str(10 ** int(digits)) if digits else None,
        "most_per_hour": _text(most),
    }


def _limits(stated: Stated, at: dt.datetime, site: str, known: parameters.Parameter) -> list[dict[str, Any]]:
    """The bound limits on this site and parameter, worst first, in the unit the value is kept in."""
    kept = parameters.unit_at(stated, at, site, known.name)
    rounds = any(value.get("round_to_limit") for _, value in stated.in_force("works", at))
    found = [
        _limit(limit, known, kept, rounds=rounds)
        for limit in stated.limits(at)
        if limit.kind == "bound" and limit.subject == site and limit.parameter == known.name
    ]
    return sorted((item for item in found if item is not None), key=lambda item: LEVELS.index(item["level"]))


def _limit(limit: described.Limit, known: parameters.Parameter, kept: str, *, rounds: bool) -> dict[str, Any] | None:
    own = known.unit if known.name not in unit_tables.PARAMETERS else None
    shown = limit.unit or kept
    bounds: dict[str, str | None] = {"low": None, "high": None}
    said = []
    for side, words in _SIDES:
        value = limit.keys.get(side)
        if value is not None:
            text = _text(value) or "0"
            try:
                bounds[side] = text if shown == kept else units.canonical_text(text, shown, known.name, own)
            except errors.ChemistryError:
                return None
            said.append(f"{words} {text}{' ' + shown if shown else ''}")
    level = {"target": "Target", "alert": "Alert limit", "action": "Action limit", "regulatory": "Regulatory limit"}[
        limit.level
    ]
    tell = [_to_tell(item) for item in limit.tell]
    return {
        "code": limit.code,
        "level": limit.level,
        **bounds,
        "digits": max(_decimals(text) for text in bounds.values() if text is not None) if rounds else None,
        "says": f"{level}: {' and '.join(said)}.",
        "do": {side: advice.what_to_do(known.name, side, limit.level) for side, _ in _SIDES},
        "caution": advice.caution(known.name),
        "call": "; ".join(tell),
    }


def _to_tell(item: dict[str, Any]) -> str:
    words = [str(item["who"])]
    words += [str(item["telephone"])] if item.get("telephone") else []
    words += [f"within {_text(item['within_hours'])} h"] if item.get("within_hours") is not None else []
    return ", ".join(words)


def _offered(parameter: str, kept: str) -> dict[str, dict[str, str]]:
    """The units that may be chosen, each with its exact scale to the unit kept; the text of a level in L is a volume."""
    names = dict.fromkeys((kept, *CHOICES.get(parameter, ())))
    if parameter == "strength":
        names = {kept: None}
    out: dict[str, dict[str, str]] = {}
    for name in names:
        if parameter in ("level", "feeder_setting") and name in ("%", "L", "L/h", "kg/h") and name != kept:
            out[name] = {"scale": "1", "offset": "0", "as": "kept"}
            continue
        if name == kept:
            out[name] = {"scale": "1", "offset": "0", "as": "kept"}
            continue
        nought, one = (Decimal(units.canonical_text(text, name, parameter)) for text in ("0", "1"))
        out[name] = {"scale": str(one - nought), "offset": str(nought), "as": "kept"}
    return out


def _scale(name: str) -> dict[str, str]:
    return {"scale": "1", "offset": "0", "as": name}


def _first_unit(parameter: str, kept: str, us_units: bool, usable: list[Point]) -> str:
    """What the last person used, when it is offered; otherwise the unit kept (°F where screens are in US units)."""
    last = usable[-1].typed_unit if usable else ""
    if last and last in CHOICES.get(parameter, ()):
        return last
    return "°F" if us_units and parameter == "temperature" else kept


def _texts(known: parameters.Parameter, kept: str, usable: list[Point]) -> dict[str, str]:
    unit = f" {kept}" if kept else ""
    low, high = usual_range(usable, known)
    usual = f" Usual here: {_text(low)} to {_text(high)}{unit}." if low is not None and high is not None else ""
    last = f" Last time: {usable[-1].text}{unit}." if usable else ""
    return {
        "stopped": "This is not a number. Type digits, for instance 7.32 or <0.05; or say why it was not taken.",
        "impossible": f"This can't be: it is outside what is possible here.{last} Look again.",
        "lost_point": f"Is a decimal point missing?{usual or last}",
        "lower": f"The counter stands lower than last time.{last} Has it been reset, or is a digit wrong?",
        "faster": f"More than this meter can pass since last time.{last} Is a digit wrong?",
        "unusual": f"Unusual for this place.{usual or last} Look again, or repeat the sample.",
    }


def _shows(vessel: described.Vessel | None, parameter: str, usable: list[Point]) -> dict[str, Any] | None:
    """What appears beside a level or weight: litres by the vessel's shape, net weight, and the difference to last time."""
    if vessel is None or parameter not in ("level", "weight"):
        return None
    last = usable[-1].value if usable else None
    if vessel.on_scale:
        return {"kind": "weight", "tare_kg": float(vessel.form.get("tare_kg") or 0), "last": last}
    top = vessels.full_level_m(vessel.form)
    steps = 1 if vessel.form["shape"] == "vertical_cylinder" else 100
    levels = [top * step / steps for step in range(steps + 1)]
    return {
        "kind": "level",
        "table": [
            [round(level / vessel.level_factor, 6), round(float(vessels.volume_l(vessel.form, min(level, top))), 3)]
            for level in levels
        ],
        "top_m": top,
        "last": last,
    }


def _decimals(text: str) -> int:
    return len(text.partition(".")[2])


def _vessel(stated: Stated, site: str, at: dt.datetime) -> described.Vessel | None:
    value = stated.value("vessel", site, at)
    return None if value is None else described.vessel(site, value)


def _decimal(value: float | None) -> Decimal | None:
    return None if value is None else Decimal(str(value))


def _text(value: float | Decimal | str | None) -> str | None:
    """A number as plain decimal text, without the trailing zero a float prints."""
    if value is None:
        return None
    number = Decimal(str(value))
    plain = format(number, "f")
    return plain.rstrip("0").rstrip(".") if isinstance(value, float) and "." in plain else plain
