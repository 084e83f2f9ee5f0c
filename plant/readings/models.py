"""Readings, and what was decided about doubtful ones."""

from django.db import models

from plant.ledger.models import Record


class Reading(Record):
    """One observed value of one parameter at one site and time.

    ``typed`` and ``typed_unit`` are what came in; ``value`` (float, for reckoning) and ``value_text`` (exact decimal, for
    limits) are in the canonical ``unit``. A value that was not taken has none of them and says why in ``note``; a result
    in words keeps the words in ``typed``. ``marks`` are doubts found at entry; they are settled by a Settlement, never erased.
    """

    class State(models.TextChoices):
        TAKEN = "taken"
        NOT_TAKEN = "not_taken"
        WORDS = "words"

    site = models.CharField(max_length=40)
    parameter = models.CharField(max_length=40)
    taken_at = models.DateTimeField()
    date_only = models.BooleanField(default=False)
    state = models.CharField(max_length=9, choices=State, default=State.TAKEN)
    typed = models.CharField(max_length=80, blank=True)
    typed_unit = models.CharField(max_length=24, blank=True)
    value = models.FloatField(null=True)
    value_text = models.CharField(max_length=40, blank=True)
    unit = models.CharField(max_length=24, blank=True)
    qualifier = models.CharField(max_length=1, blank=True)
    statistic = models.CharField(max_length=8, default="reading")
    sample = models.CharField(max_length=40, blank=True)
    method = models.CharField(max_length=60, blank=True)
    by_name = models.CharField(max_length=80, blank=True)
    note = models.TextField(blank=True)
    marks = models.JSONField(default=list)

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "site", "parameter", "taken_at"], name="reading_series"),
            models.Index(fields=["book", "taken_at"], name="reading_by_time"),
            models.Index(fields=["book", "seq"], name="reading_by_seq"),
        ]

    def __str__(self) -> str:
        return f"{self.site} {self.parameter} {self.typed} {self.typed_unit} at {self.taken_at:%Y-%m-%d %H:%M}"


class Settlement(Record):
    """Somebody looked at a doubtful reading: it ``stands``, or it is ``set_aside`` (kept, but out of operating figures)."""

    class Decision(models.TextChoices):
        STANDS = "stands"
        SET_ASIDE = "set_aside"

    reading = models.ForeignKey(Reading, models.PROTECT, related_name="settlements")
    decision = models.CharField(max_length=9, choices=Decision)

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "seq"], name="settlement_by_seq")]
