"""A key's value as a person reads and types it, and back. One spelling for forms, tables and differences."""

from __future__ import annotations

import tomllib
from decimal import Decimal, InvalidOperation
from typing import Any

from plant.works import kinds

_LABELS = {
    "is": "State",
    "name": "Name",
    "code": "Code",
    "tell": "Who must be told",
    "need": "Need model",
    "table": "Strapping table",
    "points": "Points of the curve",
}
_UNITS = (
    ("_mg_per_L_CaCO3", "mg/L as CaCO3"),
    ("_kg_per_L", "kg/L"),
    ("_mg_per_L", "mg/L"),
    ("_m3_per_h", "m³/h"),
    ("_pct", "%"),
    ("_days", "days"),
    ("_hours", "hours"),
    ("_m3", "m³"),
    ("_kg", "kg"),
    ("_m", "m"),
    ("_L", "L"),
    ("_C", "°C"),
)


class NotReadable(ValueError):
    """Typed text that is no value of its key; the message says what is expected."""


def label(name: str) -> str:
    """A key's name for people, its unit in brackets."""
    if name in _LABELS:
        return _LABELS[name]
    if name.endswith(("_sd_m", "_sd_kg", "_sd_pct")):
        what, _, unit = name.rpartition("_sd_")
        return f"{_sentence(what)}, standard uncertainty ({'%' if unit == 'pct' else unit})"
    for ending, unit in _UNITS:
        if name.endswith(ending) and len(name) > len(ending):
            return f"{_sentence(name.removesuffix(ending))} ({unit})"
    return _sentence(name)


def _sentence(name: str) -> str:
    words = name.replace("_", " ")
    return words[:1].upper() + words[1:]


def shown(value: Any, name: str = "") -> str:
    """A stated value in words."""
    if value is None or value == "":
        return "–"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.12g}"
    if isinstance(value, list | tuple):
        if value and isinstance(value[0], list | tuple):
            return "; ".join(" → ".join(shown(number) for number in pair) for pair in value)
        return "; ".join(shown(item) for item in value) if value else "none"
    if isinstance(value, dict):
        if "who" in value:
            return f"{value['who']} within {shown(value['within_hours'])} h"
        head = [str(value["model"]).replace("_", " ")] if "model" in value else []
        rest = [f"{label(key)} {shown(item)}" for key, item in value.items() if key != "model"]
        return ", ".join(head + rest)
    return str(value).replace("_", " ") if name in ("is", "kind", "shape", "role", "strength_basis", "heads") else str(value)


def typed(key: kinds.Key, value: Any) -> Any:
    """A value as it stands in a form's field."""
    if value is None:
        return [] if key.holds in ("refs", "weekdays") else ""
    if key.holds in ("flag", "flag_or_number") and isinstance(value, bool):
        return "yes" if value else "no"
    if key.holds == "points":
        return "\n".join(" ".join(_number(number) for number in pair) for pair in value)
    if key.holds == "tell":
        return "\n".join(f"{item['who']}; {_number(item['within_hours'])}" for item in value)
    if key.holds == "need":
        return "\n".join(f"{name} = {_toml(item)}" for name, item in value.items())
    if key.holds == "due" and not isinstance(value, str):
        return ", ".join(value)
    if key.holds == "words":
        return ", ".join(value)
    return _number(value) if isinstance(value, int | float) else value


def _number(value: float) -> str:
    return str(int(value)) if isinstance(value, float) and value.is_integer() and abs(value) < 1e15 else repr(value)


def _toml(value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list):
        return "[" + ", ".join(_toml(item) for item in value) + "]"
    return _number(value) if isinstance(value, int | float) else f'"{value}"'


def read(key: kinds.Key, text: Any) -> Any:
    """The value somebody typed; None for an empty field. Raises NotReadable."""
    if isinstance(text, list):
        return text or None
    text = str(text).strip()
    if not text:
        return None
    if key.holds in ("number", "whole"):
        return _decimal(text)
    if key.holds == "flag":
        return text == "yes"
    if key.holds == "flag_or_number":
        return text == "yes" if text in ("yes", "no") else _decimal(text)
    if key.holds == "points":
        return [[_decimal(part) for part in line.replace(";", " ").split()] for line in text.splitlines() if line.strip()]
    if key.holds == "tell":
        return [_tell(line) for line in text.splitlines() if line.strip()]
    if key.holds == "need":
        try:
            return tomllib.loads(text)
        except ValueError as problem:
            raise NotReadable(f'expected lines such as model = "none": {problem}') from None
    if key.holds == "due" and text not in ("shift", "day", "week", "month"):
        return [part.strip() for part in text.split(",")]
    if key.holds == "words":
        return [part.strip() for part in text.split(",")]
    return text


def _decimal(text: str) -> Decimal | int:
    try:
        number = Decimal(text.replace(",", "."))
    except InvalidOperation:
        raise NotReadable(f"“{text}” is not a number") from None
    if not number.is_finite():
        raise NotReadable(f"“{text}” is not a number")
    return int(number) if number == number.to_integral_value() and "." not in str(number) else number


def _tell(line: str) -> dict[str, Any]:
    who, _, hours = line.rpartition(";")
    if not who.strip():
        raise NotReadable(f"“{line}”: expected who, a semicolon and hours, e.g. Regulator; 24")
    return {"who": who.strip(), "within_hours": _decimal(hours.strip())}
