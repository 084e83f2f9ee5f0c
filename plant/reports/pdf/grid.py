"""Tables: measured, set in parts when too wide, carried over pages with their heads, and tagged cell by cell.

A painter of its own rather than reportlab's Table: every cell is either a number on one line or words that wrap, and
that little is quicker to measure, easier to tag, and can be set in parts.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from reportlab.lib.utils import simpleSplit
from reportlab.platypus import Flowable

from plant.reports.pdf import faces, ink
from plant.reports.pdf.document import Cell, Column, Table
from plant.reports.pdf.tagged import Element

PAD_X = 2.7
PAD_Y = 2.1
MARK_WIDTH = 5.0
MARK_SIZE = 5.4
LINE_CELL = 9.4
LINE_HEAD = 8.8
WIDEST_LABEL = 0.30  # of the page, before a label wraps
NARROWEST_WORDS = 56.0
WIDEST_WORD = 110.0  # before a word is broken
LITTLE_ROOM = 300.0  # below it a table rather begins on the next page than with one or two rows
MOST_LINES = 50  # of one row, before it is parted


@dataclass(frozen=True)
class Row:
    """A row ready to be painted: the lines of each cell, its height, whether it is set bold, and which row of the table it is.

    A row taller than a page may bear comes as several of one ``position``.
    """

    cells: tuple[Cell, ...]
    lines: tuple[tuple[str, ...], ...]
    height: float
    bold: bool
    position: int


@dataclass(frozen=True)
class Width:
    """How wide a column would like to be, and the least it can bear: a number never breaks, words do."""

    natural: float
    least: float


def grids(parent: Element, table: Table, page_width: float) -> list[Grid]:
    """The table as one flowable, or in several parts one below the other, each with the label columns."""
    widths = [_width(table, index, page_width) for index in range(len(table.columns))]
    parts = _parts(table, widths, page_width)
    return [
        Grid(Element("Table", parent), table, part, widths, page_width, number, len(parts))
        for number, part in enumerate(parts, start=1)
    ]


def _width(table: Table, index: int, page_width: float) -> Width:
    column = table.columns[index]
    body = max(
        (faces.width(row[index].text, _face(table, number), ink.CELL) for number, row in enumerate(table.rows)), default=0.0
    )
    words = (column.head + " " + column.unit).split()
    head = max((faces.width(word, faces.SEMIBOLD, ink.HEAD) for word in words), default=0.0)
    if column.wraps:
        body = min(body, page_width * 0.8)
        longest = max((_longest_word(row[index].text) for row in table.rows), default=0.0)
        least = max(min(body, NARROWEST_WORDS), min(longest, WIDEST_WORD), head)
        return Width(max(body, least) + 2 * PAD_X, least + 2 * PAD_X)
    if index < table.labels:
        body = min(body, page_width * WIDEST_LABEL)
    marks = MARK_WIDTH if any(row[index].mark for row in table.rows) else 0.0
    natural = max(body + marks, head) + 2 * PAD_X
    return Width(natural, natural)


def _longest_word(text: str) -> float:
    return max((faces.width(word, faces.REGULAR, ink.CELL) for word in text.split()), default=0.0)


def _face(table: Table, row: int) -> str:
    return faces.SEMIBOLD if row >= len(table.rows) - table.totals else faces.REGULAR


def _parts(table: Table, widths: list[Width], page_width: float) -> list[list[int]]:
    """Column numbers of each part. Neighbours of one group stay together unless the group alone is too wide."""
    labels = list(range(table.labels))
    least = [width.least for width in widths]
    room = page_width - sum(least[index] for index in labels)
    blocks: list[list[int]] = []
    for index in range(table.labels, len(table.columns)):
        group = table.columns[index].group
        if (
            blocks
            and group
            and table.columns[blocks[-1][-1]].group == group
            and sum(least[i] for i in blocks[-1]) + least[index] <= room
        ):
            blocks[-1].append(index)
        else:
            blocks.append([index])
    parts: list[list[int]] = []
    used = 0.0
    for block in blocks:
        need = sum(least[index] for index in block)
        if parts and used + need <= room:
            parts[-1].extend(block)
            used += need
        else:
            parts.append(list(block))
            used = need
    return [labels + part for part in parts] or [labels]


class Grid(Flowable):
    """One part of a table, or what is left of it after a page break."""

    def __init__(
        self,
        element: Element,
        table: Table,
        indexes: list[int],
        widths: list[Width],
        page_width: float,
        number: int,
        of: int,
    ) -> None:
        super().__init__()
        self.element, self.table, self.indexes, self.number, self.of = element, table, indexes, number, of
        self.columns = [table.columns[index] for index in indexes]
        self.widths = _spread(self.columns, [widths[index] for index in indexes], page_width)
        self.heads = [self._head_lines(column, width) for column, width in zip(self.columns, self.widths, strict=True)]
        self.head_height = max(len(lines) for lines in self.heads) * LINE_HEAD + 2 * PAD_Y
        self.grouped = any(column.group for column in self.columns)
        self.group_height = LINE_HEAD + PAD_Y if self.grouped else 0.0
        self.rows = [part for position, row in enumerate(table.rows) for part in self._rows(row, position)]
        self.marked = [
            column.number and any(row.cells[index].mark for row in self.rows) for index, column in enumerate(self.columns)
        ]
        self.lefts = [sum(self.widths[:index]) for index in range(len(self.widths))]
        self.first = 0
        self.hAlign = "LEFT"
        self.spaceAfter = 7

    @property
    def caption(self) -> str:
        """The caption, with the part where there are several."""
        return self.table.caption + (f" ({self.number} of {self.of})" if self.of > 1 else "")

    def _head_lines(self, column: Column, width: float) -> list[tuple[str, str]]:
        room = width - 2 * PAD_X + 0.01
        lines = [(line, faces.SEMIBOLD) for line in simpleSplit(column.head, faces.SEMIBOLD, ink.HEAD, room)]
        return lines + [(line, faces.REGULAR) for line in simpleSplit(column.unit, faces.REGULAR, ink.HEAD, room)]

    def _rows(self, row: tuple[Cell, ...], position: int) -> list[Row]:
        cells = tuple(row[index] for index in self.indexes)
        bold = position >= len(self.table.rows) - self.table.totals
        face = faces.SEMIBOLD if bold else faces.REGULAR
        lines = []
        for cell, column, width in zip(cells, self.columns, self.widths, strict=True):
            room = width - 2 * PAD_X - (MARK_WIDTH if cell.mark and not column.wraps else 0) + 0.01
            whole = "\n" not in cell.text and faces.width(cell.text, face, ink.CELL) <= room
            lines.append((cell.text,) if whole else tuple(_broken(cell.text, face, room)))
        most = max(len(part) for part in lines)
        pieces = []
        for start in range(0, most, MOST_LINES):
            piece = tuple(part[start : start + MOST_LINES] for part in lines)
            height = max(len(part) for part in piece) * LINE_CELL + 2 * PAD_Y
            marked = cells if start == 0 else tuple(Cell() for _ in cells)
            pieces.append(Row(marked, piece, height, bold, position))
        return pieces

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        self.width = sum(self.widths)
        self.height = self.group_height + self.head_height + sum(row.height for row in self.rows[self.first :])
        return self.width, self.height

    def split(self, available_width: float, available_height: float) -> list[Any]:
        room = available_height - self.group_height - self.head_height
        count = 0
        for row in self.rows[self.first :]:
            if row.height > room:
                break
            room -= row.height
            count += 1
        left = len(self.rows) - self.first - count
        if left and left < 2 and count > 3:
            count -= 1  # never one lonely row on the next page
        if count == 0 or (count < min(3, len(self.rows) - self.first) and available_height < LITTLE_ROOM):
            return []
        upper, lower = self._piece(self.first, self.first + count), self._piece(self.first + count, len(self.rows))
        return [upper, lower]

    def _piece(self, first: int, last: int) -> Grid:
        piece: Grid = object.__new__(Grid)
        # Names with an underscore are the layout's own notes about the whole.
        piece.__dict__.update({name: value for name, value in self.__dict__.items() if not name.startswith("_")})
        piece.rows, piece.first = self.rows[:last], first
        return piece

    def draw(self) -> None:
        canvas = self.canv
        continued = self.first > 0
        top = self.height
        self._grounds(top)
        top = self._head(top, continued)
        canvas.setFillColor(ink.INK)
        for row in self.rows[self.first :]:
            line = Element("TR", self.element)
            face = faces.SEMIBOLD if row.bold else faces.REGULAR
            for number, (cell, lines) in enumerate(zip(row.cells, row.lines, strict=True)):
                label = number < self.table.labels
                kind = Element("TH" if label else "TD", line, "row" if label else "")
                canvas.begin(kind)
                self._cell(number, cell, lines, top, face)
                canvas.end()
            top -= row.height

    def _grounds(self, top: float) -> None:
        canvas = self.canv
        canvas.begin_artifact()
        y = top - self.group_height - self.head_height
        canvas.setFillColor(ink.STRIPE)
        last = len(self.table.rows) - self.table.totals
        for row in self.rows[self.first :]:
            if row.position % 2 and row.position < last:
                canvas.rect(0, y - row.height, self.width, row.height, stroke=0, fill=1)
            if row.position == last and row is not self.rows[self.first]:
                canvas.setStrokeColor(ink.INK)
                canvas.setLineWidth(0.5)
                canvas.line(0, y, self.width, y)
            y -= row.height
        canvas.setStrokeColor(ink.INK)
        canvas.setLineWidth(0.7)
        canvas.line(0, top - self.group_height - self.head_height, self.width, top - self.group_height - self.head_height)
        canvas.setLineWidth(0.4)
        canvas.setStrokeColor(ink.LINE)
        canvas.line(0, y, self.width, y)
        canvas.end()

    def _head(self, top: float, continued: bool) -> float:
        """Paints the heads; on a continuation they are repeated for the eye only."""
        canvas = self.canv
        if self.grouped:
            self._group_heads(top)
            top -= self.group_height
        line = None if continued else Element("TR", self.element)
        canvas.setFillColor(ink.INK)
        left = 0.0
        for number, (column, width, lines) in enumerate(zip(self.columns, self.widths, self.heads, strict=True)):
            if line is None:
                canvas.begin_artifact()
            else:
                canvas.begin(Element("TH", line, "column"))
            y = top - self.head_height + PAD_Y + 2 + (len(lines) - 1) * LINE_HEAD
            gutter = MARK_WIDTH if self.marked[number] else 0
            for text, face in lines:
                canvas.setFont(face, ink.HEAD)
                if column.number:
                    canvas.drawRightString(left + width - PAD_X - gutter, y, text)
                else:
                    canvas.drawString(left + PAD_X, y, text)
                y -= LINE_HEAD
            canvas.end()
            left += width
        return top - self.head_height

    def _group_heads(self, top: float) -> None:
        canvas = self.canv
        canvas.begin_artifact()
        canvas.setFont(faces.SEMIBOLD, ink.HEAD)
        canvas.setStrokeColor(ink.LINE)
        canvas.setLineWidth(0.5)
        left = 0.0
        start, group = 0.0, ""
        for column, width in [*zip(self.columns, self.widths, strict=True), (Column(""), 0.0)]:
            if column.group != group:
                if group:
                    canvas.setFillColor(ink.WATER)
                    room = left - start - 2 * PAD_X
                    canvas.drawString(start + PAD_X, top - LINE_HEAD + 1.5, _clipped(group, room))
                    canvas.line(start + PAD_X, top - LINE_HEAD - 1, left - PAD_X, top - LINE_HEAD - 1)
                start, group = left, column.group
            left += width
        canvas.end()

    def _cell(self, number: int, cell: Cell, lines: tuple[str, ...], top: float, face: str) -> None:
        canvas = self.canv
        left, width = self.lefts[number], self.widths[number]
        y = top - PAD_Y - ink.CELL + 0.6
        right = left + width - PAD_X - (MARK_WIDTH if self.marked[number] else 0)
        for text in lines:
            x = right - faces.width(text, face, ink.CELL) if self.columns[number].number else left + PAD_X
            canvas.put(x, y, text, face, ink.CELL)
            y -= LINE_CELL
        if cell.mark:
            canvas.setFillColor(ink.QUIET)
            canvas.put(left + width - PAD_X - MARK_WIDTH + 1, top - PAD_Y - ink.CELL + 2.8, cell.mark, faces.REGULAR, MARK_SIZE)
            canvas.setFillColor(ink.INK)


def _spread(columns: list[Column], widths: list[Width], page_width: float) -> list[float]:
    """Widths of a part: words share the room that is left; without words a narrow table is loosened a little."""
    wanted = sum(width.natural for width in widths)
    wrapping = [index for index, column in enumerate(columns) if column.wraps]
    if not wrapping or wanted <= page_width:
        loose = max(min((page_width - wanted) / len(columns), 14.0), 0.0)
        return [width.natural + loose for width in widths]
    room = page_width - sum(width.least for width in widths)
    if room <= 0:
        # Words alone give way where even the least of all columns is too much.
        short = room / len(wrapping)
        return [width.least + (short if index in wrapping else 0.0) for index, width in enumerate(widths)]
    surplus = sum(width.natural - width.least for width in widths)
    return [width.least + room * (width.natural - width.least) / surplus for width in widths]


def _broken(text: str, face: str, room: float) -> list[str]:
    """Lines that fit; a word too long for the column is broken."""
    out: list[str] = []
    for line in simpleSplit(text, face, ink.CELL, room):
        while faces.width(line, face, ink.CELL) > room and len(line) > 1:
            keep = len(line) - 1
            while keep > 1 and faces.width(line[:keep], face, ink.CELL) > room:
                keep -= 1
            out.append(line[:keep])
            line = line[keep:]
        out.append(line)
    return out or [""]


def _clipped(text: str, room: float) -> str:
    if faces.width(text, faces.SEMIBOLD, ink.HEAD) <= room:
        return text
    while text and faces.width(text + "…", faces.SEMIBOLD, ink.HEAD) > room:
        text = text[:-1]
    return text + "…"
