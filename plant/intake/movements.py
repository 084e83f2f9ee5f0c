"""Bringing in a file of deliveries or transfers. They are few beside the readings, but follow the same manners."""

from __future__ import annotations

import datetime as dt
import itertools
from collections import defaultdict
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from django.db import transaction

from plant.intake import actions, deliveries, matching, records, sheets, tally, transfers
from plant.intake import ground as grounds
from plant.intake.cells import Unreadable
from plant.intake.lines import Refusal
from plant.ledger import canonical
from plant.ledger.models import Book
from plant.readings import marks
from plant.stock import models
from plant.works import actions as works_actions
from plant.works import queries as works

Movement = models.Delivery | models.Transfer
_DATE_ALONE = "a date alone was taken as noon"


@dataclass(frozen=True)
class Kind:
    """One kind of file: its columns, how a line is read, what makes two lines the same thing."""

    name: str
    model: type[models.Delivery] | type[models.Transfer]
    required: tuple[str, ...]
    optional: tuple[str, ...]
    read: Callable[[dict[str, str], grounds.Ground], Any]
    key_of: Callable[[Any], tuple[object, ...]]
    values: tuple[str, ...]


DELIVERIES = Kind(
    "deliveries",
    models.Delivery,
    deliveries.REQUIRED,
    deliveries.OPTIONAL,
    deliveries.read,
    deliveries.key_of,
    deliveries.VALUES,
)
TRANSFERS = Kind(
    "transfers", models.Transfer, transfers.REQUIRED, transfers.OPTIONAL, transfers.read, transfers.key_of, transfers.VALUES
)


def open_file(kind: Kind, path: Path) -> sheets.Sheet:
    """The file. Raises sheets.NotASheet."""
    # Carrier water is in the header of the agreed format, but most moves have none.
    required = tuple(name for name in kind.required if name != "carrier_water_L")
    return sheets.Sheet(path, required=required, optional=(*kind.optional, *set(kind.required) - set(required)))


def look(*, kind: Kind, book: Book, sheet: sheets.Sheet, wanted: records.Wanted, now: dt.datetime) -> tally.Tally:
    """What would come of the file; writes nothing."""
    counted, chunks = _chunks(kind, book, sheet, wanted, now)
    for chunk in chunks:
        _sort(kind, book, chunk, counted)
    return counted


def bring_in(
    *,
    kind: Kind,
    book: Book,
    sheet: sheets.Sheet,
    wanted: records.Wanted,
    by: Any,
    now: dt.datetime,
    progress: records.Progress = lambda text: None,
    judge: bool = True,
) -> tally.Tally:
    """Takes what can be understood and judges the days touched. Raises sheets.NotASheet, records.NothingKept."""
    if wanted.all_or_nothing:
        with transaction.atomic():
            counted = _write(kind, book, sheet, wanted, by, now)
            if counted.refused:
                raise records.NothingKept(counted)
    else:
        counted = _write(kind, book, sheet, wanted, by, now)
    if judge:
        records.judge_days(book=book, counted=counted, by=by, now=now, progress=progress)
    return counted


@dataclass(frozen=True)
class _Line:
    number: int
    row: Movement
    cells: list[str]


def _write(
    kind: Kind,
    book: Book,
    sheet: sheets.Sheet,
    wanted: records.Wanted,
    by: Any,
    now: dt.datetime,
) -> tally.Tally:
    counted, chunks = _chunks(kind, book, sheet, wanted, now)
    for chunk in chunks:
        with transaction.atomic():
            works_actions.hold(book)
            new = _sort(kind, book, chunk, counted)
            if not new:
                continue
            received = {
                "file": sheet.name,
                "sha256": sheet.sha256,
                "columns": list(sheet.header),
                "lines": [[line.number, *line.cells] for line in new],
            }
            done = actions.take(
                book=book,
                client_id=f"file-{canonical.digest(received)[:59]}",
                kind="file",
                received=received,
                rows=[line.row for line in new],
                by=by,
                now=now,
                attested="file",
                judge=False,
            )
            counted.days.update(done.days)
            counted.notes[actions.note_key(done.entry)] = done.days
    return counted


def _chunks(
    kind: Kind,
    book: Book,
    sheet: sheets.Sheet,
    wanted: records.Wanted,
    now: dt.datetime,
) -> tuple[tally.Tally, Iterator[list[_Line]]]:
    stated = works.stated(book)
    ground = grounds.Ground(stated, stated.calendar(now), spelling=wanted.spelling)
    counted = tally.Tally(sheet.name, ignored_columns=sheet.ignored)

    def read_all() -> Iterator[list[_Line]]:
        rows = iter(sheet)
        while batch := list(itertools.islice(rows, records.ENTRY_LINES)):
            yield [line for row in batch if (line := _read(kind, row, ground, counted)) is not None]

    return counted, read_all()


def _read(kind: Kind, row: sheets.Row, ground: grounds.Ground, counted: tally.Tally) -> _Line | None:
    if not row.cells:
        return None
    counted.lines += 1
    if row.problem:
        counted.refuse(Refusal(row.line, row.problem.split(";")[0], row.problem.split("expected ")[-1]))
        return None
    try:
        found = kind.read(row.cells, ground)
    except Unreadable as problem:
        counted.refuse(problem.refusal(row.line))
        return None
    return _Line(row.line, found, list(row.cells.values()))


def _sort(kind: Kind, book: Book, chunk: list[_Line], counted: tally.Tally) -> list[_Line]:
    """The lines that are new, counted and marked where they contradict what the book holds."""
    there: dict[tuple[object, ...], list[tuple[tuple[object, ...], bool]]] = defaultdict(list)
    times = sorted({line.row.taken_at for line in chunk})
    for first in range(0, len(times), 400):
        _recall(kind, book, times[first : first + 400], there)
    new = []
    for line in chunk:
        key, values = kind.key_of(line.row), _values(kind, line.row)
        if any(known == values for known, _ in there[key]):
            counted.outcomes[matching.SAME] += 1
            continue
        if any(holds for _, holds in there[key]):
            line.row.marks = [*line.row.marks, marks.CONFLICT]
        counted.outcomes[matching.CONFLICT if marks.CONFLICT in line.row.marks else matching.ADDED] += 1
        counted.marked.update(line.row.marks)
        if line.row.date_only:
            counted.remarks[_DATE_ALONE] += 1
        there[key].append((values, True))
        new.append(line)
    return new


def _recall(
    kind: Kind,
    book: Book,
    times: list[dt.datetime],
    there: dict[tuple[object, ...], list[tuple[tuple[object, ...], bool]]],
) -> None:
    rows: list[Any] = list(kind.model._base_manager.filter(book=book, taken_at__in=times, voided=False))
    gone = set(kind.model._base_manager.filter(supersedes__in=[row.pk for row in rows]).values_list("supersedes_id", flat=True))
    for row in rows:
        there[kind.key_of(row)].append((_values(kind, row), row.pk not in gone))


def _values(kind: Kind, row: Movement) -> tuple[object, ...]:
    return tuple(getattr(row, name) for name in kind.values)
