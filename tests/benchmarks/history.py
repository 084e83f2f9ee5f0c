"""Does a month cost the same whatever the years behind it?

Builds a works of 12 products and 40 lines a shift in a scratch database, first with one year of history, then with ten,
and prints what the month's comparison, the stock and the pages of board, stock and dosing cost beside the bare SQL that fetches the same
rows. Ratios of one run only; absolute times are shown but compare nothing.

    python tests/benchmarks/history.py [years ...]      (default: 1 10)
"""

from __future__ import annotations

import datetime as dt
import os
import random
import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
os.environ["WEIRBOOK_DATA"] = tempfile.mkdtemp(prefix="weirbook-benchmark-")
os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.development")
os.environ.pop("DATABASE_URL", None)

import django

django.setup()

from django.core.management import call_command  # noqa: E402
from django.db import connection  # noqa: E402

from plant import clock  # noqa: E402
from plant.dosing import queries as dosing  # noqa: E402
from plant.dosing import states  # noqa: E402
from plant.ledger import actions as ledger  # noqa: E402
from plant.ledger.models import Book  # noqa: E402
from plant.readings.models import Reading  # noqa: E402
from plant.stock.models import Delivery  # noqa: E402
from plant.works.models import Statement  # noqa: E402

POINTS = 12
WATER_LINES = 15
END = dt.date(2026, 10, 31)
ROUNDS = 5


def stated() -> list[Statement]:
    """Twelve products, each in its tank at its dosing point, one meter, one sample point."""

    def say(kind: str, subject: str, **value: object) -> Statement:
        return Statement(kind=kind, subject=subject, value=value, effective_from=clock.BEGINNING, reason="benchmark")

    rows = [
        say("works", "BENCH", name="Benchmark", timezone="Europe/Berlin", operating_day_starts="07:00", units="si"),
        say("meter", "FT", name="Totaliser", unit="m3", digits=8, accuracy_pct=0.5),
        say("sample_point", "ENTRY", name="Outlet", stage="entry"),
    ]
    for n in range(POINTS):
        oxidant = n == 0
        rows += [
            say(
                "product",
                f"P{n}",
                name=f"Product {n}",
                chemical="NaOCl" if oxidant else "NaOH",
                strength=125.0 if oxidant else 25.0,
                strength_basis="g_per_L_available_chlorine" if oxidant else "weight_pct",
                density_kg_per_L=1.2,
                strength_sd_pct=1.0,
                dose_basis="Cl2" if oxidant else "NaOH",
                lead_time_days=4,
                load_kg=6000,
                reserve_days=7,
            ),
            say("vessel", f"T{n}", name=f"Tank {n}", product=f"P{n}", shape="vertical_cylinder", diameter_m=2.0, height_m=4.0),
            say(
                "dosing_point", f"D{n}", name=f"Point {n}", product=f"P{n}", vessels=[f"T{n}"], meter="FT", sample_point="ENTRY"
            ),
            say("design_dose", f"D{n}", dose_mg_per_L=5.0),
        ]
    return rows


def fill(book: Book, years: int) -> int:
    """Two shifts a day, 40 lines each: 12 levels, a totaliser, and readings of the water."""
    rng = random.Random(7)  # not a secret, a benchmark
    calendar = clock.Calendar(clock.ZoneInfo("Europe/Berlin"), dt.time(7))
    first = END.replace(year=END.year - years) + dt.timedelta(days=1)
    litres, count, rows = [9000.0] * POINTS, 0, 0
    for day in clock.days(first, END + dt.timedelta(days=1)):
        start = calendar.start_of(day)
        for half in range(2):
            at = start + dt.timedelta(hours=12 * half)
            batch: list = [
                Reading(site="FT", parameter="totaliser", taken_at=at, value=float(count), value_text=str(count), unit="m3")
            ]
            for n in range(POINTS):
                level = litres[n] / 3141.592653589793
                batch.append(
                    Reading(site=f"T{n}", parameter="level", taken_at=at, value=level, value_text=f"{level:.3f}", unit="m")
                )
                litres[n] -= 6000 * 0.005 / (0.25 * 1.2) * rng.uniform(0.97, 1.03)
                if litres[n] < 3000:
                    when = at + dt.timedelta(hours=3)
                    batch.append(
                        Delivery(
                            taken_at=when, vessel=f"T{n}", product=f"P{n}", quantity=7200.0, unit="kg", density_kg_per_l=1.2
                        )
                    )
                    litres[n] += 6000
            batch += [
                Reading(site="ENTRY", parameter="pH", taken_at=at, value=7.5, value_text="7.50", sample=str(k))
                for k in range(WATER_LINES)
            ]
            batch += [
                Reading(
                    site="ENTRY",
                    parameter="free_chlorine",
                    taken_at=at,
                    value=0.5,
                    value_text="0.50",
                    unit="mg/L",
                    sample=str(k),
                )
                for k in range(40 - 1 - POINTS - WATER_LINES)
            ]
            count += 6000
            rows += len(batch)
            ledger.append(book=book, client_id=f"{day}-{half}", kind="round", received={}, rows=batch, by=None, now=at)
    return rows


