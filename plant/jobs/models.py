"""One row a piece of work."""

from django.db import models

from plant.ledger.models import Book


class Job(models.Model):
    """A piece of work to be done once. While one waits, asking for the same kind and key again adds nothing."""

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
    finished_at = models.DateTimeField(null=True)
    attempts = models.PositiveSmallIntegerField(default=0)
    owner = models.CharField(max_length=64, blank=True)
    lease_until = models.DateTimeField(null=True)
    progress = models.CharField(max_length=120, blank=True)
    error = models.TextField(blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["kind", "key"], condition=models.Q(state="queued"), name="job_waits_once"),
        ]
        indexes = [models.Index(fields=["state", "run_after"], name="job_due")]

    def __str__(self) -> str:
        return f"{self.kind} {self.key} ({self.state})"
