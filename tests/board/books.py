"""The small works with a history: readings, levels and deliveries by a simple plan, so that every page has something to show.

Truth: 6 ML a day through the works; hypochlorite doses 1.10 mg/L as Cl2, caustic 8.0 mg/L as NaOH, peroxide 2.0 mg/L
as H2O2, each with a slow wave of a few per cent, so that the figures are known without reckoning them again.
"""

from __future__ import annotations

import datetime as dt
import math
import uuid
from zoneinfo import ZoneInfo

from plant.deviations.models import Deviation, DeviationEvent
from plant.ledger import actions as ledger
from plant.ledger.models import Book
from plant.readings.models import Reading
from plant.stock.models import Delivery
from tests import people

ZONE = ZoneInfo("Europe/Berlin")
VOLUME_M3_D = 6000.0
HYPO_L_PER_MM = math.pi / 4 * 1.6**2
HYPO_ACTIVE_KG_L = 0.118
NAOH_ACTIVE_KG_L = 0.25 * 1.273
PEROX_ACTIVE = 0.35


def local(day: dt.date, hour: int) -> dt.datetime:
    return dt.datetime.combine(day, dt.time(hour), ZONE).astimezone(dt.UTC)


def reading(at: dt.datetime, site: str, parameter: str, value: float, unit: str, decimals: int, **more) -> Reading:
    text = f"{value:.{decimals}f}"
    return Reading(
        site=site, parameter=parameter, taken_at=at, typed=text, typed_unit=unit, value=float(text), value_text=text,
        unit=unit, **more,
    )  # fmt: skip


def with_history(*, days: int, now: dt.datetime) -> Book:
    """The small works with rounds at 07:00 and 19:00 of every day up to ``now``, one entry a day, and deliveries."""
    book = people.small_works(now=min(people.OPENED, now - dt.timedelta(days=days + 1)))
    olga = people.person("olga")
    first = now.astimezone(ZONE).date() - dt.timedelta(days=days)
    levels = {"HYPO-BULK": 2.4, "NAOH-BULK": 2.4, "PEROX-IBC": 1000.0}
    total = 100_000.0
    for number in range(days + 1):
        day = first + dt.timedelta(days=number)
        rows: list[Reading | Delivery] = []
        wave = 1 + 0.04 * math.sin(number / 5)
        for hour in (7, 19):
            at = local(day, hour)
            if at > now:
                break
            rows += _round(at, total, levels, number)
            half = VOLUME_M3_D / 2
            total += half
            kg = half / 1000 * wave
            levels["HYPO-BULK"] -= 1.1 * kg / HYPO_ACTIVE_KG_L / HYPO_L_PER_MM / 1000
            levels["NAOH-BULK"] -= 8.0 * kg / NAOH_ACTIVE_KG_L / 1000
            levels["PEROX-IBC"] -= 2.0 * kg / PEROX_ACTIVE
            if hour == 7 and local(day, 10) <= now:
                rows += _deliveries(local(day, 10), levels)
        if rows:
            recorded = min(now, local(day, 20))
            ledger.append(
                book=book, client_id=f"day-{day}", kind="round", received={"day": str(day)}, rows=rows, by=olga, now=recorded
            )
    return book


def _round(at: dt.datetime, total: float, levels: dict[str, float], number: int) -> list[Reading]:
    return [
        reading(at, "FT-TREATED", "totaliser", total, "m3", 0),
        reading(at, "HYPO-BULK", "level", levels["HYPO-BULK"], "m", 3),
        reading(at, "NAOH-BULK", "level", levels["NAOH-BULK"], "m", 3),
        reading(at, "PEROX-IBC", "weight", levels["PEROX-IBC"] + 60, "kg", 1),
        reading(at, "RAW", "temperature", 11 + 4 * math.sin(number / 58), "°C", 1),
        reading(at, "RAW", "alkalinity", 118, "mg/L as CaCO3", 0),
        reading(at, "FILTERED", "temperature", 11 + 4 * math.sin(number / 58), "°C", 1),
        reading(at, "FILTERED", "pH", 7.31, "", 2),
        reading(at, "FILTERED", "alkalinity", 118, "mg/L as CaCO3", 0),
        reading(at, "FILTERED", "calcium_hardness", 96, "mg/L as CaCO3", 0),
        reading(at, "ENTRY", "free_chlorine", 0.52 + 0.03 * math.sin(number), "mg/L", 2),
        reading(at, "ENTRY", "pH", 8.15 + 0.05 * math.sin(number / 3), "", 2),
        reading(at, "ENTRY", "turbidity", 0.11, "NTU", 2),
    ]


def _deliveries(at: dt.datetime, levels: dict[str, float]) -> list[Delivery]:
    found = []
    for vessel, product, low, rise, quantity, unit in (
        ("HYPO-BULK", "HYPO", 0.8, 3000 / 1.2 / HYPO_L_PER_MM / 1000, 3000, "kg"),
        ("NAOH-BULK", "NAOH", 0.7, 1.8, 1800 * 1.273, "kg"),
        ("PEROX-IBC", "PEROX", 150, 850, 850, "kg"),
    ):
        if levels[vessel] < low:
            levels[vessel] += rise
            found.append(
                Delivery(
                    taken_at=at, vessel=vessel, product=product, quantity=quantity, unit=unit, lot=f"{product}-{at:%m%d}",
                    strength=118.0 if product == "HYPO" else None,
                    strength_basis="g_per_L_available_chlorine" if product == "HYPO" else "",
                )
            )  # fmt: skip
    return found


def raise_one(book: Book, *, now: dt.datetime, **fields) -> Deviation:
    """A deviation with its first event, as the judging leaves it."""
    given = {
        "code": "entry-free-chlorine-low", "kind": "bound", "level": "action", "subject_kind": "sample_point",
        "subject": "ENTRY", "parameter": "free_chlorine", "raised_for": now.astimezone(ZONE).date(),
        "since": now - dt.timedelta(hours=3), "value": "0.21 mg/L", "limit": "≥ 0.30 mg/L",
        "likely_causes": [{"cause": "weak_product", "likelihood": 0.7, "evidence": "residual low at the design dose"}],
    } | fields  # fmt: skip
    row = Deviation(**given)
    event = DeviationEvent(deviation=row, kind="raised", at=given["since"], day=given["raised_for"], fields={})
    ledger.append(
        book=book, client_id=f"deviation-{uuid.uuid4()}", kind="judged", received={}, rows=[row, event], by=None, now=now
    )
    return row
