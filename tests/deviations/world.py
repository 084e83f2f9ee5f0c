"""A small invented works and the means to write its history: every number in it is made up."""

from __future__ import annotations

import datetime as dt
import itertools
import math
import random
from collections.abc import Callable
from zoneinfo import ZoneInfo

from plant import clock
from plant.deviations import actions, queries
from plant.deviations.queries import DeviationView
from plant.ledger import actions as ledger
from plant.ledger.models import Book
from plant.readings.models import Reading
from plant.stock.models import Delivery
from tests import people

ZONE = ZoneInfo("Europe/Berlin")
OPENED = dt.datetime(2025, 12, 31, 5, 0, tzinfo=dt.UTC)
FIRST = dt.date(2026, 2, 2)
_ids = itertools.count(1)

WORKS = """
[works]
code = "DEV"
name = "Alder Reach Water Works"
timezone = "Europe/Berlin"
operating_day_starts = "07:00"
{works_extra}
[[shift]]
name = "day"
starts = "07:00"
[[shift]]
name = "night"
starts = "19:00"
[[sample_point]]
code = "ENTRY"
name = "Works outlet"
stage = "entry"
[[meter]]
code = "FT"
name = "Treated water"
unit = "m3"
digits = 9
accuracy_pct = 0.5
{points}
{limits}
"""

POINT = """
[[product]]
code = "{code}"
name = "{code} solution"
chemical = "NaOH"
strength = 25.0
strength_basis = "weight_pct"
density_kg_per_L = 1.25
strength_sd_pct = 1.0
dose_basis = "NaOH"
certified_maximum_mg_per_L = 100.0
[[vessel]]
code = "{code}-TANK"
name = "{code} tank, 1 mm is 1 L"
product = "{code}"
shape = "vertical_cylinder"
diameter_m = 1.1283792
height_m = 7.0
level_sd_m = 0.005
[[dosing_point]]
code = "{code}-P"
name = "{code} point"
product = "{code}"
vessels = ["{code}-TANK"]
meter = "FT"
sample_point = "ENTRY"
need = {{ model = "none" }}
[[design_dose]]
dosing_point = "{code}-P"
dose_mg_per_L = 10.0
effective_from = 2026-01-01T07:00:00
"""
"""10 mg/L NaOH in 12 ML a day is 120 kg, 480 kg of product, 384 L, 0.384 m of level: more than 5 % of the tank."""

LOW = """
[[limit]]
code = "chlorine-low"
sample_point = "ENTRY"
parameter = "free_chlorine"
kind = "bound"
level = "action"
low = 0.30
unit = "mg/L"
"""

LITRES_A_DAY = 384.0
M3_A_DAY = 12000.0


def open_works(limits: str = "", codes: tuple[str, ...] = ("NAOH",), works_extra: str = "") -> Book:
    """The works, with everyone of tests.people in it."""
    points = "".join(POINT.format(code=code) for code in codes)
    book = people.open_works(WORKS.format(limits=limits, points=points, works_extra=works_extra), now=OPENED)
    people.join(book, now=OPENED)
    return book


def local(text: str) -> dt.datetime:
    """A local time of the works as an instant."""
    return dt.datetime.fromisoformat(text).replace(tzinfo=ZONE).astimezone(dt.UTC)


def reading(site: str, parameter: str, at: dt.datetime, value: str, unit: str = "", **rest: object) -> Reading:
    """An unsaved reading, already in its canonical unit."""
    qualifier = value[0] if value[:1] in ("<", ">") else ""
    number = value.lstrip("<>")
    fields: dict[str, object] = {"typed": value, "typed_unit": unit, "unit": unit}
    if number:
        fields |= {"value": float(number), "value_text": number, "qualifier": qualifier}
    else:
        fields |= {"state": "not_taken"}
    return Reading(site=site, parameter=parameter, taken_at=at, **(fields | rest))


def enter(book: Book, *rows: object, now: dt.datetime, by: object = None) -> list[Reading]:
    """Appends rows as one entry."""
    number = next(_ids)
    ledger.append(book=book, client_id=f"test-{number}", kind="round", received={"n": number}, rows=list(rows), by=by, now=now)
    return list(rows)  # type: ignore[arg-type]


