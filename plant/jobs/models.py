"""One row a piece of work, and one row a kind of regular work."""

from django.conf import settings
from django.db import models

from plant.ledger.models import Book


class Job(models.Model):
    """A piece of work to be done once. While one waits, asking for the same kind and key again adds nothing.

    A running row belongs to ``owner`` until ``lease_until``. Its holder moves that time on while it works; a holder that
    has died stops doing so, and the row is taken over.
    """

    class State(models.TextChoices):
        QUEUED = "queued"
        RUNNING = "running"
        DONE = "done"
        FAILED = "failed"

    book = models.ForeignKey(Book, models.PROTECT, null=True, related_name="+")
    kind = models.CharField(max_length=32)
    key = models.CharField(max_length=120)
    arguments = models.JSONField(default=dict)
    state = models.CharField(max_length=8, choices=State, default=State.QUEUED)
    run_after = models.DateTimeField()
    created_at = models.DateTimeField()
    started_at = models.DateTimeField(null=True)
    finished_at = models.DateTimeField(null=True)
    attempts = models.PositiveSmallIntegerField(default=0)
    owner = models.CharField(max_length=64, blank=True)
    lease_until = models.DateTimeField(null=True)
    progress = models.CharField(max_length=120, blank=True)
    error = models.TextField(blank=True)
    asked_again_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.SET_NULL, null=True, related_name="+")

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["kind", "key"], condition=models.Q(state="queued"), name="job_waits_once"),
        ]
        indexes = [
            models.Index(fields=["state", "run_after"], name="job_due"),
            models.Index(fields=["book", "created_at"], name="job_of_book"),
        ]

    def __str__(self) -> str:
        return f"{self.kind} {self.key} ({self.state})"


class Turn(models.Model):
    """When regular work was last asked for. Whoever moves the time on asks; all others find that it was done."""

    name = models.CharField(max_length=64, primary_key=True)
    last_at = models.DateTimeField()

    def __str__(self) -> str:
        return f"{self.name}, last at {self.last_at.isoformat()}"
