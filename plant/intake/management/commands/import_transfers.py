from __future__ import annotations

from pathlib import Path

from plant.intake import importing, movements, records, tally
from plant.works import commands


class Command(importing.ImportCommand):
    help = "Brings in a file of transfers."

    def bring(
        self,
        asked: commands.Asked,
        path: Path,
        wanted: records.Wanted,
        progress: records.Progress,
    ) -> tally.Tally:
        kind = movements.TRANSFERS
        sheet = movements.open_file(kind, path)
        return movements.bring_in(
            kind=kind, book=asked.book, sheet=sheet, wanted=wanted, by=None, now=asked.now, progress=progress
        )
