"""How moments, readings and figures are written on a screen: local time, and the units the works has chosen."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from chemistry import units
from plant import clock
from plant.dosing.figures import Figure
from plant.readings.queries import Point
from plant.scene import numbers
from plant.works import described
from plant.works.parameters import Parameter

US = {"°C": "°F", "m": "ft", "kg": "lb", "L": "US_gal", "m3": "US_gal", "ML": "US_Mgal", "m3/h": "US_gal/min"}
NAMES = {
    "US_gal": "US gal",
    "US_Mgal": "US Mgal",
    "US_gal/min": "US gal/min",
    "uS/cm": "µS/cm",
    "m3": "m³",
    "m3/h": "m³/h",
    "mg/L as CaCO3": "mg/L CaCO₃",
}


@dataclass(frozen=True)
class Shown:
    """A quantity as a screen shows it: its words and its unit, apart."""

    words: str
    unit: str = ""

    def __str__(self) -> str:
        return f"{self.words} {self.unit}".strip()


def unit_name(unit: str) -> str:
    """A unit as it is printed."""
    return NAMES.get(unit, unit)


def in_units(value: float, unit: str, works: described.Works) -> tuple[float, str]:
    """Value and unit in what the works has chosen to see."""
    if works.units == "us" and unit in US:
        return float(units.convert(value, unit, US[unit])), US[unit]
    return value, unit


def amount(value: float | None, unit: str, works: described.Works) -> Shown:
    """A figure of three places; "not known" where there is none."""
    if value is None:
        return Shown("not known")
    value, unit = in_units(value, unit, works)
    return Shown(numbers.tidy(value), unit_name(unit))


def figure(one: Figure, works: described.Works, *, spread: bool = False) -> Shown:
    """A figure, with two standard uncertainties beside it where ``spread``."""
    shown = amount(one.value, one.unit, works)
    if spread and one.value is not None and one.sd:
        value, _ = in_units(one.value, one.unit, works)
        # A ratio, so that a scale with an offset (°F) does not spoil the uncertainty.
        sd = one.sd * (value / one.value if one.value else 1.0)
        return Shown(numbers.with_spread(value, 2 * sd), shown.unit)
    return shown


def reading(point: Point, parameter: Parameter | None, works: described.Works) -> Shown:
    """A reading: as typed where it was typed in the unit shown, else in as many decimals as its parameter has."""
    if point.state == "not_taken":
        return Shown("not taken")
    if point.value is None:
        return Shown(point.typed or "no value")
    value, unit = in_units(point.value, point.unit, works)
    if unit == point.unit and point.typed_unit in ("", point.unit) and point.typed:
        typed = point.typed.strip().lstrip("<>").strip()
        return Shown(f"{point.qualifier}{typed}", unit_name(unit))
    decimals = parameter.decimals if parameter else 2
    return Shown(f"{point.qualifier}{value:.{decimals}f}", unit_name(unit))


def moment(at: dt.datetime, now: dt.datetime, calendar: clock.Calendar) -> str:
    """A moment by the works' clock, as short as it can be told apart: 06:10, yesterday 22:40, 3 Nov 06:10."""
    local, today = calendar.local(at), calendar.local(now).date()
    if local.date() == today:
        return f"{local:%H:%M}"
    if local.date() == today - dt.timedelta(days=1):
        return f"yesterday {local:%H:%M}"
    year = "" if local.year == today.year else f" {local.year}"
    return f"{local.day} {local:%b}{year} {local:%H:%M}"


def day(date: dt.date, now: dt.datetime, calendar: clock.Calendar) -> str:
    """A date, without its year where that is this year's."""
    year = "" if date.year == calendar.local(now).year else f" {date.year}"
    return f"{date.day} {date:%b}{year}"


def formula(basis: str) -> str:
    """A formula with its figures set low, as it is printed: Ca(OH)₂."""
    return numbers.formula(basis)


def count(number: int, one: str, many: str = "") -> str:
    """ "1 thing", "3 things"."""
    return f"{number} {one if number == 1 else many or one + 's'}"
