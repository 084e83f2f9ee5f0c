"""Is this line in the book already, does it contradict what is there, or does it take its place?

Two lines speak of the same thing when site, parameter, time, sample and statistic agree. The same value again adds
nothing, even where the earlier record has been corrected since: bringing in an old file must not undo a correction.
"""

from __future__ import annotations

import datetime as dt
from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from decimal import Decimal

from plant.intake import lines
from plant.ledger.models import Book
from plant.readings import marks, models

Key = tuple[str, str, dt.datetime, bool, str, str]
ADDED, SAME, CONFLICT, CORRECTED = "added", "same again", "conflict", "corrected"
_BATCH = 400


@dataclass
class Recorded:
    """What the book, or an earlier line of the same entry, has of a key. ``pk`` is None until the entry is written."""

    pk: int | None
    parameter: str
    state: str
    text: str
    qualifier: str
    unit: str
    typed: str
    typed_unit: str
    in_force: bool


class NotYetWritten(Exception):
    """A correction of a line of the same entry: that entry has to be written first."""


class Recall:
    """What the book holds at the times of some lines, brought up to date line by line."""

    def __init__(self, book: Book, readings: Iterable[models.Reading], *, looking: bool = False) -> None:
        """``looking`` True: nothing will be written, so a line may correct an earlier one of the same file."""
        self._looking = looking
        self._pending: list[tuple[Recorded, models.Reading]] = []
        self._by: dict[Key, list[Recorded]] = defaultdict(list)
        self._samples: dict[tuple[str, dt.datetime, str], list[models.Reading | Recorded]] = defaultdict(list)
        times = sorted({reading.taken_at for reading in readings})
        for first in range(0, len(times), _BATCH):
            self._load(book, times[first : first + _BATCH])

    def place(self, taken: lines.Taken) -> str:
        """What becomes of a line; marks or links its reading accordingly. Raises NotYetWritten."""
        new = taken.reading
        there = self._by[key_of(new)]
        if any(_same(known, new) for known in there):
            return SAME
        rivals = [known for known in there if known.in_force]
        outcome = ADDED
        if taken.replaces and rivals:
            replaced = rivals.pop()
            if replaced.pk is None and not self._looking:
                raise NotYetWritten
            new.supersedes_id = replaced.pk
            new.reason = new.note
            replaced.in_force = False
            outcome = CORRECTED
        if new.value_text and any(known.text for known in rivals):
            new.marks = [*new.marks, marks.CONFLICT]
            outcome = CONFLICT if outcome == ADDED else outcome
        self._doubt_ph(new)
        recorded = _recorded(None, new)
        there.append(recorded)
        self._pending.append((recorded, new))
        return outcome

    def written(self) -> None:
        """The lines placed so far are in the book: later ones may correct them."""
        for recorded, row in self._pending:
            recorded.pk = row.pk
        self._pending = []

    def _load(self, book: Book, times: Sequence[dt.datetime]) -> None:
        rows = list(
            models.Reading.objects.filter(book=book, taken_at__in=times, voided=False)
            .order_by("seq", "line")
            .only(
                "site",
                "parameter",
                "taken_at",
                "date_only",
                "sample",
                "statistic",
                "state",
                "value_text",
                "qualifier",
                "unit",
                "typed",
                "typed_unit",
            )
        )
        gone: set[int] = set()
        for first in range(0, len(rows), _BATCH):
            ids = [row.pk for row in rows[first : first + _BATCH]]
            gone.update(models.Reading.objects.filter(supersedes__in=ids).values_list("supersedes_id", flat=True))
        for row in rows:
            recorded = _recorded(row.pk, row)
            recorded.in_force = row.pk not in gone
            self._by[key_of(row)].append(recorded)
            if recorded.in_force and row.statistic == lines.STATISTICS[0]:
                self._samples[row.site, row.taken_at, row.sample].append(recorded)

    def _doubt_ph(self, new: models.Reading) -> None:
        """Marks a pH that equals a chlorine of the same sample; a chlorine only where it can hardly be one."""
        if not new.value_text or new.qualifier or new.statistic != lines.STATISTICS[0]:
            return
        others = self._samples[new.site, new.taken_at, new.sample]
        if new.parameter == "pH" or new.parameter in lines.CHLORINES:
            for other in others:
                if {new.parameter, other.parameter} & {"pH"} and {new.parameter, other.parameter} & set(lines.CHLORINES):
                    _doubt_pair(new, other)
            others.append(new)


def key_of(reading: models.Reading) -> Key:
    """What makes two readings speak of the same thing."""
    return (reading.site, reading.parameter, reading.taken_at, reading.date_only, reading.sample, reading.statistic)


def _recorded(pk: int | None, row: models.Reading) -> Recorded:
    return Recorded(
        pk, row.parameter, row.state, row.value_text, row.qualifier, row.unit, row.typed, row.typed_unit, in_force=True
    )


def _same(known: Recorded, new: models.Reading) -> bool:
    if known.state != new.state:
        return False
    if new.value_text:
        return known.qualifier == new.qualifier and known.unit == new.unit and Decimal(known.text) == Decimal(new.value_text)
    return known.typed.casefold() == new.typed.casefold()


def _doubt_pair(new: models.Reading, other: models.Reading | Recorded) -> None:
    text = other.value_text if isinstance(other, models.Reading) else other.text
    if not text or other.qualifier or Decimal(text) != Decimal(new.value_text):
        return
    for one in (new, other):
        # A row that is in the book keeps its marks; the one that comes now carries the doubt for both.
        if isinstance(one, models.Reading) and one._state.adding and (one.parameter == "pH" or Decimal(text) > 5):
            _mark(one)
    if isinstance(other, Recorded):
        _mark(new)


def _mark(reading: models.Reading) -> None:
    if marks.PH_IS_CHLORINE not in reading.marks:
        reading.marks = [*reading.marks, marks.PH_IS_CHLORINE]
