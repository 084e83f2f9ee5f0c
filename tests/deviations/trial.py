"""A simulated works brought in, reviewed and asked as from outside: through files and commands only."""

from __future__ import annotations

import csv
import datetime as dt
import io
from pathlib import Path

from django.core.management import call_command

from plant.demo import files, simulate, trials
from plant.demo.simulate import Simulated
from plant.dosing import queries as dosing
from plant.dosing.figures import DayDose
from plant.ledger import queries as books
from tests.deviations import scoring, yardsticks
from tests.deviations.scoring import Alarm, Score

FIRST = dt.date(2025, 1, 1)


def history(seed: int, days: int) -> Simulated:
    """A works, what happened there, and the truth."""
    plan = trials.works(seed)
    last = FIRST + dt.timedelta(days=days - 1)
    drawn = trials.incidents(plan, seed=seed, days=days)
    return simulate.simulate(plan, seed=seed, first=FIRST, last=last, incidents=drawn)


def told(made: Simulated, folder: Path) -> None:
    """Loads its works file and imports what was observed."""
    quiet = {"stdout": io.StringIO(), "stderr": io.StringIO()}
    files.write(made, folder)
    call_command("load_works", str(folder / "works.toml"), **quiet)
    for command, name in (("import_records", "records.csv"), ("import_deliveries", "deliveries.csv")):
        call_command(command, str(folder / name), works=made.plan.code, **quiet)


def raised(made: Simulated) -> list[Alarm]:
    """Reviews all its days and reads what `deviations` lists."""
    span = ("--works", made.plan.code, "--from", made.grid.first.isoformat(), "--to", made.grid.last.isoformat())
    call_command("review", *span, stderr=io.StringIO())
    out = io.StringIO()
    call_command("deviations", *span, stdout=out)
    return [
        Alarm(dt.date.fromisoformat(row["raised_for"]), row["kind"], row["subject"], tuple(row["likely_causes"].split(";")))
        for row in csv.DictReader(io.StringIO(out.getvalue()))
    ]


def doses(made: Simulated) -> list[DayDose]:
    return dosing.comparison(books.book(made.plan.code), made.grid.first, made.grid.last)


def scores(seed: int, days: int, folder: Path) -> dict[str, Score]:
    """The program's score beside that of the simpler rules, on one works."""
    made = history(seed, days)
    told(made, folder)
    mine, rows = raised(made), doses(made)
    return {
        "program": scoring.score(made, mine),
        "naive 20 %": scoring.score(made, yardsticks.naive(rows)),
        "CUSUM": scoring.score(made, yardsticks.cusum(rows, made.plan)),
    }
