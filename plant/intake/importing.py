"""What the three import commands have in common: their options, and how they tell what came of a file."""

from __future__ import annotations

import abc
import time
from pathlib import Path
from typing import Any

from django.core.management.base import CommandError, CommandParser

from plant.intake import ground, moments, numbers, records, sheets, tally
from plant.works import commands

_PROGRESS_AFTER_S = 2.0


class ImportCommand(commands.WorksCommand, abc.ABC):
    """Brings in a file. A subclass says how, in ``bring``."""

    takes_now = True
    adds_sites = False

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("file", metavar="FILE.csv", type=Path, help="UTF-8 CSV with a header")
        super().add_arguments(parser)
        parser.add_argument("--site-map", metavar="FILE.csv", type=Path, help="columns from,to: other names for sites")
        parser.add_argument("--units", metavar="FILE.csv", type=Path, help="columns from,to: other spellings of units")
        parser.add_argument("--decimal", choices=(numbers.POINT, numbers.COMMA), default=numbers.POINT)
        parser.add_argument(
            "--ambiguous",
            choices=("first", "second"),
            default=moments.REFUSE,
            help="which of two, for a local time that happened twice",
        )
        parser.add_argument("--all-or-nothing", action="store_true", help="keep nothing when any line is refused")
        if self.adds_sites:
            parser.add_argument("--add-sites", action="store_true", help="create missing sample points")
        else:
            parser.set_defaults(add_sites=False)

    def run(self, asked: commands.Asked, **options: Any) -> None:
        started, last = time.monotonic(), time.monotonic()

        def progress(text: str) -> None:
            nonlocal last
            if time.monotonic() - last > _PROGRESS_AFTER_S:
                last = time.monotonic()
                self.stderr.write(f"{options['file'].name}: {text}, {last - started:.0f} s")

        try:
            wanted = records.Wanted(
                ground.Spelling(
                    options["decimal"], options["ambiguous"], _pairs(options["site_map"]), _pairs(options["units"])
                ),
                options["add_sites"],
                options["all_or_nothing"],
            )
            counted = self.bring(asked, options["file"], wanted, progress)
        except sheets.NotASheet as problem:
            raise CommandError(str(problem)) from None
        except records.NothingKept as problem:
            self._tell_refused(problem.tally)
            raise CommandError(str(problem)) from None
        for text in counted.summary():
            self.stdout.write(text)
        if counted.findings:
            self.stdout.write(f"  {counted.findings} deviations raised")
        if not counted.judged:
            self.stderr.write(
                f"{len(counted.days)} days are not judged yet; that is noted, and the worker does it (manage.py work)"
            )
        self._tell_refused(counted)

    @abc.abstractmethod
    def bring(
        self,
        asked: commands.Asked,
        path: Path,
        wanted: records.Wanted,
        progress: records.Progress,
    ) -> tally.Tally:
        """Brings the file in and says what came of it."""

    def _tell_refused(self, counted: tally.Tally) -> None:
        for text in counted.refusal_lines():
            self.stderr.write(text)


def _pairs(path: Path | None) -> dict[str, str] | None:
    return None if path is None else sheets.pairs(path)
