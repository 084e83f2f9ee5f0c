"""A file sent to the page: kept aside until it is confirmed, then brought in like one named at the shell."""

from __future__ import annotations

import datetime as dt
import hashlib
import re
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from django.conf import settings
from django.core.files.uploadedfile import UploadedFile

from plant.intake import ground, moments, movements, numbers, records, sheets, tally
from plant.ledger.models import Book

MOST_BYTES = 20_000_000
MOST_LINES = 20_000
KEPT_FOR = dt.timedelta(days=1)
KINDS = ("records", "deliveries", "transfers")
_TOKEN = re.compile(r"[0-9a-f]{64}")


class Refused(ValueError):
    """The file can't be taken here; the message says why and what to do."""


@dataclass(frozen=True)
class Wish:
    """How the page's form wants a file to be taken."""

    kind: str = "records"
    decimal: str = numbers.POINT
    ambiguous: str = moments.REFUSE
    units: str = ""
    sites: str = ""
    add_sites: bool = False
    all_or_nothing: bool = False

    def wanted(self) -> records.Wanted:
        """Raises Refused for a list of spellings that can't be read."""
        spelling = ground.Spelling(self.decimal, self.ambiguous, _pairs(self.sites), _pairs(self.units))
        return records.Wanted(spelling, self.add_sites and self.kind == "records", self.all_or_nothing)


def keep(sent: UploadedFile, *, now: dt.datetime) -> str:
    """Puts a file aside and returns its token. Raises Refused."""
    if (sent.size or 0) > MOST_BYTES:
        raise Refused(f"The file has {(sent.size or 0) / 1e6:.0f} MB; here at most {MOST_BYTES / 1e6:.0f}. {_AT_THE_SHELL}")
    folder = _folder()
    _clear(folder, now)
    digest = hashlib.sha256()
    parts = []
    for part in sent.chunks():
        digest.update(part)
        parts.append(part)
    token = digest.hexdigest()
    (folder / f"{token}.csv").write_bytes(b"".join(parts))
    return token


def look(*, book: Book, token: str, name: str, wish: Wish, now: dt.datetime) -> tally.Tally:
    """What would come of the file; writes nothing. Raises Refused, sheets.NotASheet."""
    sheet = _sheet(token, name, wish)
    _few_enough(sheet)
    if wish.kind == "records":
        return records.look(book=book, sheet=sheet, wanted=wish.wanted(), now=now)
    return movements.look(kind=_kind(wish), book=book, sheet=sheet, wanted=wish.wanted(), now=now)


def bring_in(*, book: Book, token: str, name: str, wish: Wish, by: Any, now: dt.datetime) -> tally.Tally:
    """Brings the file in; its days are judged by the worker. Raises Refused, sheets.NotASheet, records.NothingKept."""
    sheet = _sheet(token, name, wish)
    _few_enough(sheet)
    if wish.kind == "records":
        counted = records.bring_in(book=book, sheet=sheet, wanted=wish.wanted(), by=by, now=now, judge=False)
    else:
        counted = movements.bring_in(
            kind=_kind(wish), book=book, sheet=sheet, wanted=wish.wanted(), by=by, now=now, judge=False
        )
    _path(token).unlink(missing_ok=True)
    return counted


_AT_THE_SHELL = "Bring it in at the server: manage.py import_records FILE.csv --works CODE."


def _kind(wish: Wish) -> movements.Kind:
    return movements.DELIVERIES if wish.kind == "deliveries" else movements.TRANSFERS


def _sheet(token: str, name: str, wish: Wish) -> sheets.Sheet:
    path = _path(token)
    if not path.is_file():
        raise Refused("The file is no longer here; send it again.")
    sheet = records.open_file(path) if wish.kind == "records" else movements.open_file(_kind(wish), path)
    sheet.name = name[:120] or "file.csv"
    return sheet


def _few_enough(sheet: sheets.Sheet) -> None:
    with sheet.path.open("rb") as file:
        count = sum(1 for _ in file)
    if count > MOST_LINES:
        raise Refused(f"The file has {count:,} lines; here at most {MOST_LINES:,}. {_AT_THE_SHELL}")


def _path(token: str) -> Path:
    if not _TOKEN.fullmatch(token):
        raise Refused("The file is no longer here; send it again.")
    return _folder() / f"{token}.csv"


def _folder() -> Path:
    folder = Path(settings.WEIRBOOK_FILES) / "incoming"
    folder.mkdir(parents=True, exist_ok=True)
    return folder


def _clear(folder: Path, now: dt.datetime) -> None:
    """Throws away what nobody confirmed."""
    for path in folder.glob("*.csv"):
        if now.timestamp() - path.stat().st_mtime > KEPT_FOR.total_seconds():
            path.unlink(missing_ok=True)


def _pairs(text: str) -> dict[str, str]:
    out = {}
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.strip():
            continue
        old, mark, new = line.partition("=")
        if not mark:
            raise Refused(f"Other spellings, line {number}: read {line.strip()!r}; expected two words with = between them.")
        out[" ".join(old.split())] = new.strip()
    return out
