"""One typed line, and what becomes of it: an unsaved Reading, or a refusal that says what was expected.

A line is refused only when it can't be understood (a code nobody stated, a unit that doesn't fit, digits that aren't a
number, a time that doesn't exist). A value that can be understood and is hard to believe is kept, with a mark.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field

from chemistry import errors, unit_tables, units
from plant.intake import ground as grounds
from plant.intake import moments, numbers
from plant.readings import models
from plant.works import parameters

NOT_STATED = "reason not stated"
STATISTICS = ("reading", "day_min", "day_max", "day_mean")
CHLORINES = ("free_chlorine", "total_chlorine", "combined_chlorine")


@dataclass(frozen=True)
class Typed:
    """One line as it came: text throughout."""

    site: str
    timestamp: str
    parameter: str
    value: str
    unit: str
    qualifier: str = ""
    method: str = ""
    by: str = ""
    note: str = ""
    sample: str = ""
    statistic: str = ""
    replaces: str = ""


@dataclass(frozen=True)
class Refusal:
    """A line that was not taken: where, what was read, what was expected. ``parameter`` is set when nobody knows it."""

    line: int
    read: str
    expected: str
    parameter: str = ""
    field: str = ""


@dataclass(frozen=True)
class Taken:
    """A line that was understood. ``replaces`` asks that it stand in place of what is recorded for the same sample."""

    line: int
    reading: models.Reading
    replaces: bool = False
    remarks: tuple[str, ...] = field(default=())


class _Refused(Exception):
    def __init__(self, field: str, read: str, expected: str, parameter: str = "") -> None:
        super().__init__(expected)
        self.field, self.read, self.expected, self.parameter = field, read, expected, parameter


def read_line(typed: Typed, ground: grounds.Ground, *, line: int) -> Taken | Refusal:
    """What becomes of one line."""
    try:
        return _read(typed, ground, line)
    except _Refused as problem:
        return Refusal(line, problem.read, problem.expected, problem.parameter, problem.field)


def _read(typed: Typed, ground: grounds.Ground, line: int) -> Taken:
    moment = _moment(typed.timestamp, ground)
    known = ground.parameter(typed.parameter.strip(), moment.at)
    if known is None:
        name = typed.parameter.strip()
        raise _Refused("parameter", f"parameter {name!r}", "a parameter this works knows", parameter=name)
    site = _site(typed.site, known, ground, moment.at)
    number = _number(typed, ground)
    reading = models.Reading(
        site=site,
        parameter=known.name,
        taken_at=moment.at,
        date_only=moment.date_only,
        typed=_short("value", typed.value.strip(), 80),
        typed_unit=_short("unit", typed.unit.strip(), 24),
        statistic=_statistic(typed.statistic),
        sample=_short("sample", typed.sample.strip(), 40),
        method=_short("method", typed.method.strip(), 60),
        by_name=_short("by", typed.by.strip(), 80),
        note=_short("note", typed.note.strip(), 2000),
        marks=[],
    )
    replaces = _replaces(typed)
    remark = ""
    # The unit is looked at even where there is no number: a wrong one says that the line is not what it seems.
    unit = kept = ""
    if typed.unit.strip() or isinstance(number, numbers.Number):
        unit, kept = _unit(typed.unit, known, site, ground, moment.at)
    if number is None:
        reading.state = models.Reading.State.NOT_TAKEN
        reading.note = reading.note or NOT_STATED
    elif isinstance(number, numbers.Words):
        reading.state = models.Reading.State.WORDS
    else:
        reading.value_text = _canonical(number.text, unit, known, kept)
        reading.value = float(reading.value_text)
        reading.unit, reading.qualifier = kept, number.qualifier
        reading.marks = ground.doubts(reading, known, pointed=number.pointed)
        remark = ground.remark(unit, known.name)
    return Taken(line, reading, replaces, (remark,) if remark else ())


def _moment(typed: str, ground: grounds.Ground) -> moments.Moment:
    try:
        return ground.moment(typed)
    except moments.NotATime as problem:
        raise _Refused("timestamp", f"timestamp {typed.strip()!r}", problem.expected) from None


def _site(typed: str, known: parameters.Parameter, ground: grounds.Ground, at: dt.datetime) -> str:
    code = ground.site(typed)
    kind = ground.site_kind(code, at)
    if kind is None:
        raise _Refused("site", f"site {code!r}", "the code of a sample point, meter, vessel or dosing point of this works")
    # Water is also looked at inside a vessel (the temperature of a product, the pH of a brine).
    allowed = known.sites + ((parameters.VESSEL,) if parameters.SAMPLE_POINT in known.sites else ())
    if kind not in allowed:
        kinds = " or ".join(item.replace("_", " ") for item in known.sites)
        raise _Refused("parameter", f"{known.name} at {kind.replace('_', ' ')} {code}", f"{known.name} at a {kinds}")
    return code


def _number(typed: Typed, ground: grounds.Ground) -> numbers.Number | numbers.Words | None:
    try:
        number = numbers.read(typed.value, decimal=ground.decimal)
    except numbers.NotANumber as problem:
        raise _Refused("value", f"value {typed.value.strip()!r}", problem.expected) from None
    qualifier = typed.qualifier.strip()
    if not qualifier:
        return number
    if qualifier not in ("<", ">"):
        raise _Refused("qualifier", f"qualifier {qualifier!r}", "< or > or nothing")
    if not isinstance(number, numbers.Number):
        return number
    if number.qualifier not in ("", qualifier):
        raise _Refused("qualifier", f"value {typed.value.strip()!r} with qualifier {qualifier!r}", "one qualifier")
    return numbers.Number(number.text, qualifier, number.pointed)


def _unit(
    typed: str,
    known: parameters.Parameter,
    site: str,
    ground: grounds.Ground,
    at: dt.datetime,
) -> tuple[str, str]:
    """The unit read, and the unit the value is kept in."""
    unit = ground.unit(typed)
    try:
        return unit, ground.kept_unit(unit, known, site, at)
    except grounds.WrongUnit as problem:
        raise _Refused("unit", f"unit {unit!r} for {known.name}", f"one of: {problem.accepted}") from None


def _canonical(text: str, unit: str, known: parameters.Parameter, kept: str) -> str:
    if unit == kept or (not unit and kept in ("%", "g/L")):
        return text
    own = kept if known.name not in unit_tables.PARAMETERS or known.name in grounds.BY_METER else None
    try:
        out = units.canonical_text(text, unit, known.name, own)
    except errors.ChemistryError as problem:
        raise _Refused("value", f"value {text!r} {unit}", str(problem)) from None
    if len(out) > numbers.LONGEST:
        raise _Refused("value", f"value {text!r} {unit}", "a number with fewer digits")
    return out


def _statistic(typed: str) -> str:
    name = typed.strip() or STATISTICS[0]
    if name not in STATISTICS:
        raise _Refused("statistic", f"statistic {name!r}", "one of: " + ", ".join(STATISTICS))
    return name


def _replaces(typed: Typed) -> bool:
    text = typed.replaces.strip().lower()
    if text in ("", "no"):
        return False
    if text != "yes":
        raise _Refused("replaces", f"replaces {typed.replaces.strip()!r}", "yes, no or nothing")
    if not typed.note.strip():
        raise _Refused("note", "replaces yes without a note", "the reason for the correction in the column note")
    return True


def _short(field: str, text: str, most: int) -> str:
    if len(text) > most:
        raise _Refused(field, f"{field} of {len(text)} characters", f"at most {most} characters")
    if "\x00" in text:
        raise _Refused(field, f"{field} with a NUL character", "text")
    return text
