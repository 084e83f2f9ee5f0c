"""write_simulation: an invented works and its history as files, with the truth beside them."""

import datetime as dt
from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant import clock
from plant.demo import files, heath, kestrel, simulate
from plant.works import commands


class Command(BaseCommand):
    help = "Writes works.toml, records.csv, deliveries.csv, transfers.csv and the truth behind them into a folder."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--seed", type=int, required=True)
        parser.add_argument("--months", type=int, default=12)
        parser.add_argument("--plan", choices=sorted(heath.PLANS), default="KFW")
        parser.add_argument("--last", type=commands.date, help="last operating day (default: the day before yesterday)")
        parser.add_argument("--told", action="store_true", help="the demo's own incidents instead of drawn ones")
        parser.add_argument("--out", type=Path, required=True, metavar="DIR")

    def handle(self, *args: Any, **options: Any) -> None:
        if not 1 <= options["months"] <= 120:
            raise CommandError("--months: expected 1 to 120")
        plan = heath.PLANS[options["plan"]]
        last = options["last"] or clock.now().date() - dt.timedelta(days=2)
        first = months_before(last, options["months"])
        days = (last - first).days + 1
        chosen = kestrel.incidents(days) if options["told"] else heath.drawn_incidents(plan, seed=options["seed"], days=days)
        history = simulate.simulate(plan, seed=options["seed"], first=first, last=last, incidents=chosen)
        try:
            counts = files.write(history, options["out"])
        except OSError as problem:
            raise CommandError(f"{options['out']}: {problem.strerror}") from None
        for name, count in counts.items():
            self.stdout.write(f"{options['out'] / name}: {count} rows")


def months_before(last: dt.date, months: int) -> dt.date:
    """The first of the month that makes so many months, the last one counted from its first day."""
    index = last.year * 12 + last.month - months
    return dt.date(index // 12, index % 12 + 1, 1)
