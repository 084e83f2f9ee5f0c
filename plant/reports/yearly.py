"""The yearly summary: twelve months as they were issued, side by side, and their sums. It signs nothing and issues nothing.

Everything is read from the stored content of the issued reports, so that it can't say otherwise than they do. A month that is
not issued stands empty and enters no sum.
"""

from __future__ import annotations

import calendar as names
import datetime as dt
from collections.abc import Iterator
from dataclasses import dataclass

from plant.ledger.models import Book
from plant.reports import measures, queries
from plant.reports.models import Report
from plant.reports.pdf import paper
from plant.reports.pdf.document import Cell, Column, Document, Section, Table, Text

KEPT = ("Treated", "product", "as dosed", "used", "design", "need")
"""Columns of a month's table of use that are carried over, by their heads (plant.reports.parts.chemicals)."""
CARRIED = ("Works", "Address", "Owner", "Regulator", "Permit number")
LEVELS = ("regulatory", "action", "alert", "target")


class NothingIssued(ValueError):
    """No month of the year has been issued."""


@dataclass(frozen=True)
class Issue:
    """One month of the year: its last issue with the content it was printed from, or None."""

    number: int
    report: Report | None
    made: Document | None

    @property
    def words(self) -> str:
        return names.month_name[self.number]


def issues(book: Book, year: int) -> list[Issue]:
    """The twelve months, each with its newest issue."""
    found = {one.month: one for one in Report.objects.filter(book=book, month__startswith=f"{year}-").order_by("revision")}
    out = []
    for number in range(1, 13):
        report = found.get(f"{year}-{number:02d}")
        out.append(Issue(number, report, queries.document(report) if report else None))
    return out


def summary(book: Book, year: int, *, now: dt.datetime) -> Document:
    """The document. Raises NothingIssued."""
    found = issues(book, year)
    made = [one.made for one in found if one.made is not None]
    if not made:
        raise NothingIssued(f"No report of {year} has been issued yet; the yearly summary is made from issued reports.")
    newest = made[-1]
    count = len(made)
    return Document(
        title="Yearly summary",
        works_name=newest.works_name,
        works_code=newest.works_code,
        month=str(year),
        month_words=str(year),
        number=f"{book.code}-{year}",
        revision=0,
        status=f"Summary of {count} issued monthly report{'s' if count != 1 else ''}" + ("" if count == 12 else " of 12"),
        draft=False,
        issued_at=now.astimezone(dt.UTC).isoformat(timespec="seconds"),
        form_note="Not the regulator's form. The monthly reports hold the signatures.",
        cover=tuple(pair for pair in newest.cover if pair[0] in CARRIED),
        signatures=(),
        sections=(_months(found), *_use(found), *_water(found), _deviations(found), _method()),
        page=newest.page,
        closing=(("Written by", paper.RENDERER),),
    )  # fmt: skip


def _months(found: list[Issue]) -> Section:
    rows = []
    for one in found:
        report = one.report
        if report is None:
            rows.append((Cell(one.words), Cell("not issued"), *(Cell(measures.UNKNOWN) for _ in range(3))))
            continue
        who = report.certified_name or "issued from the shell, not signed"
        rows.append(
            (
                Cell(one.words),
                Cell(report.number),
                Cell(str(report.revision), float(report.revision)),
                Cell(who),
                Cell(report.pdf_hash),
            )
        )
    lacking = [one.words for one in found if one.report is None]
    words = f"Not issued, and in no sum below: {', '.join(lacking)}." if lacking else "All twelve months have been issued."
    columns = (
        Column("Month", number=False), Column("Report", number=False), Column("Revision"),
        Column("Certified by", number=False, wraps=True), Column("SHA-256 of the PDF", number=False, wraps=True),
    )  # fmt: skip
    return Section("months", "The months", (Text(words, "lead"), Table("months", "", columns, tuple(rows), 1)))


def _use(found: list[Issue]) -> Iterator[Section]:
    """Per dosing point and product: the months' use, and the year's as mass over volume."""
    seen: dict[tuple[str, str], dict[int, dict[str, tuple[float | None, str]]]] = {}
    for one in found:
        for name, cells in _rows(one, "use-month"):
            seen.setdefault((name[0], name[1]), {})[one.number] = cells
    tables = tuple(_of_point(point, product, months) for (point, product), months in sorted(seen.items()))
    if tables:
        yield Section("chemicals", "Chemical use", tables)


def _of_point(point: str, product: str, months: dict[int, dict[str, tuple[float | None, str]]]) -> Table:
    units = {head: next(cells[head][1] for cells in months.values() if head in cells) for head in KEPT}
    mixed = any(cells[head][1] != units[head] for cells in months.values() for head in KEPT if head in cells)
    body = []
    for number in range(1, 13):
        cells = months.get(number, {})
        body.append(_line(names.month_name[number], [cells.get(head, (None, ""))[0] for head in KEPT]))
    total = _line("Year", [None] * len(KEPT) if mixed else _total(list(months.values())))
    notes = (
        "Year: masses and volumes added; used is mass as dosed over volume, design and need are weighted by volume. Months "
        "whose use or volume is not known are in no sum.",
        *(("The works changed its units within the year: nothing is added up.",) if mixed else ()),
    )
    columns = (Column("Month", number=False), *(Column(head, units[head]) for head in KEPT), Column("used / design", "%"))
    return Table(f"year-{point}-{product}", f"{point}, {product}", columns, (*body, total), 1, 1, notes)


