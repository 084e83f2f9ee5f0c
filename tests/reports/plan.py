"""A plan of readings for the small works, as a record file: what the program takes in, and what the tests reckon from.

Rounds at 07:00 and 19:00 local time (the operating day starts at 07:00), so that each day's figures follow from the file
by subtraction. Caustic tank: 1 mm is about 1 L, 1.273 kg/L, 25 % NaOH. Peroxide on a scale, 35 % H2O2.
"""

from __future__ import annotations

import csv
import datetime as dt
import io
import math
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

from plant.intake import records
from plant.ledger import actions as ledger
from plant.ledger.models import Book
from plant.stock.models import Delivery
from tests import people

ZONE = ZoneInfo("Europe/Berlin")
HEADER = ("site", "timestamp", "parameter", "value", "unit", "note")
CAUSTIC_KG_PER_M = math.pi / 4 * 1.1283792**2 * 1000 * 1.273
CAUSTIC_SHARE = 0.25
PEROXIDE_SHARE = 0.35
DELIVERED = "2026-03-12T10:00"
DELIVERED_KG = 1273.0


def lines(first: dt.date, last: dt.date) -> list[tuple[str, str, str, str, str, str]]:
    """Rounds from the morning of ``first`` to the morning after ``last``."""
    out = []
    total, hypo, caustic, peroxide = 1_000_000, 2.600, 2.800, 1100.0
    day, number = first, 0
    while day <= last + dt.timedelta(days=1):
        for hour in (7, 19):
            if day > last and hour == 19:
                break
            at = f"{day.isoformat()}T{hour:02d}:00"
            out += [
                ("FT-TREATED", at, "totaliser", str(total), "m3", ""),
                ("HYPO-BULK", at, "level", f"{hypo:.3f}", "m", ""),
                ("NAOH-BULK", at, "level", f"{caustic:.3f}", "m", ""),
                ("PEROX-IBC", at, "weight", f"{peroxide:.1f}", "kg", ""),
                ("RAW", at, "temperature", f"{8 + number % 5}.{number % 10}", "°C", ""),
                ("ENTRY", at, "pH", f"{8.0 + (number % 7) / 50:.2f}", "", ""),
                chlorine(at, number),
            ]
            step = 2600 + (number * 137) % 700
            total += step
            hypo -= 0.006 + (number % 3) / 1000
            caustic -= 0.018 + (number % 4) / 1000
            peroxide -= 6.0 + (number % 5) / 2
            if at == DELIVERED[:-5] + "07:00":
                caustic += DELIVERED_KG / CAUSTIC_KG_PER_M
            number += 1
        day += dt.timedelta(days=1)
    return out


def chlorine(at: str, number: int) -> tuple[str, str, str, str, str, str]:
    """Mostly a number; now and then below detection, or not taken with or without a reason."""
    if number % 29 == 7:
        return ("ENTRY", at, "free_chlorine", "<0.05", "mg/L", "")
    if number % 31 == 11:
        return ("ENTRY", at, "free_chlorine", "", "mg/L", "analyser being cleaned")
    if number % 37 == 5:
        return ("ENTRY", at, "free_chlorine", "", "mg/L", "")
    return ("ENTRY", at, "free_chlorine", f"{0.42 + (number % 9) / 100:.2f}", "mg/L", "")


def text(rows: list[tuple[str, ...]]) -> str:
    """The rows as a record file."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(HEADER)
    writer.writerows(rows)
    return out.getvalue()


def bring(book: Book, rows: list[tuple[str, ...]], folder: Path, *, now: dt.datetime, header: tuple[str, ...] = HEADER) -> None:
    """Takes rows in as the import command does, without judging."""
    path = folder / f"records-{book.head_seq}.csv"
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    path.write_text(out.getvalue())
    counted = records.bring_in(
        book=book, sheet=records.open_file(path), wanted=records.Wanted(), by=people.person("olga"), now=now, judge=False
    )
    assert not counted.refused, counted


def deliver(book: Book, *, now: dt.datetime, **more: Any) -> None:
    """The load of caustic that the plan's levels show."""
    load = Delivery(
        taken_at=local(DELIVERED).astimezone(dt.UTC),
        vessel="NAOH-BULK",
        product="NAOH",
        quantity=DELIVERED_KG,
        unit="kg",
        lot="NAOH-001",
        supplier="Invented Supplies",
        document="D 17",
        **more,
    )
    ledger.append(
        book=book, client_id="delivery", kind="line", received={"lot": load.lot}, rows=[load], by=people.person("olga"), now=now
    )


def works(folder: Path, first: dt.date, last: dt.date, *, now: dt.datetime) -> tuple[Book, list[tuple[str, ...]]]:
    """The small works with the plan's readings and delivery in its book, and the rows."""
    book = people.small_works()
    rows: list[tuple[str, ...]] = list(lines(first, last))
    bring(book, rows, folder, now=now)
    if first <= local(DELIVERED).date() <= last:
        deliver(book, now=now)
    return book, rows


def local(moment: str) -> dt.datetime:
    """A local time of the plan as an instant."""
    return dt.datetime.fromisoformat(moment).replace(tzinfo=ZONE)
