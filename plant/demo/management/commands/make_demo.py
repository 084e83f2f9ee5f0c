"""make_demo: the demo works with fourteen months of history up to now, its people and their passwords."""

import datetime as dt
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

from django.conf import settings
from django.core.management.base import BaseCommand, CommandError, CommandParser
from django.db import transaction

from plant import clock
from plant.accounts import actions as accounts
from plant.demo import kestrel, life, make, people, simulate
from plant.demo.management.commands.write_simulation import months_before
from plant.ledger.models import Book
from plant.works import commands

MONTHS = 14


class Command(BaseCommand):
    help = "Makes the demo works (invented throughout) in an empty database, and writes its people's passwords down."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--seed", type=int, default=20)
        parser.add_argument("--months", type=int, default=MONTHS, help="whole months, beside the present one")
        commands.add_now(parser)

    def handle(self, *args: Any, **options: Any) -> None:
        plan = kestrel.KESTREL
        if Book.objects.filter(code=plan.code).exists():
            raise CommandError(f"there is a works {plan.code} in this database already: the demo wants an empty one")
        calendar = clock.Calendar(ZoneInfo(plan.timezone), plan.day_starts)
        now = commands.set_now(options["now"], calendar, None)
        last = calendar.day_of(now)
        month_is_over = (last + dt.timedelta(days=1)).day == 1
        first = months_before(last, options["months"] + (0 if month_is_over else 1))
        days = (last - first).days + 1
        history = simulate.simulate(
            plan, seed=options["seed"], first=first, last=last, incidents=kestrel.incidents(days), until=now
        )
        self._say(f"{len(history.book.rounds)} rounds of {plan.name}, {first} to {last}")
        try:
            with transaction.atomic():
                cast, passwords = people.add(now=history.grid.start - dt.timedelta(days=3))
                demo = make.Demo(history, cast)
            lived = life.Life(demo)
            make.replay(demo, progress=self._say, each_day=lived.each_day)
            lived.finish()
        except accounts.PersonRefused as problem:
            raise CommandError(f"the demo wants an empty database: {problem}") from None
        path = Path(settings.WEIRBOOK_DATA) / people.PEOPLE_FILE
        people.write_down(path, passwords)
        self.stdout.write(path.read_text(encoding="utf-8"))

    def _say(self, words: str) -> None:
        # To the error stream: what is on the other one are the people.
        self.stderr.write(f"  {words}")
