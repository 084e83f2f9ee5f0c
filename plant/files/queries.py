"""Where a document's bytes lie, which belong to an entry, and whether they are still what was kept."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Iterator
from pathlib import Path

from django.conf import settings
from django.db.models import QuerySet

from plant.files.models import Document
from plant.ledger.models import Book


def path_of(sha256: str) -> Path:
    """The file of a digest."""
    return Path(settings.WEIRBOOK_FILES) / sha256[:2] / sha256


def one(book: Book, ref: str) -> Document | None:
    """The document called ``seq.line`` in a book."""
    seq, _, line = ref.partition(".")
    if not (seq.isdigit() and line.isdigit() and len(seq) < 19 and len(line) < 10):
        return None
    return Document.objects.filter(book=book, seq=int(seq), line=int(line)).select_related("entry").first()


def about(book: Book, client_ids: Iterable[str], *, site: str = "", parameter: str = "") -> QuerySet[Document]:
    """The documents of entries, in the order in which they came; of one line only where it is named."""
    found = Document.objects.filter(book=book, about__in=list(client_ids)).as_known()
    if site:
        found = found.filter(site=site, parameter=parameter)
    return found.select_related("entry__recorded_by").order_by("seq", "line")


def check(book: Book) -> Iterator[str]:
    """For verify_records: documents that are gone from the disk, or differ from what was kept."""
    for kept in Document.objects.filter(book=book).order_by("seq", "line").iterator():
        path = path_of(kept.sha256)
        if not path.is_file():
            yield f"{book.code}: document {kept.ref} ({kept.name}) is not in the folder of documents"
            continue
        with path.open("rb") as content:
            digest = hashlib.file_digest(content, "sha256").hexdigest()
        if digest != kept.sha256:
            yield f"{book.code}: document {kept.ref} ({kept.name}) is not what was kept: its bytes have changed"
