"""Does the book still say what was written into it?

Checks each chain, each row against its entry's payload, the locks, and whatever the rooms above registered (the one
derived table, for instance). Findings are sentences.
"""

from __future__ import annotations

import heapq
import json
from collections.abc import Callable, Iterator

from django.apps import apps
from django.db import connection

from plant.ledger import canonical, locks, models

_checks: dict[str, Callable[[models.Book], Iterator[str]]] = {}


def register(name: str, check: Callable[[models.Book], Iterator[str]]) -> None:
    """Adds a check of a room above; called once from its AppConfig.ready."""
    _checks[name] = check


def everything() -> Iterator[str]:
    """All findings, over all books."""
    for table in locks.missing(connection):
        yield f"locks: {table} can be changed: its triggers are missing"
    for book in models.Book.objects.order_by("pk"):
        yield from chain(book)
        for check in _checks.values():
            yield from check(book)


def chain(book: models.Book) -> Iterator[str]:
    """Gaps, broken hashes, times running backwards, a head that differs, and rows unlike their payload."""
    previous, seq, at = "", 0, None
    rows = _RowsInOrder(book)
    for entry in models.Entry.objects.filter(book=book).order_by("seq").iterator(chunk_size=200):
        seq += 1
        name = f"{book.code} entry {entry.seq}"
        if entry.seq != seq:
            yield f"{name}: expected seq {seq}; entries are missing before it"
            seq = entry.seq
        if entry.previous_hash != previous or entry.chained() != entry.hash:
            yield f"{name}: the chain is broken here"
        if at is not None and entry.recorded_at < at:
            yield f"{name}: recorded before the entry it follows"
        previous, at = entry.hash, entry.recorded_at
        yield from _compare(entry, rows.of(entry.seq), name)
    for row in rows.rest():
        yield f"{book.code}: {row._meta.label_lower} {row.ref} belongs to no entry"
    if (book.head_seq, book.head_hash) != (seq, previous):
        yield f"{book.code}: the head of the book does not match its last entry; its tail may be missing"


class _RowsInOrder:
    """All rows of a book, over all tables, in the order of the chain: one pass, whatever the size of the book."""

    def __init__(self, book: models.Book) -> None:
        streams = [
            model._base_manager.filter(book=book)
            .select_related(*_references(model))
            .order_by("seq", "line")
            .iterator(chunk_size=500)
            for model in _row_models()
        ]
        self._rows = heapq.merge(*streams, key=lambda row: (row.seq, row.line))
        self._next: models.Row | None = next(self._rows, None)

    def of(self, seq: int) -> list[models.Row]:
        out = []
        while self._next is not None and self._next.seq <= seq:
            out.append(self._next)
            self._next = next(self._rows, None)
        return out

    def rest(self) -> Iterator[models.Row]:
        while self._next is not None:
            yield self._next
            self._next = next(self._rows, None)


def _compare(entry: models.Entry, rows: list[models.Row], name: str) -> Iterator[str]:
    stated = json.loads(entry.payload)["rows"]
    found: dict[int, models.Row] = {}
    for row in rows:
        if row.entry_id != entry.pk or row.line in found or row.line > len(stated):
            yield f"{name}: {row._meta.label_lower} {row.ref} was added later"
        else:
            found[row.line] = row
    for line, facts in enumerate(stated, start=1):
        row_found = found.get(line)
        if row_found is None:
            yield f"{name}: line {line} ({facts['table']}) is missing from its table"
            continue
        actual = row_found.facts()
        if canonical.text(actual) != canonical.text(facts):
            differing = sorted(key for key in actual | facts if facts.get(key) != actual.get(key))
            yield f"{name}: line {line} ({facts['table']}) differs in {', '.join(differing)}"


def _row_models() -> list[type[models.Row]]:
    return [model for model in apps.get_models() if issubclass(model, models.Row)]


def _references(model: type[models.Row]) -> list[str]:
    own = {"book", "entry"}
    return [field.name for field in model._meta.concrete_fields if field.is_relation and field.name not in own]
