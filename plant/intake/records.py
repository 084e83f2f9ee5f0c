"""A record file: one observed value a line, brought in as entries of up to ten thousand lines.

Each entry is written whole or not at all, and a line that is in the book already adds nothing; so a file that was cut
off in the middle is simply brought in again.
"""

from __future__ import annotations

import datetime as dt
import itertools
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from django.db import transaction

from plant import clock
from plant.intake import actions, ground, judging, lines, matching, sheets, tally
from plant.ledger import canonical
from plant.ledger.models import Book
from plant.readings import models
from plant.works import actions as works_actions
from plant.works import parameters
from plant.works import queries as works

REQUIRED = ("site", "timestamp", "parameter", "value", "unit")
OPTIONAL = ("qualifier", "method", "by", "note", "sample", "statistic", "replaces")
ENTRY_LINES = 10_000
MOST_DAYS_JUDGED = 45
"""A file that touches more days than this is a history, often one of several files that only make sense together: its days
are left to the worker, or to ``review``."""

Progress = Callable[[str], None]


class NothingKept(ValueError):
    """Lines were refused and the file was to be taken whole or not at all; ``tally`` says which."""

    def __init__(self, counted: tally.Tally) -> None:
        super().__init__(f"{counted.refused} lines of {counted.file} are refused; nothing was kept")
        self.tally = counted


@dataclass(frozen=True)
class Wanted:
    """How a file is to be taken."""

    spelling: ground.Spelling = field(default_factory=ground.Spelling)
    add_sites: bool = False
    all_or_nothing: bool = False


def open_file(path: Path) -> sheets.Sheet:
    """The record file. Raises sheets.NotASheet."""
    return sheets.Sheet(path, required=REQUIRED, optional=OPTIONAL)


def look(*, book: Book, sheet: sheets.Sheet, wanted: Wanted, now: dt.datetime) -> tally.Tally:
    """What would come of the file; writes nothing."""
    new_sites = _new_sites(book, sheet, wanted, now) if wanted.add_sites else []
    reader = _Reader(book, sheet, wanted, now, extra_sites=new_sites)
    reader.tally.sites_added = new_sites
    for chunk in reader.chunks():
        recall = matching.Recall(book, [taken.reading for taken in chunk], looking=True)
        for taken in chunk:
            reader.tally.count(taken, recall.place(taken))
    return reader.tally


def bring_in(
    *,
    book: Book,
    sheet: sheets.Sheet,
    wanted: Wanted,
    by: Any,
    now: dt.datetime,
    progress: Progress = lambda text: None,
    judge: bool = True,
) -> tally.Tally:
    """Takes what can be understood, reports what can't, and judges the days touched.

    Raises sheets.NotASheet when the file turns out unreadable further down (what stood above is kept, unless it was to
    be all or nothing), and NothingKept.
    """
    if wanted.all_or_nothing:
        with transaction.atomic():
            counted = _write(book, sheet, wanted, by, now, progress)
            if counted.refused:
                raise NothingKept(counted)
    else:
        counted = _write(book, sheet, wanted, by, now, progress)
    if judge:
        judge_days(book=book, counted=counted, by=by, now=now, progress=progress)
    return counted


def judge_days(*, book: Book, counted: tally.Tally, by: Any, now: dt.datetime, progress: Progress) -> None:
    """Judges all days a file touched, a month at a time; what fails stays noted for the next sweep."""
    days = sorted(counted.days)
    if len(days) > MOST_DAYS_JUDGED:
        counted.judged = False
        return
    for first in range(0, len(days), judging.MOST_DAYS):
        if first:
            progress(f"judged {first} of {len(days)} days")
        some = days[first : first + judging.MOST_DAYS]
        found, judged = judging.at_once(book=book, key="", days=some, by=by, now=now)
        counted.findings += len(found)
        counted.judged = counted.judged and judged
    if counted.judged:
        for key, noted in counted.notes.items():
            judging.settle(key, noted, now=now)


def _write(
    book: Book,
    sheet: sheets.Sheet,
    wanted: Wanted,
    by: Any,
    now: dt.datetime,
    progress: Progress,
) -> tally.Tally:
    added = _add_sites(book, sheet, wanted, by, now) if wanted.add_sites else []
    reader = _Reader(book, sheet, wanted, now)
    reader.tally.sites_added = added
    for chunk in reader.chunks():
        _write_chunk(book, sheet, reader, chunk, by, now)
        progress(f"{reader.tally.lines} lines read, {reader.tally.added} added")
    return reader.tally


