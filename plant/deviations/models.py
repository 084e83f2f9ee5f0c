"""An episode outside a limit, and its life."""

from django.db import models

from plant.ledger.models import Record


class Deviation(Record):
    """One episode: what was found first. It is never changed; what came after stands in its events.

    ``raised_for`` is the operating day judged, ``since`` the estimated start. ``likely_causes`` is a list of
    {cause, likelihood, evidence}, likeliest first. ``statement`` is the ref of the limit's statement (empty for a default),
    ``tell`` the tellings owed from the moment of raising.
    """

    class Level(models.TextChoices):
        TARGET = "target"
        ALERT = "alert"
        ACTION = "action"
        REGULATORY = "regulatory"

    code = models.CharField(max_length=100)
    kind = models.CharField(max_length=24)
    level = models.CharField(max_length=10, choices=Level)
    subject_kind = models.CharField(max_length=16)
    subject = models.CharField(max_length=40)
    parameter = models.CharField(max_length=40, blank=True)
    raised_for = models.DateField()
    since = models.DateTimeField()
    value = models.CharField(max_length=80, blank=True)
    limit = models.CharField(max_length=120, blank=True)
    sentence = models.TextField(blank=True)
    likely_causes = models.JSONField(default=list)
    statement = models.CharField(max_length=32, blank=True)
    tell = models.JSONField(default=list)

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "raised_for"], name="deviation_by_day"),
            models.Index(fields=["book", "code", "subject", "raised_for"], name="deviation_by_limit"),
            models.Index(fields=["book", "seq", "line"], name="deviation_by_ref"),
        ]

    def __str__(self) -> str:
        return f"{self.kind} {self.subject} {self.parameter} {self.raised_for}"


class DeviationEvent(Record):
    """One step of a deviation's life. ``at`` is when it happened; when it became known is its entry's time."""

    class Kind(models.TextChoices):
        RAISED = "raised"
        FINDING = "finding"
        ACKNOWLEDGED = "acknowledged"
        TOLD = "told"
        CAUSE = "cause"
        ACTION = "action"
        VERIFIED = "verified"
        CLOSED = "closed"
        COMMENT = "comment"
        CORRECTED_AWAY = "corrected_away"
        APPROVED = "approved"

    deviation = models.ForeignKey(Deviation, models.PROTECT, related_name="events")
    kind = models.CharField(max_length=16, choices=Kind)
    at = models.DateTimeField()
    day = models.DateField(null=True)
    fields = models.JSONField(default=dict)

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "kind", "day"], name="deviation_event_by_day"),
            models.Index(fields=["book", "seq"], name="deviation_event_by_seq"),
        ]
