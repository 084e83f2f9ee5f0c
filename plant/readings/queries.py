"""Reads of the readings. Everything that reckons asks ``series``; nobody looks at the table itself."""

from __future__ import annotations

import datetime as dt
import re
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

from plant.ledger.models import Book, InForceQuerySet
from plant.readings import models

LATE = dt.timedelta(hours=24)
"""Recorded longer than this after it was taken, a reading is called late on board and paper. Common practice, no source."""

_REF = re.compile(r"([0-9]{1,15})\.([0-9]{1,8})")


@dataclass(frozen=True)
class Point:
    """A reading as it is known at the seq asked for."""

    ref: str
    site: str
    parameter: str
    at: dt.datetime
    value: float | None
    text: str
    unit: str
    qualifier: str
    state: str
    typed: str
    typed_unit: str
    statistic: str
    sample: str
    note: str
    marks: tuple[str, ...]
    settled: str
    corrected: bool
    date_only: bool
    pk: int

    @property
    def decimal(self) -> Decimal | None:
        """The exact value in its canonical unit, for limits."""
        return Decimal(self.text) if self.text else None

    @property
    def doubtful(self) -> bool:
        """Marked, and nobody has settled it yet."""
        return bool(self.marks) and not self.settled

    @property
    def usable(self) -> bool:
        """May enter operating figures: a number that is neither doubtful nor set aside."""
        return self.value is not None and not self.doubtful and self.settled != "set_aside"


COLUMNS = (
    "seq",
    "line",
    "site",
    "parameter",
    "taken_at",
    "value",
    "value_text",
    "unit",
    "qualifier",
    "state",
    "typed",
    "typed_unit",
    "statistic",
    "sample",
    "note",
    "marks",
    "supersedes_id",
    "date_only",
    "pk",
)


def points(
    book: Book,
    *,
    start: dt.datetime,
    end: dt.datetime,
    sites: Iterable[str] | None = None,
    parameters: Iterable[str] | None = None,
    known: int | None = None,
) -> list[Point]:
    """Readings with start <= taken_at < end, by time, as known at a seq (None: now)."""
    rows = models.Reading.objects.filter(book=book, taken_at__gte=start, taken_at__lt=end)
    if sites is not None:
        rows = rows.filter(site__in=list(sites))
    if parameters is not None:
        rows = rows.filter(parameter__in=list(parameters))
    return _built(book, rows, known)


def _built(book: Book, rows: InForceQuerySet, known: int | None) -> list[Point]:
    found = list(rows.as_known(known).order_by("taken_at", "seq", "line").values_list(*COLUMNS))
    marked = [row[-1] for row in found if row[15]]
    settled = _settlements(marked, known) if marked else {}
    return [
        Point(
            ref=f"{row[0]}.{row[1]}",
            site=row[2],
            parameter=row[3],
            at=row[4],
            value=row[5],
            text=row[6],
            unit=row[7],
            qualifier=row[8],
            state=row[9],
            typed=row[10],
            typed_unit=row[11],
            statistic=row[12],
            sample=row[13],
            note=row[14],
            marks=tuple(row[15]),
            settled=settled.get(row[18], ""),
            corrected=row[16] is not None,
            date_only=row[17],
            pk=row[18],
        )
        for row in found
    ]


def _settlements(readings: list[int], known: int | None) -> dict[int, str]:
    out: dict[int, str] = {}
    for first in range(0, len(readings), 500):
        rows = models.Settlement.objects.filter(reading__in=readings[first : first + 500]).as_known(known)
        out.update(rows.order_by("seq", "line").values_list("reading_id", "decision"))
    return out


def by_series(found: Iterable[Point]) -> dict[tuple[str, str], list[Point]]:
    """Points grouped by (site, parameter), each group by time."""
    out: dict[tuple[str, str], list[Point]] = defaultdict(list)
    for point in found:
        out[point.site, point.parameter].append(point)
    return dict(out)


def series(
    book: Book,
    site: str,
    parameter: str,
    *,
    start: dt.datetime,
    end: dt.datetime,
    known: int | None = None,
) -> list[Point]:
    """One parameter at one site, start <= taken_at < end, by time."""
    return points(book, start=start, end=end, sites=[site], parameters=[parameter], known=known)


def latest(book: Book, site: str, parameter: str, *, before: dt.datetime, known: int | None = None) -> Point | None:
    """The last reading taken before a moment, with a number, usable."""
    rows = models.Reading.objects.filter(book=book, site=site, parameter=parameter, taken_at__lt=before, value__isnull=False)
    newest = rows.as_known(known).order_by("-taken_at", "-seq", "-line").values_list("pk", flat=True)
    first, size = 0, 8
    # Doubtful and set-aside values may stand in front of it; there are seldom many.
    while batch := list(newest[first : first + size]):
        found = _built(book, models.Reading.objects.filter(pk__in=batch), known)
        usable = [point for point in found if point.usable]
        if usable:
            return usable[-1]
        first, size = first + size, 200
    return None


def first_taken_at(book: Book, *, known: int | None = None) -> dt.datetime | None:
    """When the earliest reading on record was taken; None while there is none."""
    rows = models.Reading.objects.filter(book=book)
    if known is not None:
        rows = rows.filter(seq__lte=known)
    return rows.order_by("taken_at").values_list("taken_at", flat=True).first()


def one(book: Book, ref: str) -> models.Reading | None:
    """The reading called ``seq.line``."""
    named = _REF.fullmatch(ref)
    if named is None:
        return None
    rows = models.Reading.objects.filter(book=book, seq=int(named[1]), line=int(named[2]))
    return rows.select_related("entry__recorded_by").first()


def history(reading: models.Reading) -> list[models.Reading]:
    """What a reading replaced, oldest first, itself, and what replaced it."""
    chain = [reading]
    while chain[0].supersedes_id:
        chain.insert(0, models.Reading.objects.select_related("entry__recorded_by").get(pk=chain[0].supersedes_id))
    while later := models.Reading.objects.filter(supersedes=chain[-1].pk).select_related("entry__recorded_by").first():
        chain.append(later)
    return chain


def replaced_by(reading: models.Reading) -> models.Reading | None:
    """The row that holds now in place of this one (a void too), or None while this one holds."""
    newest = None
    at = reading.pk
    rows = models.Reading.objects.select_related("entry__recorded_by")
    while (later := rows.filter(supersedes=at).first()) is not None:
        newest, at = later, later.pk
    return newest


def rivals(book: Book, reading: models.Reading) -> list[models.Reading]:
    """Other readings in force of the same site, parameter, time, sample and statistic."""
    same = models.Reading.objects.filter(
        book=book,
        site=reading.site,
        parameter=reading.parameter,
        taken_at=reading.taken_at,
        date_only=reading.date_only,
        sample=reading.sample,
        statistic=reading.statistic,
    )
    return list(same.as_known().exclude(pk=reading.pk).order_by("seq", "line"))
