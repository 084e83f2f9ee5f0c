"""Tokens: what a machine shows to be let in."""

from __future__ import annotations

from django.conf import settings
from django.db import models

from plant.ledger.models import Book


class Token(models.Model):
    """The token of one device at one works. The device holds the secret; here is only its SHA-256.

    ``window_start`` and ``window_count`` are the requests of the current minute, all web nodes together.
    """

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    name = models.CharField(max_length=40)
    token_hash = models.CharField(max_length=64, unique=True)
    scopes = models.JSONField(default=list)
    made_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    made_at = models.DateTimeField()
    last_used_at = models.DateTimeField(null=True)
    window_start = models.DateTimeField(null=True)
    window_count = models.PositiveIntegerField(default=0)
    revoked_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    revoked_at = models.DateTimeField(null=True)
    revoked_why = models.CharField(max_length=200, blank=True)

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "name"], name="token_name_once_in_a_works")]

    def __str__(self) -> str:
        return self.name
