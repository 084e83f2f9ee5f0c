"""Reads of the reports: what is issued, what has changed since, and whether a file is an issued one."""

from __future__ import annotations

import datetime as dt
import hashlib
import re
from collections.abc import Iterator
from dataclasses import dataclass

from plant import clock
from plant.ledger.models import Book
from plant.readings.models import Reading
from plant.reports import changes, content, facts
from plant.reports.models import Preparation, Report, ReportFile
from plant.reports.month import Month
from plant.reports.pdf.document import Document, Section

FOLLOWS_LATER = frozenset({"revision", "explanations", "deviations", "summary", "method", "use-year"})
"""Sections that go on after an issue (a deviation is closed) or repeat others, and the table of the year to date: they make no
revision by themselves."""


def latest(book: Book, month: str) -> Report | None:
    """The last issue of a month."""
    return Report.objects.filter(book=book, month=month).order_by("-revision").first()


def issues(book: Book, month: str) -> list[Report]:
    """All issues of a month, newest first; none ever disappears."""
    return list(Report.objects.filter(book=book, month=month).order_by("-revision"))


def preparation(book: Book, month: str) -> Preparation | None:
    """The last preparation that no issue has used yet."""
    found = Preparation.objects.filter(book=book, month=month).order_by("-seq").first()
    issued = latest(book, month)
    return None if found is None or (issued is not None and issued.seq > found.seq) else found


def document(report: Report) -> Document:
    """The content an issue was printed from."""
    return content.from_json(report.file.content)


def pdf(report: Report) -> bytes:
    """The bytes that were handed out."""
    return bytes(report.file.pdf)


@dataclass(frozen=True)
class Since:
    """What became known since an issue: records and settings, and the figures that would print otherwise."""

    found: tuple[changes.Change, ...]
    moved: tuple[tuple[str, str, str], ...]

    @property
    def anything(self) -> bool:
        return bool(self.found or self.moved)


def recorded_since(report: Report, start: dt.datetime, end: dt.datetime) -> list[changes.Change]:
    """Records and settings of the month itself that became known after the issue. Cheap: no figure is computed."""
    return changes.since(report.book, start, end, after=report.known_seq)


def changed_since_issue(report: Report, month: Month, sections: tuple[Section, ...] | None = None) -> Since:
    """Everything that makes a revision due. ``month`` is the month as known now, ``sections`` its sections if made already.

    Records outside the month count only where they move a figure of it: a reading just after its end stands for its last
    boundary. Figures of the year to date alone make no revision; they are printed in the report of the month corrected.
    """
    found = recorded_since(report, month.start, month.end)
    around = changes.since(report.book, month.start - changes.BOUNDARY, month.end + changes.BOUNDARY, after=report.known_seq)
    if not around:
        return Since((), ())
    before = document(report)
    after = content.whole(
        month,
        sections if sections is not None else content.sections(month),
        revision=report.revision,
        issued_at=report.issued_at,
        signed=(),
    )
    moved = facts.moved(before, after, leave_out=FOLLOWS_LATER)
    if not found and not moved:
        return Since((), ())
    return Since(tuple(found or around), tuple(moved))


@dataclass(frozen=True)
class MonthState:
    """A line of the list of months."""

    code: str
    words: str
    issued: Report | None
    prepared: Preparation | None
    changes: int
    over: bool
    due: dt.date | None


def months(book: Book, calendar: clock.Calendar, now: dt.datetime, *, due_day: int | None, most: int = 36) -> list[MonthState]:
    """Months with anything on record, newest first."""
    first = Reading.objects.filter(book=book).order_by("taken_at").values_list("taken_at", flat=True).first()
    if first is None:
        return []
    oldest, day = calendar.day_of(first), calendar.day_of(now)
    issued = {report.month: report for report in Report.objects.filter(book=book).order_by("revision")}
    out: list[MonthState] = []
    while len(out) < most and (day.year, day.month) >= (oldest.year, oldest.month):
        start_day, end_day = clock.month_days(day.year, day.month)
        start, end = calendar.span(start_day, end_day)
        code = f"{day:%Y-%m}"
        report = issued.get(code)
        due = None if due_day is None else (end_day + dt.timedelta(days=1)).replace(day=due_day)
        out.append(
            MonthState(
                code,
                f"{day:%B %Y}",
                report,
                preparation(book, code),
                len(recorded_since(report, start, end)) if report else 0,
                now >= end,
                due,
            )
        )
        day = start_day - dt.timedelta(days=1)
    return out


@dataclass(frozen=True)
class Checked:
    """What a dropped file turned out to be. ``verdict`` is issued, altered or unknown."""

    verdict: str
    sha256: str
    report: Report | None = None
    superseded: bool = False


def check_file(book: Book, data: bytes) -> Checked:
    """Whether these bytes are an issued report of the works, unaltered."""
    digest = hashlib.sha256(data).hexdigest()
    report = Report.objects.filter(book=book, pdf_hash=digest).first()
    if report is not None:
        newest = latest(book, report.month)
        return Checked("issued", digest, report, newest is not None and newest.pk != report.pk)
    named = re.search(rb"/Subject \(([^)]{1,60})\)", data)
    claimed = named.group(1).decode("latin-1").replace("\\", "") if named else ""
    report = Report.objects.filter(book=book, number=claimed).order_by("-revision").first() if claimed else None
    return Checked("altered" if report is not None else "unknown", digest, report)


def verify(book: Book) -> Iterator[str]:
    """For verify_records: every issue still has its content and its bytes, and makes the same bytes again."""
    for report in Report.objects.filter(book=book).order_by("seq"):
        name = f"{book.code} report {report.number} revision {report.revision}"
        kept = ReportFile.objects.filter(report=report).first()
        if kept is None:
            yield f"{name}: its file is missing"
            continue
        if hashlib.sha256(kept.content.encode()).hexdigest() != report.content_hash:
            yield f"{name}: the stored content is not what was issued"
        if hashlib.sha256(bytes(kept.pdf)).hexdigest() != report.pdf_hash:
            yield f"{name}: the stored PDF is not what was issued"
        elif report.renderer == content.paper.RENDERER and content.render(content.from_json(kept.content)) != bytes(kept.pdf):
            yield f"{name}: printed again from its content, the PDF comes out otherwise"
