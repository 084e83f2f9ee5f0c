"""A works with a few readings, put straight into a book: for tests of what is reckoned, not of how it comes in."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo

from plant.clock import Calendar
from plant.ledger import actions as ledger
from plant.ledger.models import Book
from plant.readings.models import Reading
from plant.stock.models import Delivery, Transfer
from plant.works import load

CALENDAR = Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))
OPENED = dt.datetime(2026, 1, 1, 6, tzinfo=dt.UTC)

HEAD = """
[works]
code = "TRAP"
name = "Trap Water Works"
timezone = "Europe/Berlin"
operating_day_starts = "07:00"
[[sample_point]]
code = "OUT"
name = "Outlet"
stage = "entry"
[[meter]]
code = "FT"
name = "Treated water"
unit = "m3"
digits = 7
accuracy_pct = 0.5
[[product]]
code = "NAOH"
name = "Caustic 25 %"
chemical = "NaOH"
strength = 25.0
strength_basis = "weight_pct"
density_kg_per_L = 1.2
dose_basis = "NaOH"
strength_sd_pct = 1.0
"""
TANK = """
[[vessel]]
code = "{code}"
name = "Tank {code}"
product = "{product}"
role = "{role}"
shape = "vertical_cylinder"
diameter_m = 1.1283792
height_m = 4.0
heel_L = {heel}
"""
POINT = """
[[dosing_point]]
code = "CAUSTIC"
name = "Caustic"
product = "NAOH"
vessels = {vessels}
meter = "{meter}"
sample_point = "OUT"
need = {{ model = "none" }}
[[design_dose]]
dosing_point = "CAUSTIC"
dose_mg_per_L = 8.0
effective_from = 2026-01-01T07:00:00
reason = "commissioning"
"""


def tank(code: str, product: str = "NAOH", role: str = "bulk", heel: float = 0) -> str:
    """A tank of 1.000 m2: 1 mm is 1 L."""
    return TANK.format(code=code, product=product, role=role, heel=heel)


def point(*vessels: str, meter: str = "FT") -> str:
    """The dosing point CAUSTIC, fed from these vessels, design 8 mg/L."""
    return POINT.format(vessels=str(list(vessels)).replace("'", '"'), meter=meter)


def book(*parts: str) -> Book:
    """A book in which these parts of a works file are stated from the beginning."""
    load.load(data="".join([HEAD, *parts]).encode(), by=None, now=OPENED)
    return Book.objects.get(code="TRAP")


def at(text: str) -> dt.datetime:
    """An instant of the works' wall clock."""
    return CALENDAR.instant(dt.datetime.fromisoformat(text))


def read(site: str, when: str, parameter: str, value: float | None, unit: str = "m") -> Reading:
    """A reading in its canonical unit."""
    return Reading(
        site=site,
        taken_at=at(when),
        parameter=parameter,
        value=value,
        value_text="" if value is None else repr(value),
        typed="" if value is None else repr(value),
        unit=unit,
        state="not_taken" if value is None else "taken",
        note="display off" if value is None else "",
    )


def level(site: str, when: str, litres: float) -> Reading:
    """A dip of one of the tanks, given in litres."""
    return read(site, when, "level", litres / 1000)


def count(when: str, m3: float, site: str = "FT") -> Reading:
    """A totaliser."""
    return read(site, when, "totaliser", m3, "m3")


def delivery(vessel: str, when: str, kg: float, product: str = "NAOH") -> Delivery:
    """A load by weight."""
    return Delivery(taken_at=at(when), vessel=vessel, product=product, quantity=kg, unit="kg", density_kg_per_l=1.2)


def transfer(source: str, target: str, when: str, litres: float, water_l: float = 0.0) -> Transfer:
    """So many litres from one tank to another."""
    return Transfer(taken_at=at(when), from_vessel=source, to_vessel=target, quantity=litres, unit="L", carrier_water_l=water_l)


def enter(book: Book, *rows, now: str = "2026-06-01T07:00") -> None:
    """Appends the rows as one entry."""
    ledger.append(
        book=book, client_id=f"{book.head_seq}", kind="file", received={"n": len(rows)}, rows=rows, by=None, now=at(now)
    )
