"""The second witness: what the feeders say was used, independently of the tanks.

A feed rate (setting in L/h or kg/h, or a draw-down in mL/min) holds from its reading until the next; a point that is not in
service feeds nothing. Settings in % say nothing without a calibration and are not used.
"""

from __future__ import annotations

import datetime as dt
import itertools
from dataclasses import dataclass

from plant.dosing.reckoning import Reckoning
from plant.readings.queries import Point
from plant.works.described import DosingPoint

MAX_HOLD = dt.timedelta(hours=48)
"""A rate older than this is no witness any more (common practice, no source)."""
RATE_SD = 0.03
"""Relative standard uncertainty of a feed rate: volumetric feeders ±1 to ±5 % (from memory)."""


@dataclass(frozen=True)
class Witnessed:
    """Product used by the feeders' own account, kg."""

    kg: float
    sd_kg: float
    words: str


def witnessed(
    out: Reckoning, point: DosingPoint, start: dt.datetime, end: dt.datetime, density_kg_l: float | None
) -> Witnessed | None:
    """What the feeder says was used in [start, end); None where it says nothing, or not for the whole time."""
    for parameter, words in (("drawdown", "draw-down checks"), ("feeder_setting", "feeder settings")):
        rates = [(item.at, _kg_h(item, density_kg_l)) for item in out.found.usable(point.code, parameter)]
        usable = [(at, rate) for at, rate in rates if rate is not None]
        if usable:
            return _held(out, point, usable, start, end, words)
    return None


def _kg_h(point: Point, density_kg_l: float | None) -> float | None:
    value = point.value or 0.0
    if point.unit == "kg/h":
        return value
    if not density_kg_l:
        return None
    if point.unit == "L/h":
        return value * density_kg_l
    if point.unit == "mL/min":
        return value * 60 / 1000 * density_kg_l
    return None


def _held(
    out: Reckoning,
    point: DosingPoint,
    rates: list[tuple[dt.datetime, float]],
    start: dt.datetime,
    end: dt.datetime,
    words: str,
) -> Witnessed | None:
    changes = [item.effective_from for item in out.stated.history("state", f"dosing_point:{point.code}")]
    cuts = sorted({start, end, *[at for at, _ in rates if start < at < end], *[at for at in changes if start < at < end]})
    kg = 0.0
    for since, until in itertools.pairwise(cuts):
        if out.stated.state("dosing_point", point.code, since) != "in_service":
            continue
        held = [(at, rate) for at, rate in rates if at <= since]
        if not held or since - held[-1][0] > MAX_HOLD:
            return None
        kg += held[-1][1] * (until - since).total_seconds() / 3600
    return Witnessed(kg, RATE_SD * kg, words)
