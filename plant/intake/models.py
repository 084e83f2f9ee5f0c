"""What a round is besides its readings: how it was closed."""

from django.db import models

from plant.ledger.models import Record


class HandOver(Record):
    """A shift's round, closed: what was taken, what stayed open, and what the next shift should know."""

    day = models.DateField()
    shift = models.CharField(max_length=40)
    starts_at = models.DateTimeField()
    closed_at = models.DateTimeField()
    note = models.TextField(blank=True)
    lines_due = models.PositiveSmallIntegerField(default=0)
    lines_answered = models.PositiveSmallIntegerField(default=0)
    lines_open = models.JSONField(default=list)

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "starts_at"], name="hand_over_by_shift")]

    def __str__(self) -> str:
        return f"{self.shift} {self.day}"


class TakeOver(Record):
    """The next shift has read what was handed over and takes the works; by whom says the entry.

    ``hand_over`` is None where the shift before left without closing its round.
    """

    hand_over = models.ForeignKey(HandOver, models.PROTECT, null=True, related_name="taken_over")
    from_starts_at = models.DateTimeField()
    taken_at = models.DateTimeField()

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "from_starts_at"], name="take_over_by_shift")]

    def __str__(self) -> str:
        return f"taken over {self.taken_at:%Y-%m-%d %H:%M}"
