"""Enrolled devices, PINs, failed tries, the spells people have at a tablet, and the record that confirms a claimed name."""

from __future__ import annotations

from django.conf import settings
from django.db import models

from plant.ledger.models import Book, Record


class Device(models.Model):
    """A tablet of one works. Its cookie holds a random token; here is only the token's SHA-256."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    name = models.CharField(max_length=40)
    token_hash = models.CharField(max_length=64, unique=True)
    enrolled_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    enrolled_at = models.DateTimeField()
    revoked_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    revoked_at = models.DateTimeField(null=True)
    revoked_why = models.CharField(max_length=200, blank=True)

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "name"], name="device_name_once_in_a_works")]

    def __str__(self) -> str:
        return self.name


class Pin(models.Model):
    """What somebody types at the shared tablets of one works. Only its hash is kept."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    person = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    digest = models.CharField(max_length=160)
    set_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    set_at = models.DateTimeField()

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "person"], name="pin_once_a_person")]

    def __str__(self) -> str:
        return f"PIN of {self.person_id}"


class Tries(models.Model):
    """Wrong PINs in a row of one person at one works, over all its tablets."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    person = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    wrong = models.PositiveSmallIntegerField(default=0)
    locked_until = models.DateTimeField(null=True)

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "person"], name="tries_once_a_person")]

    def __str__(self) -> str:
        return f"{self.wrong} wrong"


class Spell(models.Model):
    """One person's time at one tablet, proved by PIN. The tablet makes its id when a name is picked, network or not."""

    device = models.ForeignKey(Device, models.PROTECT, related_name="+")
    ident = models.UUIDField()
    person = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    proved_at = models.DateTimeField()

    class Meta:
        constraints = [models.UniqueConstraint(fields=["device", "ident"], name="spell_once_on_a_device")]

    def __str__(self) -> str:
        return str(self.ident)


class Confirmation(Record):
    """Entries made under a claimed name, confirmed afterwards by that person's PIN. ``entries`` are seqs of the book."""

    device = models.CharField(max_length=64)
    person = models.CharField(max_length=150)
    spell = models.CharField(max_length=36)
    entries = models.JSONField(default=list)
    confirmed_at = models.DateTimeField()

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "person"], name="confirmation_by_person")]

    def __str__(self) -> str:
        return f"{self.person}, {len(self.entries)} entries"
