from __future__ import annotations

from pathlib import Path

from plant.intake import importing, records, tally
from plant.works import commands


class Command(importing.ImportCommand):
    help = "Brings in a file of readings: one observed value a line."
    adds_sites = True

    def bring(
        self,
        asked: commands.Asked,
        path: Path,
        wanted: records.Wanted,
        progress: records.Progress,
    ) -> tally.Tally:
        sheet = records.open_file(path)
        return records.bring_in(book=asked.book, sheet=sheet, wanted=wanted, by=None, now=asked.now, progress=progress)
