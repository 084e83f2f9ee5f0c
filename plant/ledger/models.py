"""Book, Entry, and the two kinds of row that entries carry: Record (a fact) and Statement (dated configuration).

All of them except Book are append-only. The lock stands three times: here in the ORM, as triggers in the database
(locks.py), and in production in the rights of the database role (DEVELOPERS.md, "Rights of the database role").
"""

from __future__ import annotations

from typing import Any

from django.conf import settings
from django.db import models

from plant.ledger import canonical


class AppendOnlyError(TypeError):
    """Somebody tried to change or remove a row that may only be added."""


class AppendOnlyQuerySet(models.QuerySet):
    """Reads and adds; refuses the rest."""

    def update(self, **kwargs: Any) -> int:
        raise AppendOnlyError(f"{self.model.__name__} rows are never changed: add a correction instead")

    def bulk_update(self, objs: Any, fields: Any, batch_size: Any = None) -> int:
        raise AppendOnlyError(f"{self.model.__name__} rows are never changed: add a correction instead")

    def delete(self) -> Any:
        raise AppendOnlyError(f"{self.model.__name__} rows are never removed: add a void instead")


class AppendOnly(models.Model):
    """A row that is written once."""

    objects = models.Manager.from_queryset(AppendOnlyQuerySet)()

    class Meta:
        abstract = True
        base_manager_name = "objects"

    def save(self, *args: Any, **kwargs: Any) -> None:
        if self.pk is not None and not self._state.adding:
            raise AppendOnlyError(f"{type(self).__name__} rows are never changed: add a correction instead")
        super().save(*args, **kwargs)

    def delete(self, *args: Any, **kwargs: Any) -> Any:
        raise AppendOnlyError(f"{type(self).__name__} rows are never removed: add a void instead")


class Book(models.Model):
    """One works' book. It is what every row of a works carries, and it holds the head of the chain."""

    code = models.SlugField(max_length=24, unique=True)
    opened_at = models.DateTimeField()
    head_seq = models.PositiveBigIntegerField(default=0)
    head_hash = models.CharField(max_length=64, default="")
    head_at = models.DateTimeField(null=True)

    def __str__(self) -> str:
        return self.code


class Entry(AppendOnly):
    """One use case written down: a line, a round, a file, a batch, a change of settings."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="entries")
    seq = models.PositiveBigIntegerField()
    client_id = models.CharField(max_length=64)
    recorded_at = models.DateTimeField()
    recorded_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    device = models.CharField(max_length=64, blank=True)
    attested = models.CharField(max_length=16, default="session")
    kind = models.CharField(max_length=32)
    payload_version = models.PositiveSmallIntegerField(default=1)
    payload = models.TextField()
    content_hash = models.CharField(max_length=64)
    previous_hash = models.CharField(max_length=64, blank=True)
    hash = models.CharField(max_length=64)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["book", "seq"], name="entry_seq_once_in_a_book"),
            models.UniqueConstraint(fields=["book", "client_id"], name="entry_client_id_once_in_a_book"),
        ]
        indexes = [models.Index(fields=["book", "recorded_at"], name="entry_by_time")]

    def __str__(self) -> str:
        return f"{self.book_id}:{self.seq} {self.kind}"

    def chained(self) -> str:
        """The hash that binds this entry to all before it."""
        return canonical.digest(
            [
                self.book_id,
                self.seq,
                self.client_id,
                self.recorded_at,
                self.recorded_by_id,
                self.device,
                self.attested,
                self.kind,
                self.payload_version,
                self.payload,
                self.content_hash,
                self.previous_hash,
            ]
        )


class Row(AppendOnly):
    """What an entry carries, line by line. ``seq`` repeats the entry's, so that "known at" needs no join."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    entry = models.ForeignKey(Entry, models.PROTECT, related_name="+")
    seq = models.PositiveBigIntegerField()
    line = models.PositiveIntegerField()
    reason = models.TextField(blank=True)

    OUTSIDE_FACTS = frozenset({"id", "book", "entry", "seq", "line"})

    class Meta:
        abstract = True

    @property
    def ref(self) -> str:
        """What this row is called inside its book: ``seq.line``."""
        return f"{self.seq}.{self.line}"

    def facts(self) -> dict[str, Any]:
        """The row as its entry's payload states it. References to other rows are by ``seq.line``, never by key."""
        out: dict[str, Any] = {"table": self._meta.label_lower}
        for field in self._meta.concrete_fields:
            if field.name in self.OUTSIDE_FACTS:
                continue
            if isinstance(field, models.ForeignKey):
                other = getattr(self, field.name)
                out[field.name] = None if other is None else getattr(other, "ref", other.pk)
            else:
                out[field.name] = canonical.plain(getattr(self, field.attname))
        return out


class InForceQuerySet(AppendOnlyQuerySet):
    """Records as they hold now, or as they were known at a seq of the book."""

    def as_known(self, seq: int | None = None) -> InForceQuerySet:
        """Rows recorded by ``seq`` (None: by now) that nothing recorded by then supersedes, voids left out."""
        later = self.model._base_manager.filter(supersedes=models.OuterRef("pk"))
        rows = self
        if seq is not None:
            later = later.filter(seq__lte=seq)
            rows = rows.filter(seq__lte=seq)
        return rows.filter(~models.Exists(later), voided=False)


class Record(Row):
    """An observed fact. A correction is a new row that names the old one; a void is a row too."""

    supersedes = models.OneToOneField("self", models.PROTECT, null=True, related_name="superseded_by")
    voided = models.BooleanField(default=False)

    objects = models.Manager.from_queryset(InForceQuerySet)()  # type: ignore[misc]  # Django replaces managers so

    class Meta:
        abstract = True
        base_manager_name = "objects"
        constraints = [
            models.UniqueConstraint(fields=["entry", "line"], name="%(class)s_line_once"),
            models.CheckConstraint(
                condition=models.Q(supersedes__isnull=True) | ~models.Q(reason=""), name="%(class)s_correction_has_reason"
            ),
            models.CheckConstraint(
                condition=models.Q(voided=False) | models.Q(supersedes__isnull=False), name="%(class)s_void_of_something"
            ),
        ]


class Statement(Row):
    """Dated configuration. The latest before a moment holds; a withdrawal is a statement too."""

    effective_from = models.DateTimeField()
    withdrawn = models.BooleanField(default=False)

    class Meta:
        abstract = True
        base_manager_name = "objects"
        constraints = [models.UniqueConstraint(fields=["entry", "line"], name="%(class)s_line_once")]
