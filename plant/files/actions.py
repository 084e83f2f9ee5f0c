"""Keeping a document: the bytes first, safely on the disk; then the row that names them, which intake appends.

In this order a row never names bytes that are not there. Bytes without a row (a stop between the two) harm nobody: the
same document sent again finds them.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import os
import tempfile
from pathlib import Path

from plant.files import kinds, queries
from plant.files.models import Document

LONGEST_NAME = 120


def document(*, content: bytes, name: str, about: str, made_at: dt.datetime, site: str = "", parameter: str = "") -> Document:
    """The row for a document whose bytes are on the disk. Raises kinds.NotKept; OSError where the disk refuses."""
    media_type = kinds.media_type(content)
    digest = hashlib.sha256(content).hexdigest()
    _keep(queries.path_of(digest), content)
    return Document(
        about=about, site=site, parameter=parameter, name=_plain(name), media_type=media_type, size=len(content),
        sha256=digest, made_at=made_at,
    )  # fmt: skip


def _keep(path: Path, content: bytes) -> None:
    if path.exists():
        return
    path.parent.mkdir(mode=0o750, parents=True, exist_ok=True)
    handle, part = tempfile.mkstemp(dir=path.parent, prefix=".part-")
    try:
        with os.fdopen(handle, "wb") as out:
            out.write(content)
            out.flush()
            os.fsync(out.fileno())
        Path(part).replace(path)
    except BaseException:
        Path(part).unlink(missing_ok=True)
        raise
    folder = os.open(path.parent, os.O_RDONLY)
    try:
        os.fsync(folder)
    finally:
        os.close(folder)


def _plain(name: str) -> str:
    """The name without folders and without what doesn't print."""
    last = name.replace("\\", "/").rsplit("/", 1)[-1]
    shown = "".join(letter for letter in last if letter.isprintable()).strip()
    return shown[-LONGEST_NAME:] or "document"
