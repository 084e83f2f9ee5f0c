"""A document made ready for a page: the same sections as on paper, every number a link to what made it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from urllib.parse import urlencode

from django.utils.safestring import SafeString, mark_safe

from plant.reports.pdf import picture
from plant.reports.pdf.document import Block, Cell, Column, Document, Pairs, Picture, Table
from plant.scene import svg


@dataclass(frozen=True)
class ShownCell:
    text: str
    href: str
    mark: str
    number: bool
    head: bool
    words: bool


@dataclass(frozen=True)
class ShownBlock:
    """One block; ``kind`` says which of the fields it uses."""

    kind: str
    text: str = ""
    manner: str = ""
    caption: str = ""
    groups: tuple[tuple[str, int], ...] = ()
    heads: tuple[Column, ...] = ()
    rows: tuple[tuple[bool, tuple[ShownCell, ...]], ...] = ()
    notes: tuple[str, ...] = ()
    pairs: tuple[tuple[str, str], ...] = ()
    pictures: tuple[tuple[str, SafeString], ...] = ()


@dataclass(frozen=True)
class ShownSection:
    key: str
    title: str
    blocks: tuple[ShownBlock, ...]


def sections(document: Document, code: str) -> list[ShownSection]:
    """The sections with their numbers as printed."""
    return [
        ShownSection(section.key, f"{number}. {section.title}", tuple(_blocks(section.blocks, code, section.key)))
        for number, section in enumerate(document.sections, start=1)
    ]


def href(key: str, code: str) -> str:
    """Where a trail key opens; "" for what has no page of its own."""
    kind, _, rest = key.partition(":")
    if not rest or kind == "record":
        return ""
    if kind == "reading":
        return f"/w/{code}/reading/{rest}/"
    if kind == "deviation":
        return f"/w/{code}/deviations/{rest}/"
    return f"/w/{code}/trail/?{urlencode({'key': key})}"


def _blocks(blocks: tuple[Block, ...], code: str, section: str) -> Iterator[ShownBlock]:
    for number, block in enumerate(blocks):
        if isinstance(block, Table):
            yield _table(block, code)
        elif isinstance(block, Picture):
            made = [
                (above, mark_safe(svg.paint(one, f"{section}-{number}-{index}")))  # escaped by the painter
                for index, (above, one) in enumerate(picture.scenes(block))
            ]
            yield ShownBlock("picture", caption=block.caption, text=block.alt, pictures=tuple(made))
        elif isinstance(block, Pairs):
            yield ShownBlock("pairs", caption=block.caption, pairs=block.rows)
        else:
            yield ShownBlock("text", block.text, block.manner)


def _table(table: Table, code: str) -> ShownBlock:
    if not table.rows:
        return ShownBlock("empty", table.empty, caption=table.caption, notes=table.notes)
    groups: list[tuple[str, int]] = []
    for column in table.columns:
        if groups and groups[-1][0] == column.group:
            groups[-1] = (column.group, groups[-1][1] + 1)
        else:
            groups.append((column.group, 1))
    totals = len(table.rows) - table.totals
    return ShownBlock(
        "table",
        caption=table.caption,
        groups=tuple(groups) if any(name for name, _ in groups) else (),
        heads=table.columns,
        notes=table.notes,
        rows=tuple(
            (position >= totals, tuple(_cell(table, index, cell, code) for index, cell in enumerate(row)))
            for position, row in enumerate(table.rows)
        ),
    )


def _cell(table: Table, index: int, cell: Cell, code: str) -> ShownCell:
    column = table.columns[index]
    link = href(cell.key, code) if cell.text and cell.key else ""
    return ShownCell(cell.text, link, cell.mark, column.number, index < table.labels, column.wraps)
