"""What a report is made of before anybody paints it: sections of paragraphs, tables, pictures and pairs. Plain data.

The same document is printed (this package), shown as a page, and written out as figures; it is stored as JSON with each
issued report, so nothing here may ever be read in another way than it was written: ``CONTENT_VERSION`` counts that.
"""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass, field
from typing import Any

CONTENT_VERSION = 1
NOTICE = "The local regulator's rules govern. This report makes no determination of compliance."


@dataclass(frozen=True)
class Cell:
    """One cell. ``text`` is what is printed; ``value`` the unrounded number in the column's unit; ``key`` opens its trail;
    ``mark`` is a letter explained below the table."""

    text: str = ""
    value: float | None = None
    key: str = ""
    mark: str = ""


@dataclass(frozen=True)
class Column:
    """A column: ``group`` stands above neighbours of the same group; ``wraps`` lets long text break into lines."""

    head: str
    unit: str = ""
    group: str = ""
    number: bool = True
    wraps: bool = False


@dataclass(frozen=True)
class Table:
    """``labels`` leading columns name the row; they are repeated where a wide table is set in parts. The last ``totals``
    rows are set bold."""

    name: str
    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]
    labels: int = 1
    totals: int = 0
    notes: tuple[str, ...] = ()
    empty: str = "Nothing to list."


@dataclass(frozen=True)
class Text:
    """A paragraph; ``manner`` is body, small, lead or caution."""

    text: str
    manner: str = "body"


@dataclass(frozen=True)
class Pairs:
    """Names and what they are, one below the other."""

    rows: tuple[tuple[str, str], ...]
    caption: str = ""


@dataclass(frozen=True)
class Picture:
    """A picture by the name of its scene and what the scene is made from; ``alt`` says it in words."""

    scene: str
    facts: dict[str, Any]
    alt: str
    caption: str = ""


Block = Table | Text | Pairs | Picture
_KINDS: dict[str, type] = {"table": Table, "text": Text, "pairs": Pairs, "picture": Picture}


@dataclass(frozen=True)
class Section:
    """A numbered section."""

    key: str
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True)
class Signature:
    """One signature as printed: what it means, who, licence, when, and how it was given."""

    meaning: str
    name: str = ""
    licence: str = ""
    signed_at: str = ""
    manner: str = ""


@dataclass(frozen=True)
class Document:
    """A whole report. ``issued_at`` is ISO 8601 in UTC, and the only time that enters the file."""

    title: str
    works_name: str
    works_code: str
    month: str
    month_words: str
    number: str
    revision: int
    status: str
    draft: bool
    issued_at: str
    form_note: str
    cover: tuple[tuple[str, str], ...]
    signatures: tuple[Signature, ...]
    sections: tuple[Section, ...]
    own_wording: str = ""
    language: str = "en-GB"
    page: str = "A4"
    closing: tuple[tuple[str, str], ...] = field(default_factory=tuple)


def to_plain(document: Document) -> dict[str, Any]:
    """The document as JSON can hold it. Cells are lists (text, value, key, mark) with empty ends cut off."""
    out = {item.name: getattr(document, item.name) for item in dataclasses.fields(document)}
    out["content_version"] = CONTENT_VERSION
    out["cover"] = [list(pair) for pair in document.cover]
    out["closing"] = [list(pair) for pair in document.closing]
    out["signatures"] = [dataclasses.asdict(signature) for signature in document.signatures]
    out["sections"] = [
        {"key": section.key, "title": section.title, "blocks": [_block_plain(block) for block in section.blocks]}
        for section in document.sections
    ]
    return out


def from_plain(plain: dict[str, Any]) -> Document:
    """The document that ``to_plain`` wrote. Raises ValueError for a content version this program cannot read."""
    fields = dict(plain)
    version = fields.pop("content_version", None)
    if version != CONTENT_VERSION:
        raise ValueError(f"content version {version!r} cannot be read by this program (it reads {CONTENT_VERSION})")
    fields["cover"] = _pairs(fields["cover"])
    fields["closing"] = _pairs(fields["closing"])
    fields["signatures"] = tuple(Signature(**signature) for signature in fields["signatures"])
    fields["sections"] = tuple(
        Section(section["key"], section["title"], tuple(_block(block) for block in section["blocks"]))
        for section in fields["sections"]
    )
    return Document(**fields)


def _pairs(rows: list[list[str]]) -> tuple[tuple[str, str], ...]:
    return tuple((left, right) for left, right in rows)


def _block_plain(block: Block) -> dict[str, Any]:
    kind = next(name for name, known in _KINDS.items() if isinstance(block, known))
    out: dict[str, Any] = {"block": kind}
    if isinstance(block, Table):
        for item in dataclasses.fields(block):
            out[item.name] = getattr(block, item.name)
        out["columns"] = [dataclasses.asdict(column) for column in block.columns]
        out["rows"] = [[_cell_plain(cell) for cell in row] for row in block.rows]
        out["notes"] = list(block.notes)
        return out
    if isinstance(block, Pairs):
        return out | {"rows": [list(row) for row in block.rows], "caption": block.caption}
    return out | dataclasses.asdict(block)


def _cell_plain(cell: Cell) -> list[Any]:
    out: list[Any] = [cell.text, cell.value, cell.key, cell.mark]
    while len(out) > 1 and out[-1] in (None, ""):
        out.pop()
    return out


def _block(plain: dict[str, Any]) -> Block:
    fields = dict(plain)
    kind = _KINDS[fields.pop("block")]
    if kind is Table:
        fields["columns"] = tuple(Column(**column) for column in fields["columns"])
        fields["rows"] = tuple(tuple(_cell(cell) for cell in row) for row in fields["rows"])
        fields["notes"] = tuple(fields["notes"])
    elif kind is Pairs:
        fields["rows"] = _pairs(fields["rows"])
    return kind(**fields)


def _cell(plain: list[Any]) -> Cell:
    text, value, key, mark = [*plain, None, "", ""][:4] if len(plain) < 4 else plain
    return Cell(text, value, key or "", mark or "")
