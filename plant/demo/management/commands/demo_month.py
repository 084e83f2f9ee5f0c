"""demo_month: prints the demo's code and its last full month, e.g. KFW 2026-10."""

import datetime as dt
from typing import Any

from django.core.management.base import BaseCommand

from plant import clock
from plant.demo import kestrel
from plant.readings import queries as readings
from plant.works import commands, queries


class Command(BaseCommand):
    help = "Prints the demo works' code and its last full month: the last one whose closing round is in the book."

    def handle(self, *args: Any, **options: Any) -> None:
        book = commands.find_book(kestrel.KESTREL.code)
        now = clock.now()
        calendar = queries.stated(book).calendar(now)
        meter = kestrel.KESTREL.treated_meter
        last = readings.latest(book, meter, "totaliser", before=now + dt.timedelta(seconds=1))
        at = last.at if last is not None else now
        day = calendar.day_of(at).replace(day=1)
        full = day - dt.timedelta(days=1)
        self.stdout.write(f"{book.code} {full:%Y-%m}")
