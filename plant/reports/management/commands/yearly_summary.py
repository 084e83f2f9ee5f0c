"""yearly_summary: the issued reports of a year side by side, with their sums, as PDF and as CSV."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from django.core.management.base import CommandError, CommandParser

from plant.reports import content, facts, yearly
from plant.reports.management import writing
from plant.works import commands


class Command(commands.WorksCommand):
    help = "Writes the yearly summary, made from the issued monthly reports of a works."
    takes_now = True

    def add_arguments(self, parser: CommandParser) -> None:
        super().add_arguments(parser)
        parser.add_argument("--year", required=True, type=int, metavar="YYYY")
        parser.add_argument("--output", required=True, type=Path, metavar="FILE.pdf", help="where the PDF is written")
        parser.add_argument("--figures", type=Path, metavar="FILE.csv", help="where the same figures are written, one a row")

    def run(self, asked: commands.Asked, **options: Any) -> None:
        try:
            made = yearly.summary(asked.book, options["year"], now=asked.now)
        except yearly.NothingIssued as problem:
            raise CommandError(str(problem)) from None
        writing.write(options["output"], content.render(made))
        if options["figures"] is not None:
            writing.write(options["figures"], facts.to_csv(made).encode())
        self.stderr.write(f"{made.number}: {made.status}")
        self.stdout.write(str(options["output"]))
