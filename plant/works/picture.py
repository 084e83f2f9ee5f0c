"""Does all that is stated of a works fit together at a moment? References, circles, units, doubled codes."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from chemistry import errors, units
from plant.works import kinds, parameters
from plant.works.stated import Stated


@dataclass(frozen=True)
class Misfit:
    """One thing that doesn't fit: the block it stands in, and a sentence."""

    kind: str
    subject: str
    message: str


def misfits(stated: Stated, at: dt.datetime) -> list[Misfit]:
    """All that doesn't fit at a moment."""
    found = [*_references(stated, at), *_twice(stated, at), *_cycles(stated, at)]
    for kind, look in (
        ("vessel", _vessel),
        ("dosing_point", _dosing_point),
        ("limit", _limit),
        ("round_line", _round_line),
        ("parameter", _parameter),
    ):
        for subject, value in stated.in_force(kind, at):
            found += [Misfit(kind, subject, message) for message in look(stated, at, value, subject)]
    return found


def _references(stated: Stated, at: dt.datetime) -> Iterator[Misfit]:
    for kind in kinds.ALL:
        for subject, value in stated.in_force(kind.name, at):
            for key in kind.keys:
                if not key.refers or key.name not in value:
                    continue
                codes = value[key.name] if key.holds == "refs" else [value[key.name]]
                for code in codes:
                    yield from _missing(stated, at, kind.name, subject, key.name, key.refers, code)
            if kind.name in ("design_dose", "opening_stock"):
                yield from _missing(stated, at, kind.name, subject, kind.names[0], kind.names[0], subject)
            if kind.name == "state":
                named, _, code = subject.partition(":")
                yield from _missing(stated, at, "state", subject, named, named, code)


def _missing(stated: Stated, at: dt.datetime, kind: str, subject: str, key: str, refers: str, code: str) -> Iterator[Misfit]:
    if refers == "site":
        if stated.site_kind(code, at) is None:
            words = "no sample point, meter, vessel or dosing point"
            yield Misfit(kind, subject, f"{key}: {words} {code!r} is stated")
    elif stated.value(refers, code, at) is None:
        there = [name for name, _ in stated.in_force(refers, at)]
        known = f"; stated: {', '.join(there[:12])}" if there else ""
        yield Misfit(kind, subject, f"{key}: no {refers.replace('_', ' ')} {code!r} is stated{known}")


def _twice(stated: Stated, at: dt.datetime) -> Iterator[Misfit]:
    seen: dict[str, str] = {}
    for kind in kinds.SITES:
        for code, _ in stated.in_force(kind, at):
            if code in seen:
                yield Misfit(kind, code, f"code {code!r} names a {seen[code].replace('_', ' ')} already")
            seen.setdefault(code, kind)


def _cycles(stated: Stated, at: dt.datetime) -> Iterator[Misfit]:
    fed = {code: str(value.get("fed_from", "")) for code, value in stated.in_force("vessel", at)}
    told: set[str] = set()
    for start in fed:
        path = [start]
        while (step := fed.get(path[-1], "")) and step not in path:
            path.append(step)
        if step and step == start and start not in told:
            told.update(path)
            circle = " ← ".join([*path, start])
            yield Misfit("vessel", start, f"fed_from: the vessels fill each other in a circle: {circle}")


def _vessel(stated: Stated, at: dt.datetime, value: dict[str, Any], _subject: str) -> Iterator[str]:
    product = stated.value("product", value["product"], at)
    if product and value["shape"] != "scale" and "density_kg_per_L" not in product:
        yield f"product: {value['product']} has no density_kg_per_L, which a vessel known by its level needs"
    source = stated.value("vessel", value.get("fed_from", ""), at)
    if source and source["product"] != value["product"]:
        yield f"fed_from: {value['fed_from']} holds {source['product']}, not {value['product']}"


def _dosing_point(stated: Stated, at: dt.datetime, value: dict[str, Any], _subject: str) -> Iterator[str]:
    for code in value["vessels"]:
        vessel = stated.value("vessel", code, at)
        if vessel and vessel["product"] != value["product"]:
            yield f"vessels: {code} holds {vessel['product']}, expected {value['product']}"
    meter = stated.value("meter", value["meter"], at)
    if meter and meter["unit"] not in kinds.WATER_UNITS:
        expected = ", ".join(kinds.WATER_UNITS)
        yield f"meter: {value['meter']} counts {meter['unit']}, expected one of {expected}"
    feed = stated.value("meter", value.get("feed_meter", ""), at)
    if feed and feed["unit"] not in kinds.PRODUCT_UNITS:
        yield (f"feed_meter: {value['feed_meter']} counts {feed['unit']}, expected one of {', '.join(kinds.PRODUCT_UNITS)}")
    need = value.get("need", {"model": "none"})
    if need["model"] == "curve" and need["parameter"] not in parameters.known(stated, at):
        yield f"need: no parameter {need['parameter']!r} is known"


def _limit(stated: Stated, at: dt.datetime, value: dict[str, Any], _subject: str) -> Iterator[str]:
    name = value.get("parameter")
    if name is None:
        return
    parameter = parameters.known(stated, at).get(name)
    if parameter is None:
        yield f"parameter: {name!r} is not known{_near(stated, at)}"
        return
    site_kind = next((kind for kind in kinds.SITES if kind in value), None)
    if site_kind and site_kind not in parameter.sites and value["kind"] in kinds.OF_A_PARAMETER:
        yield f"parameter: {name} is not read at a {site_kind.replace('_', ' ')}"
        return
    if "unit" in value and "meter" not in value and value["kind"] != "holding":
        try:
            units.canonical(1.0, value["unit"], name, parameters.own_unit(stated, at, name))
        except errors.ChemistryError as problem:
            yield f"unit: {problem}"


def _round_line(stated: Stated, at: dt.datetime, value: dict[str, Any], _subject: str) -> Iterator[str]:
    parameter = parameters.known(stated, at).get(value["parameter"])
    kind = stated.site_kind(value["site"], at)
    if parameter is None:
        yield f"parameter: {value['parameter']!r} is not known{_near(stated, at)}"
    elif kind is not None and kind not in parameter.sites:
        yield f"parameter: {value['parameter']} is not read at a {kind.replace('_', ' ')} ({value['site']})"


def _near(stated: Stated, at: dt.datetime) -> str:
    return f"; known: {', '.join(parameters.known(stated, at))}"


def _parameter(stated: Stated, at: dt.datetime, value: dict[str, Any], subject: str) -> Iterator[str]:
    if subject in parameters.PARAMETERS:
        yield f"name: {subject} is built in and can't be defined again"
