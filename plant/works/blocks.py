"""Reads one block against the tables of kinds.py: unknown keys, types, ranges, and what a key's meaning adds.

A message names the key, what was read and what was expected. What a block refers to is checked against the
whole picture, in picture.py.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

from chemistry import errors, units, vessels
from plant.works import keys as reading
from plant.works import kinds
from plant.works.keys import BlockError

_BOOK_CODE = re.compile(r"[A-Za-z0-9][A-Za-z0-9_-]{0,23}")


def check(kind: str, subject: str, value: dict[str, Any]) -> dict[str, Any]:
    """The value as it will be kept: known keys only, numbers as numbers, times as text. Raises BlockError.

    ``value`` lacks the keys that name the subject, except where kinds.py keeps them (a round line's site and
    parameter).
    """
    if kind not in kinds.KINDS:
        raise BlockError([f"unknown kind of block {kind!r}; known: {', '.join(kinds.KINDS)}"])
    table = kinds.KINDS[kind]
    problems = _subject_problems(kind, subject)
    keys = list(table.keys)
    chooser = {"vessel": "shape", "limit": "kind"}.get(kind)
    if chooser and isinstance(value.get(chooser), str):
        keys += table.extra.get(value[chooser], ())
    clean = reading.read_keys(keys, value, problems)
    if chooser and chooser in clean:
        reading.refuse_unknown(value, keys, problems, f"{chooser} {clean[chooser]}")
    else:
        reading.refuse_unknown(value, keys + [key for more in table.extra.values() for key in more], problems, "")
    if not problems and kind in _MORE:
        _MORE[kind](clean, problems)
    if problems:
        raise BlockError(problems)
    return clean


def subject_of(kind: str, block: dict[str, Any], works_code: str = "") -> tuple[str, dict[str, Any]]:
    """The subject a block of a works file names, and the rest of its keys. Raises BlockError."""
    table = kinds.KINDS[kind]
    rest = dict(block)
    if kind == "report":
        return "form", rest
    if kind == "state":
        named = [name for name in table.names if name in rest]
        if len(named) != 1:
            raise BlockError([f"expected one of the keys {', '.join(table.names)}, found {len(named)}"])
        code = rest.pop(named[0])
        if named[0] == "works" and code is True:
            code = works_code
        return f"{named[0]}:{_text(code, named[0])}", rest
    parts = []
    for name in table.names:
        if name not in rest:
            raise BlockError([f"key {name} is missing: it names what the block is about"])
        parts.append(_text(rest[name] if table.kept else rest.pop(name), name))
    return ":".join(parts), rest


def _text(value: Any, name: str) -> str:
    if not isinstance(value, str) or not value.strip():
        raise BlockError([f"{name}: expected a code in quotes, read {value!r}"])
    return value.strip()


def _subject_problems(kind: str, subject: str) -> list[str]:
    if kind == "works":
        fits, expected = _BOOK_CODE.fullmatch(subject), "up to 24 letters, digits, - and _"
    elif kind in ("round_line", "state"):
        first, _, second = subject.partition(":")
        fits, expected = (
            reading.CODE.fullmatch(first) and reading.CODE.fullmatch(second),
            "two codes with a colon between",
        )
    elif kind == "membership":
        fits, expected = re.fullmatch(r"[\w.@+-]{1,150}", subject), "a user name"
    else:
        fits, expected = reading.CODE.fullmatch(subject), "up to 40 letters, digits, spaces and . ( ) + - _"
    return [] if fits and subject == subject.strip() else [f"code {subject!r}: expected {expected}"]


def _more_of_product(value: dict[str, Any], problems: list[str]) -> None:
    basis = value["strength_basis"]
    if "pct" in basis and value["strength"] > 100:
        problems.append(f"strength: read {value['strength']}, expected at most 100 in {basis}")
    if basis in ("g_per_L_available_chlorine", "trade_pct") and "density_kg_per_L" not in value:
        problems.append(f"density_kg_per_L is missing: a strength in {basis} needs it to become a mass")


def _more_of_vessel(value: dict[str, Any], problems: list[str]) -> None:
    try:
        vessels.check_shape({key: item for key, item in value.items() if key != "role"})
    except errors.ChemistryError as problem:
        problems.append(f"shape: {problem}")


def _more_of_limit(value: dict[str, Any], problems: list[str]) -> None:
    named = [subject for subject in kinds.LIMIT_SUBJECTS if subject in value]
    if len(named) != 1 and not (value["kind"] == "inactivation_ratio" and not named):
        problems.append(f"expected one of {', '.join(kinds.LIMIT_SUBJECTS)}, found {len(named)}")
    if value["kind"] in kinds.OF_A_PARAMETER and "parameter" not in value:
        problems.append(f"key parameter is missing: a limit of kind {value['kind']} is of a parameter")
    if value["kind"] in ("bound", "running_mean") and not value.keys() & {"low", "high"}:
        problems.append("expected low, high or both")
    if "low" in value and "high" in value and value["low"] > value["high"]:
        problems.append(f"low {value['low']} is above high {value['high']}")


def _more_of_parameter(value: dict[str, Any], problems: list[str]) -> None:
    try:
        units.kind_of(value["unit"])
    except errors.ChemistryError as problem:
        problems.append(f"unit: {problem}")
    for low, high in (("low", "high"), ("usual_low", "usual_high")):
        if low in value and high in value and value[low] > value[high]:
            problems.append(f"{low} {value[low]} is above {high} {value[high]}")


_MORE: dict[str, Callable[[dict[str, Any], list[str]], None]] = {
    "product": _more_of_product,
    "vessel": _more_of_vessel,
    "limit": _more_of_limit,
    "parameter": _more_of_parameter,
}
