"""What the nightly review of many works costs, each works by itself and all together, and whether history makes it slower.

One small works of three chemicals (17 lines a round, two rounds a day) is simulated for a year and brought in through its
files; the others are copies of its rows under their own books, since only reading and judging are measured. Each works is
reviewed for one night to fill what is kept of its days, as the night before would have, and then timed on the next. Then a
works with three years of history is timed beside one with a year.

    python tests/benchmarks/nightly.py [works] [timed]      (default: 200 works, all of them timed)
"""

from __future__ import annotations

import datetime as dt
import os
import statistics
import sys
import tempfile
import time
from dataclasses import replace
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
FOLDER = Path(tempfile.mkdtemp(prefix="weirbook-benchmark-"))
os.environ["WEIRBOOK_DATA"] = str(FOLDER)
os.environ["WEIRBOOK_ALLOW_NOW"] = "1"
os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.development")
os.environ.pop("DATABASE_URL", None)

import django  # noqa: E402

django.setup()

from django.core.management import call_command  # noqa: E402
from django.db import connection  # noqa: E402

from plant.demo import heath, simulate  # noqa: E402
from plant.deviations import tasks  # noqa: E402
from plant.ledger import queries as books  # noqa: E402
from plant.ledger.models import Book  # noqa: E402
from tests.deviations import trial  # noqa: E402

LAST = dt.date(2025, 12, 30)
NIGHT = dt.datetime(2025, 12, 31, 9, 30, tzinfo=dt.UTC)
OWN = ("id", "entry_id", "supersedes_id", "reading_id", "deviation_id", "delivery_id")
TABLES = ("ledger_entry", "works_statement", "readings_reading", "stock_delivery")


def bring(code: str, years: int) -> Book:
    """A works with so many years of history."""
    plan = replace(heath.HEATH, code=code)
    first = LAST.replace(year=LAST.year - years) + dt.timedelta(days=1)
    drawn = heath.drawn_incidents(plan, seed=1, days=(LAST - first).days)
    trial.told(simulate.simulate(plan, seed=1, first=first, last=LAST, incidents=drawn), FOLDER / code)
    return books.book(code)


def copy(book: Book, number: int) -> Book:
    """The rows of a works once more, under a book of its own."""
    other = Book.objects.get(pk=book.pk)
    other.pk, other.code = None, f"{book.code}{number}"
    other.save(force_insert=True)
    away = number * 10**7
    with connection.cursor() as cursor:
        for table in TABLES:
            names = [column.name for column in connection.introspection.get_table_description(cursor, table)]
            values = ["book_id" if name == "book_id" else f"{name} + {away}" if name in OWN else name for name in names]
            values = [str(other.pk) if value == "book_id" else value for value in values]
            columns = ", ".join(f'"{name}"' for name in names)
            # Names of columns come from the database itself, numbers from here.
            cursor.execute(f"INSERT INTO {table} ({columns}) SELECT {', '.join(values)} FROM {table} WHERE book_id = {book.pk}")
    return other


def night(book: Book) -> float:
    """Seconds that the review of the last night takes, the night before having been reviewed."""
    tasks.by_night(now=NIGHT - dt.timedelta(days=1), book=book.code, day=(LAST - dt.timedelta(days=1)).isoformat())
    began = time.perf_counter()
    tasks.by_night(now=NIGHT, book=book.code, day=LAST.isoformat())
    return time.perf_counter() - began


def main() -> None:
    wanted = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    measured = int(sys.argv[2]) if len(sys.argv) > 2 else wanted
    call_command("migrate", verbosity=0)
    alone = bring("YEAR", 1)
    few = statistics.median(night(bring(f"ONE{n}", 1)) for n in range(3))
    many_years = statistics.median(night(bring(f"LONG{n}", 3)) for n in range(3))
    began = time.perf_counter()
    every = [alone, *(copy(alone, number) for number in range(1, wanted))]
    built = time.perf_counter() - began
    took = sorted(night(book) for book in every[:: max(wanted // measured, 1)])
    print(f"{wanted} works of a year each ({wanted - 1} of them copies, {built:.0f} s to copy), {len(took)} timed")
    print(f"a works: median {1000 * statistics.median(took):.0f} ms, slowest {1000 * took[-1]:.0f} ms")
    print(f"all of them: {statistics.fmean(took) * wanted:.0f} s, one after the other")
    print(
        f"alone in the database: 1 year {1000 * few:.0f} ms, 3 years {1000 * many_years:.0f} ms, {many_years / few:.2f} times"
    )


if __name__ == "__main__":
    main()
