"""Reading a CSV file line by line, whatever its size, and saying plainly what is wrong with one."""

from __future__ import annotations

import csv
import hashlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, BinaryIO

MOST_BYTES = 1_000_000_000
MOST_COLUMNS = 500
_SEPARATORS = (",", ";", "\t")
_BOM_UTF16 = (b"\xff\xfe", b"\xfe\xff")


class NotASheet(ValueError):
    """The file as a whole can't be read; the message says what was found and what was expected."""


@dataclass(frozen=True)
class Row:
    """One line: its number in the file, and its cells by column name. ``problem`` is set where the cells don't fit."""

    line: int
    cells: dict[str, str]
    problem: str = ""


class Sheet:
    """A CSV file of UTF-8 text with a header; iterate for its rows. Columns are separated by commas (or ; or tabs)."""

    def __init__(self, path: Path, *, required: Sequence[str], optional: Sequence[str]) -> None:
        self.path = path
        self.name = path.name
        self._required, self._optional = tuple(required), tuple(optional)
        try:
            size = path.stat().st_size
            if path.is_dir():
                raise NotASheet(f"{path} is a folder; expected a CSV file")
            self.sha256 = self._digest()
        except OSError as problem:
            raise NotASheet(f"{path} can't be read: {problem.strerror}") from None
        if not size:
            raise NotASheet(f"{self.name} is empty; expected a header line: {','.join(self._required)}")
        if size > MOST_BYTES:
            raise NotASheet(f"{self.name} has {size / 1e9:.1f} GB; split it into files of at most 1 GB")
        self.header, self.ignored = self._header()

    def __iter__(self) -> Iterator[Row]:
        with self.path.open("rb") as file:
            reader = self._reader(file)
            for cells in self._cells(reader, skip=1):
                yield self._row(reader.line_num, cells)

    def _digest(self) -> str:
        with self.path.open("rb") as file:
            return hashlib.file_digest(file, "sha256").hexdigest()

    def _header(self) -> tuple[tuple[str, ...], tuple[str, ...]]:
        with self.path.open("rb") as file:
            first = file.readline(65536)
        if first.startswith(_BOM_UTF16):
            raise NotASheet(f"{self.name} is UTF-16 text; expected UTF-8: save it again as “CSV UTF-8”")
        text = self._decoded(first, 1)
        self._separator = max(_SEPARATORS, key=text.count)
        with self.path.open("rb") as file:
            found = next(self._cells(self._reader(file)), [])
        if len(found) > MOST_COLUMNS:
            raise NotASheet(f"{self.name}, line 1: {len(found)} columns; expected at most {MOST_COLUMNS}")
        header = tuple(cell.strip().lstrip("\ufeff") for cell in found)
        if not any(header):
            raise NotASheet(f"{self.name} has no header; expected: {','.join(self._required)}")
        known = {name.lower(): name for name in self._required + self._optional}
        names = tuple(known.get(name.lower(), name) for name in header)
        missing = [name for name in self._required if name not in names]
        if missing:
            raise NotASheet(
                f"{self.name}, line 1: the header lacks {', '.join(missing)}; read: {self._separator.join(header)[:200]}; "
                f"expected: {','.join(self._required)} and optionally {','.join(self._optional)}"
            )
        twice = sorted({name for name in names if name and names.count(name) > 1})
        if twice:
            raise NotASheet(f"{self.name}, line 1: the header names {', '.join(twice)} twice")
        return names, tuple(name for name in names if name and name not in known.values())

    def _reader(self, file: BinaryIO) -> Any:
        lines = (self._decoded(raw, number) for number, raw in enumerate(file, start=1))
        return csv.reader(lines, delimiter=self._separator, strict=True)

    def _decoded(self, raw: bytes, number: int) -> str:
        try:
            return raw.decode("utf-8-sig" if number == 1 else "utf-8")
        except UnicodeDecodeError as problem:
            raise NotASheet(
                f"{self.name}, line {number}: byte 0x{raw[problem.start]:02X} is not UTF-8 text; nothing of the file was "
                f"taken past this line: save it again as “CSV UTF-8”"
            ) from None

    def _cells(self, reader: Any, skip: int = 0) -> Iterator[list[str]]:
        try:
            for number, cells in enumerate(reader):
                if number >= skip:
                    yield cells
        except csv.Error as problem:
            raise NotASheet(f"{self.name}, line {reader.line_num}: not a CSV line: {problem}") from None

    def _row(self, line: int, cells: list[str]) -> Row:
        if not any(cell.strip() for cell in cells):
            return Row(line, {})
        named = dict(zip(self.header, cells, strict=False))
        extra = [cell for cell in cells[len(self.header) :] if cell.strip()]
        lacking = [name for name in self._required if name not in named]
        if extra:
            return Row(line, named, f"{len(cells)} cells; expected {len(self.header)} (a decimal comma needs quotes around it)")
        if lacking:
            return Row(line, named, f"{len(cells)} cells; expected {len(self.header)}")
        return Row(line, named)


def pairs(path: Path) -> dict[str, str]:
    """A file of two columns, from and to: how somebody's own spellings read here. Raises NotASheet."""
    out: dict[str, str] = {}
    for row in Sheet(path, required=("from", "to"), optional=()):
        if row.problem:
            raise NotASheet(f"{path.name}, line {row.line}: {row.problem}")
        if row.cells:
            key = " ".join(row.cells["from"].split())
            if out.setdefault(key, row.cells["to"].strip()) != row.cells["to"].strip():
                raise NotASheet(f"{path.name}, line {row.line}: {key!r} stands for two things")
    return out