def timed(work: Callable[[], object]) -> float:
    """The median of a few runs, seconds."""
    taken = []
    for _ in range(ROUNDS):
        began = time.perf_counter()
        work()
        taken.append(time.perf_counter() - began)
    return statistics.median(taken)


def bare(book: Book, start: dt.datetime, end: dt.datetime) -> Callable[[], object]:
    """The bare SQL that fetches a month's rows, as the table has them."""

    def run() -> object:
        with connection.cursor() as cursor:
            cursor.execute(
                "SELECT * FROM readings_reading r WHERE book_id = %s AND taken_at >= %s AND taken_at < %s AND NOT EXISTS "
                "(SELECT 1 FROM readings_reading s WHERE s.supersedes_id = r.id) ORDER BY taken_at",
                [book.pk, start, end],
            )
            return cursor.fetchall()

    return run


def report(book: Book, years: int, rows: int) -> dict[str, float]:
    """Prints and returns the ratios of one size of history."""
    first, last = clock.month_days(END.year, END.month)
    calendar = clock.Calendar(clock.ZoneInfo("Europe/Berlin"), dt.time(7))
    start, end = calendar.span(first, last)
    floor = timed(bare(book, start, end))
    dosing.comparison(book, first, last)
    kept = timed(lambda: dosing.comparison(book, first, last))

    def anew() -> None:
        states.DayState.objects.filter(book=book, day__gte=first - dt.timedelta(days=2), subject="doses").delete()
        dosing.comparison(book, first, last)

    reckoned = timed(anew)
    stock = timed(lambda: dosing.stock(book, end))
    print(f"{years} year(s), {rows} rows: bare SQL for the month {floor * 1000:.0f} ms")
    ratios = {"kept": kept / floor, "reckoned": reckoned / floor, "stock": stock / floor}
    for name, words in (
        ("kept", "comparison, days kept"),
        ("reckoned", "comparison, reckoned anew"),
        ("stock", "stock at month's end"),
    ):
        took = {"kept": kept, "reckoned": reckoned, "stock": stock}[name]
        print(f"  {words:28} {took * 1000:7.0f} ms   {ratios[name]:5.1f} × bare SQL")
    for path, took in pages(book, end).items():
        print(f"  {path:28} {took * 1000:7.0f} ms   {took / floor:5.1f} × bare SQL")
    return ratios


def pages(book: Book, now: dt.datetime) -> dict[str, float]:
    """Seconds for the pages a person opens, as the test client gets them: view, template and all."""
    from django.test import Client
    from django.test.utils import override_settings

    from plant.accounts.models import Person
    from plant.supply import queries as supply

    person, _ = Person.objects.get_or_create(username="bench")
    membership = Statement(
        kind="membership", subject="bench", value={"role": "supervisor"}, effective_from=clock.BEGINNING, reason="benchmark"
    )
    ledger.append(book=book, client_id="member", kind="works", received={}, rows=[membership], by=None, now=now)
    client = Client()
    client.force_login(person, backend="django.contrib.auth.backends.ModelBackend")
    real, clock.now = clock.now, lambda: now
    out = {}
    try:
        with override_settings(ALLOWED_HOSTS=["testserver"]):
            for path in ("", "stock/", "dosing/D0/", "dosing/D11/"):
                address = f"/w/{book.code}/{path}"
                answer = client.get(address)
                if answer.status_code != 200:
                    raise SystemExit(f"{address}: {answer.status_code}")
                out[path or "board"] = timed(lambda address=address: client.get(address))
            out["stock/ after an entry"] = timed(lambda: (supply._kept.clear(), client.get(f"/w/{book.code}/stock/")))
    finally:
        clock.now = real
    return out


def main() -> None:
    sizes = [int(text) for text in sys.argv[1:]] or [1, 10]
    call_command("migrate", verbosity=0)
    found = {}
    for years in sizes:
        opened = dt.datetime(2010, 1, 1, tzinfo=dt.UTC)
        book = ledger.open_book(code=f"BENCH{years}", now=opened)
        ledger.append(book=book, client_id="works", kind="works", received={}, rows=stated(), by=None, now=opened)
        began = time.perf_counter()
        rows = fill(book, years)
        print(f"filled {years} year(s) in {time.perf_counter() - began:.0f} s", file=sys.stderr)
        found[years] = report(book, years, rows)
    if len(found) > 1:
        small, large = found[sizes[0]], found[sizes[-1]]
        for name in small:
            print(
                f"{name}: {sizes[-1]} years cost {large[name] / small[name]:.2f} × what {sizes[0]} year(s) cost, each to its own bare SQL"
            )


if __name__ == "__main__":
    main()
