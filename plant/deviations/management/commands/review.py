"""manage.py review: judges operating days again, as the nightly task does. Twice changes nothing."""

from __future__ import annotations

from typing import Any

from plant import clock
from plant.deviations import actions
from plant.works import commands


class Command(commands.WorksCommand):
    """Reviews the days --from to --to."""

    help = "Judge operating days against all limits and write down what is new."
    takes_now = True
    takes_days = True

    def run(self, asked: commands.Asked, **options: Any) -> None:
        days = clock.days(asked.first, asked.last)
        raised = actions.judge(book=asked.book, days=days, now=asked.now)
        self.stderr.write(f"{len(days)} days of {asked.code} reviewed, {len(raised)} deviations raised")