def _write_chunk(
    book: Book,
    sheet: sheets.Sheet,
    reader: _Reader,
    chunk: list[lines.Taken],
    by: Any,
    now: dt.datetime,
) -> None:
    with transaction.atomic():
        works_actions.hold(book)
        recall = matching.Recall(book, [taken.reading for taken in chunk])
        rows: list[lines.Taken] = []
        outcomes = []
        for taken in chunk:
            try:
                outcome = recall.place(taken)
            except matching.NotYetWritten:
                _append(book, sheet, reader, rows, by, now)
                recall.written()
                rows = []
                outcome = recall.place(taken)
            outcomes.append((taken, outcome))
            if outcome != matching.SAME:
                rows.append(taken)
        _append(book, sheet, reader, rows, by, now)
    for taken, outcome in outcomes:
        reader.tally.count(taken, outcome)


def _append(
    book: Book,
    sheet: sheets.Sheet,
    reader: _Reader,
    rows: list[lines.Taken],
    by: Any,
    now: dt.datetime,
) -> None:
    if not rows:
        return
    received = {
        "file": sheet.name,
        "sha256": sheet.sha256,
        "columns": list(sheet.header),
        "lines": [[taken.line, *reader.cells.pop(taken.line)] for taken in rows],
    }
    done = actions.take(
        book=book,
        client_id=f"file-{canonical.digest(received)[:59]}",
        kind="file",
        received=received,
        rows=[taken.reading for taken in rows],
        by=by,
        now=now,
        attested="file",
        judge=False,
    )
    reader.tally.days.update(done.days)
    reader.tally.notes[actions.note_key(done.entry)] = done.days


class _Reader:
    """Turns the sheet into understood lines, a chunk at a time; keeps the cells of a chunk for its entry's payload."""

    def __init__(
        self,
        book: Book,
        sheet: sheets.Sheet,
        wanted: Wanted,
        now: dt.datetime,
        extra_sites: list[str] | None = None,
    ) -> None:
        stated = works.stated(book)
        self._sheet = sheet
        self._ground = ground.Ground(
            stated, stated.calendar(now), spelling=wanted.spelling, history=history_of(book), extra_sites=extra_sites or ()
        )
        self.cells: dict[int, list[str]] = {}
        self.tally = tally.Tally(sheet.name, ignored_columns=sheet.ignored)

    def chunks(self) -> Iterator[list[lines.Taken]]:
        rows = iter(self._sheet)
        while batch := list(itertools.islice(rows, ENTRY_LINES)):
            self.cells = {}
            yield [taken for row in batch if (taken := self._read(row)) is not None]

    def _read(self, row: sheets.Row) -> lines.Taken | None:
        if not row.cells:
            return None
        self.tally.lines += 1
        if row.problem:
            self.tally.refuse(lines.Refusal(row.line, row.problem.split(";")[0], row.problem.split("expected ")[-1]))
            return None
        found = lines.read_line(typed_from(row.cells), self._ground, line=row.line)
        if isinstance(found, lines.Refusal):
            self.tally.refuse(found)
            return None
        self.cells[row.line] = list(row.cells.values())
        return found


def typed_from(cells: dict[str, str]) -> lines.Typed:
    """A line's cells, those of unknown columns left out."""
    return lines.Typed(**{name: cells[name] for name in REQUIRED + OPTIONAL if name in cells})


def history_of(book: Book) -> Callable[[str, str, dt.datetime], list[ground.Recent]]:
    """Asks the book what a series looked like before a moment, oldest first."""

    def recent(site: str, parameter: str, before: dt.datetime) -> list[ground.Recent]:
        rows = models.Reading.objects.filter(
            book=book, site=site, parameter=parameter, taken_at__lt=before, value__isnull=False, qualifier=""
        )
        newest = rows.as_known().order_by("-taken_at", "-seq", "-line").values_list("value", "typed", "marks")
        return [
            (value, "." in typed or "," in typed)
            for value, typed, doubts in reversed(list(newest[: ground.REMEMBERED]))
            if not doubts and value is not None
        ]

    return recent


def _new_sites(book: Book, sheet: sheets.Sheet, wanted: Wanted, now: dt.datetime) -> list[str]:
    """Codes in the file that nobody has stated, on lines whose parameter is one of the water's."""
    stated = works.stated(book)
    here = ground.Ground(stated, stated.calendar(now), spelling=wanted.spelling)
    known: dict[str, bool] = {}
    for row in sheet:
        if row.problem or not row.cells:
            continue
        parameter = here.parameter(row.cells["parameter"].strip(), now)
        if parameter is None or parameters.SAMPLE_POINT not in parameter.sites:
            continue
        code = here.site(row.cells["site"])
        if code and code not in known:
            known[code] = here.site_kind(code, now) is not None
    return [code for code, there in known.items() if not there]


def _add_sites(book: Book, sheet: sheets.Sheet, wanted: Wanted, by: Any, now: dt.datetime) -> list[str]:
    codes = _new_sites(book, sheet, wanted, now)
    if codes:
        works_actions.state_many(
            book=book,
            by=by,
            now=now,
            reason=f"found in {sheet.name}",
            changes=[
                works_actions.Change("sample_point", code, {"name": code, "stage": "network"}, clock.BEGINNING)
                for code in codes
            ],
        )
    return codes