def chlorine(book: Book, values: list[tuple[str, str]], *, now: dt.datetime | None = None) -> list[Reading]:
    """Free chlorine at ENTRY: (local time, value)."""
    rows = [reading("ENTRY", "free_chlorine", local(at), value, "mg/L") for at, value in values]
    return enter(book, *rows, now=now or max(row.taken_at for row in rows))


def history(
    book: Book,
    first: dt.date,
    days: int,
    *,
    codes: tuple[str, ...] = ("NAOH",),
    factor: Callable[[str, dt.date], float] = lambda code, day: 1.0,
    level: Callable[[str, dt.datetime, float], float | None] = lambda code, at, level: level,
    metered: Callable[[dt.date], float] = lambda day: 1.0,
    noise: float = 0.0,
    gauge_m: float = 0.0,
    seed: int = 1,
    booked: Callable[[str, dt.date], bool] = lambda code, day: True,
    now: dt.datetime | None = None,
) -> None:
    """Levels and totaliser at 07:00 and 19:00 from the start of ``first`` to the end of the last day, in one entry.

    ``factor`` is how much of the design dose is really fed that day; ``level`` what the gauge shows of the true level;
    ``metered`` what the meter counts of the true water. A tank below 1.5 m is filled by 4.8 m in the middle of the day.
    """
    rng = random.Random(seed)
    rows: list[object] = []
    true = dict.fromkeys(codes, 6.5)
    total = 1000.0
    for n in range(days + 1):
        day = first + dt.timedelta(days=n)
        for half, hour in enumerate((7, 19)):
            at = dt.datetime.combine(day, dt.time(hour), ZONE).astimezone(dt.UTC)
            rows.append(reading("FT", "totaliser", at, f"{total:.0f}", "m3"))
            for code in codes:
                shown = level(code, at, true[code] + rng.gauss(0, gauge_m))
                if shown is not None:
                    rows.append(reading(f"{code}-TANK", "level", at, f"{shown:.3f}", "m"))
            if n == days:
                break
            total += M3_A_DAY / 2 * metered(day)
            for code in codes:
                fed = factor(code, day) * math.exp(rng.gauss(0, noise)) if noise else factor(code, day)
                true[code] -= fed * LITRES_A_DAY / 2 / 1000
                if half == 0 and true[code] < 1.5:
                    true[code] += 4.8
                    if booked(code, day):
                        rows.append(
                            Delivery(
                                taken_at=at + dt.timedelta(hours=5),
                                vessel=f"{code}-TANK",
                                product=code,
                                quantity=6000.0,
                                unit="kg",
                                quantity_sd_pct=0.1,
                                lot=f"L{n}",
                            )
                        )
    enter(book, *rows, now=now or dt.datetime.combine(first + dt.timedelta(days=days), dt.time(12), dt.UTC))


def limit(kind: str, level: str = "alert", **keys: object) -> str:
    lines = [f'{key} = "{value}"' if isinstance(value, str) else f"{key} = {value}" for key, value in keys.items()]
    return "\n".join(["[[limit]]", f'code = "own-{kind}"', f'kind = "{kind}"', f'level = "{level}"', *lines, ""])


def on_entry(kind: str, parameter: str = "free_chlorine", **keys: object) -> str:
    return limit(kind, sample_point="ENTRY", parameter=parameter, **keys)


def judged(book: Book, first: dt.date, last: dt.date | None = None, now: dt.datetime | None = None) -> list[DeviationView]:
    """Judges the days after their end and gives what there is, without what is only missing."""
    last = last or first
    now = now or dt.datetime.combine(last + dt.timedelta(days=1), dt.time(12), dt.UTC)
    actions.judge(book=book, days=clock.days(first, last), now=now)
    found = queries.between(book, first, last)
    return [view for view in found if view.kind != "missing"]


def kinds(views: list[DeviationView]) -> list[str]:
    return [view.kind for view in views]