def _total(months: list[dict[str, tuple[float | None, str]]]) -> list[float | None]:
    known = [one for one in months if one["used"][0] is not None and one["Treated"][0] and one["as dosed"][0] is not None]
    if not known:
        return [None] * len(KEPT)

    def added(head: str) -> float | None:
        values = [one[head][0] for one in known]
        return sum(value for value in values if value is not None) if None not in values else None

    def weighted(head: str) -> float | None:
        pairs = [(one[head][0], one["Treated"][0]) for one in known]
        both = [(value, volume) for value, volume in pairs if value is not None and volume is not None]
        weight = sum(volume for _, volume in both)
        return sum(value * volume for value, volume in both) / weight if weight else None

    volume, mass = added("Treated"), added("as dosed")
    # Each month's own mass in kilograms per megalitre is its dose, whatever units are printed; weighting keeps the unit.
    return [volume, added("product"), mass, weighted("used"), weighted("design"), weighted("need")]


def _line(name: str, values: list[float | None]) -> tuple[Cell, ...]:
    used, design = values[3], values[4]
    share = None if used is None or not design else 100 * used / design
    doses = measures.decimals(values[3:], figures=4, most=3)
    places = [*(measures.decimals([value], figures=5, most=2) for value in values[:3]), doses, doses, doses]
    cells = [measures.cell(value, place) for value, place in zip(values, places, strict=True)]
    return (Cell(name), *cells, measures.cell(share, 0))


def _water(found: list[Issue]) -> Iterator[Section]:
    """Lowest and highest of the year for what leaves the works."""
    seen: dict[tuple[str, str, str], list[tuple[Cell, Cell, float, str]]] = {}
    for one in found:
        for table in _tables(one, "summary-entry"):
            for row in table.rows:
                key = (row[0].text, row[1].text, row[5].text)
                seen.setdefault(key, []).append((row[3], row[4], row[2].value or 0.0, one.words))
    body = []
    for (site, parameter, unit), months in sorted(seen.items()):
        low = min(months, key=lambda item: _order(item[0]))
        high = max(months, key=lambda item: _order(item[1]))
        count = sum(item[2] for item in months)
        body.append(
            (
                Cell(site), Cell(parameter), Cell(f"{count:.0f}", count), Cell(low[0].text, low[0].value), Cell(low[3]),
                Cell(high[1].text, high[1].value), Cell(high[3]), Cell(unit),
            )
        )  # fmt: skip
    if body:
        columns = (
            Column("Site", number=False), Column("Parameter", number=False), Column("readings"), Column("lowest"),
            Column("in", number=False), Column("highest"), Column("in", group="", number=False), Column("Unit", number=False),
        )  # fmt: skip
        yield Section("water", "Water leaving the works", (Table("year-entry", "", columns, tuple(body), 2),))


def _order(cell: Cell) -> tuple[float, int]:
    """Below a bound stands before the bound, above it after."""
    return cell.value or 0.0, {"<": -1, ">": 1}.get(cell.text[:1], 0)


def _deviations(found: list[Issue]) -> Section:
    body = []
    for one in found:
        counts = dict.fromkeys(LEVELS, 0)
        for table in _tables(one, "deviations"):
            place = [column.head for column in table.columns].index("Level")
            for row in table.rows:
                counts[row[place].text.lower()] += 1
        cells = [Cell(str(counts[level]), float(counts[level])) if one.made else Cell(measures.UNKNOWN) for level in LEVELS]
        body.append((Cell(one.words), *cells))
    columns = (Column("Month", number=False), *(Column(level) for level in LEVELS))
    note = "As printed in each month's report; a deviation that ran over the end of a month may stand in two."
    return Section("deviations", "Deviations by month", (Table("year-deviations", "", columns, tuple(body), 1, 0, (note,)),))


def _method() -> Section:
    words = (
        "Every figure is taken from the stored content of the newest issue of its month; the reports hold what it rests on. "
        "Months issued again later change this summary when it is made anew."
    )
    return Section("method", "Method", (Text(words),))


def _tables(one: Issue, name: str) -> Iterator[Table]:
    for section in one.made.sections if one.made is not None else ():
        yield from (block for block in section.blocks if isinstance(block, Table) and block.name == name)


def _rows(one: Issue, name: str) -> Iterator[tuple[tuple[str, ...], dict[str, tuple[float | None, str]]]]:
    """Each row of a table: its labels, and by head the value with its unit."""
    for table in _tables(one, name):
        for row in table.rows:
            labels = tuple(cell.text for cell in row[: table.labels])
            pairs = zip(table.columns[table.labels :], row[table.labels :], strict=True)
            yield labels, {column.head: (cell.value, column.unit) for column, cell in pairs}
