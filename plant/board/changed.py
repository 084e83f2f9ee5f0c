"""What came late or was corrected in the last day: on the board, so that nobody is surprised by a figure that moved."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from plant import clock
from plant.board import shown
from plant.ledger.models import Book
from plant.readings import queries
from plant.readings.models import Reading

LOOK_BACK = dt.timedelta(hours=24)
MOST = 200
"""More than these is a file or a history brought in, which the board only counts."""


@dataclass(frozen=True)
class Change:
    """One reading that came late, or took the place of another."""

    kind: str
    words: str
    path: str


def changed(
    book: Book, *, now: dt.datetime, calendar: clock.Calendar, names: Mapping[str, str], labels: Mapping[str, str]
) -> list[Change]:
    """Late, corrected and voided readings of the last 24 hours, newest first, at most 200; what a file brings is not late."""
    rows = (
        Reading.objects.filter(book=book, entry__recorded_at__gt=now - LOOK_BACK, entry__recorded_at__lte=now)
        .exclude(entry__kind="file", supersedes=None)
        .select_related("entry__recorded_by", "supersedes")
        .order_by("-seq", "-line")
    )
    out = []
    for row in rows.iterator(chunk_size=500):
        late = row.entry.recorded_at - row.taken_at > queries.LATE or row.note.startswith("late: ")
        if row.supersedes is None and not late:
            continue
        kind = "voided" if row.voided else "corrected" if row.supersedes is not None else "late"
        out.append(Change(kind, _words(row, kind, now, calendar, names, labels), f"/w/{book.code}/reading/{row.ref}/"))
        if len(out) == MOST:
            break
    return out


def _words(
    row: Reading, kind: str, now: dt.datetime, calendar: clock.Calendar, names: Mapping[str, str], labels: Mapping[str, str]
) -> str:
    label = labels.get(row.parameter, row.parameter.replace("_", " "))
    value = row.typed + (f" {row.typed_unit}" if row.typed_unit else "") if row.typed else "not taken"
    old: Any = row.supersedes
    before = (old.typed or "not taken") if old is not None else ""
    what = {"late": f"{value}, entered late", "corrected": f"{before} → {value}", "voided": f"{before} voided"}[kind]
    who = str(row.entry.recorded_by or "a file at the shell")
    why = f": {row.reason}" if row.reason else f": {row.note.removeprefix('late: ')}" if row.note else ""
    taken = shown.moment(row.taken_at, now, calendar)
    return f"{label}, {names.get(row.site, row.site)}, of {taken}: {what} by {who}{why}"
