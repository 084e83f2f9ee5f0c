"""The file itself: a gzipped tar with a table a member, the documents, and a list of contents with their digests."""

from __future__ import annotations

import hashlib
import json
import tarfile
from dataclasses import asdict, dataclass, field
from pathlib import Path, PurePosixPath
from typing import Any

CONTENTS = "contents.json"
FORMAT = 1


class NotABackUp(ValueError):
    """The file is no back-up of this program, or not whole; the message says what is wrong with it."""


@dataclass(frozen=True)
class Table:
    """One table in the back-up."""

    columns: list[str]
    rows: int
    sha256: str


@dataclass
class Contents:
    """What a back-up says of itself. ``heads`` are code, number of entries and last hash of each book."""

    format: int
    made_at: str
    vendor: str
    migrations: list[list[str]]
    heads: list[list[Any]]
    tables: dict[str, Table] = field(default_factory=dict)
    files: dict[str, str] = field(default_factory=dict)

    def as_json(self) -> str:
        return json.dumps(asdict(self), indent=1, sort_keys=True)


def digest_of(path: Path) -> str:
    """SHA-256 of a file."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def table_name(label: str) -> str:
    """The member that holds a table."""
    return f"tables/{label}.jsonl"


def pack(folder: Path, files: Path, contents: Contents, target: Path) -> None:
    """Puts the tables written to `folder` and the documents of `files` into one file.

    Documents are only ever added, so those present after the rows were read are all that the rows speak of.
    """
    with tarfile.open(target, "w:gz", compresslevel=6) as tar:
        for label in contents.tables:
            tar.add(folder / f"{label}.jsonl", table_name(label))
        if files.is_dir():
            for path in sorted(found for found in files.rglob("*") if found.is_file()):
                name = f"files/{path.relative_to(files).as_posix()}"
                contents.files[name] = digest_of(path)
                tar.add(path, name)
        listed = folder / CONTENTS
        listed.write_text(contents.as_json())
        tar.add(listed, CONTENTS)


def unpack(source: Path, folder: Path) -> Contents:
    """Unpacks into an empty folder and checks every digest. Raises NotABackUp."""
    try:
        with tarfile.open(source, "r:gz") as tar:
            for member in tar:
                _unpack_one(tar, member, folder)
    except (tarfile.TarError, EOFError, OSError) as problem:
        raise NotABackUp(f"{source.name} can't be unpacked: {problem}") from None
    try:
        read = json.loads((folder / CONTENTS).read_text())
        if read.get("format") != FORMAT:
            raise NotABackUp(f"{source.name} is of format {read.get('format')}; this version reads {FORMAT}")
        read["tables"] = {label: Table(**table) for label, table in read["tables"].items()}
        contents = Contents(**read)
    except (OSError, ValueError, KeyError, TypeError, AttributeError) as problem:
        if isinstance(problem, NotABackUp):
            raise
        raise NotABackUp(f"{source.name} has no readable list of contents: it was cut short, or is something else") from None
    _check(source, folder, contents)
    return contents


def _unpack_one(tar: tarfile.TarFile, member: tarfile.TarInfo, folder: Path) -> None:
    name = PurePosixPath(member.name)
    # A back-up may come from anywhere: nothing in it may be written outside the folder, and only plain files.
    if not member.isfile() or name.is_absolute() or ".." in name.parts:
        raise NotABackUp(f"it holds {member.name!r}, which no back-up of this program does")
    target = folder.joinpath(*name.parts)
    target.parent.mkdir(parents=True, exist_ok=True)
    data = tar.extractfile(member)
    assert data is not None
    with target.open("wb") as out:
        while piece := data.read(1 << 20):
            out.write(piece)


def _check(source: Path, folder: Path, contents: Contents) -> None:
    wanted = {table_name(label): table.sha256 for label, table in contents.tables.items()} | contents.files
    found = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()} - {CONTENTS}
    if found != set(wanted):
        odd = ", ".join(sorted(found ^ set(wanted))[:5])
        raise NotABackUp(f"{source.name} does not hold what it lists: {odd}")
    for name, sha256 in wanted.items():
        if digest_of(folder / name) != sha256:
            raise NotABackUp(f"{source.name}: {name} is not as it was written")
