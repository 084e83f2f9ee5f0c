"""What is kept of a report: who prepared it, each issue, and the content and bytes of each issue; all only added. And the
newest draft of each month, which can be made again at any time.
"""

from django.conf import settings
from django.db import models

from plant.ledger.models import AppendOnly, Book, Record


class Preparation(Record):
    """Somebody looked through a month as known at a seq, explained what hinders it, and signed "prepared"."""

    month = models.CharField(max_length=7)
    known_seq = models.PositiveBigIntegerField()
    figures_hash = models.CharField(max_length=64)
    prepared_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, related_name="+")
    prepared_name = models.CharField(max_length=160)
    prepared_licence = models.CharField(max_length=160, blank=True)
    prepared_at = models.DateTimeField()
    explanations = models.JSONField(default=dict)

    class Meta(Record.Meta):
        abstract = False
        indexes = [models.Index(fields=["book", "month", "seq"], name="preparation_by_month")]

    def __str__(self) -> str:
        return f"{self.month} prepared by {self.prepared_name}"


class Report(Record):
    """One issued report. A revision supersedes the issue before it and gives the reason; drafts stand apart.

    ``known_seq`` is the seq up to which records were known, ``head_hash`` the hash of that entry. The content and the bytes
    lie in a ReportFile; their hashes stand here, bound into the chain with the row.
    """

    month = models.CharField(max_length=7)
    number = models.CharField(max_length=40)
    revision = models.PositiveSmallIntegerField()
    known_seq = models.PositiveBigIntegerField()
    head_hash = models.CharField(max_length=64)
    renderer = models.CharField(max_length=40)
    content_hash = models.CharField(max_length=64)
    pdf_hash = models.CharField(max_length=64)
    prepared_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    prepared_name = models.CharField(max_length=160)
    prepared_licence = models.CharField(max_length=160, blank=True)
    prepared_at = models.DateTimeField(null=True)
    certified_by = models.ForeignKey(settings.AUTH_USER_MODEL, models.PROTECT, null=True, related_name="+")
    certified_name = models.CharField(max_length=160)
    certified_licence = models.CharField(max_length=160, blank=True)
    issued_at = models.DateTimeField()
    manner = models.CharField(max_length=40)
    explanations = models.JSONField(default=dict)

    class Meta(Record.Meta):
        abstract = False
        constraints = [
            *Record.Meta.constraints,
            models.UniqueConstraint(fields=["book", "month", "revision"], name="report_revision_once"),
        ]
        indexes = [models.Index(fields=["book", "month"], name="report_by_month")]

    def __str__(self) -> str:
        return f"{self.number} revision {self.revision}"


class ReportFile(AppendOnly):
    """The content an issue was printed from (canonical JSON) and the bytes that were handed out."""

    report = models.OneToOneField(Report, models.PROTECT, related_name="file")
    content = models.TextField()
    pdf = models.BinaryField()

    def __str__(self) -> str:
        return f"file of {self.report_id}"


class Draft(models.Model):
    """The newest draft of a month, made by a worker: derived, replaced by the next, nobody's signature rests on it."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    month = models.CharField(max_length=7)
    known_seq = models.PositiveBigIntegerField()
    made_at = models.DateTimeField()
    pdf = models.BinaryField()

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "month"], name="draft_once_a_month")]

    def __str__(self) -> str:
        return f"draft of {self.month} as known at {self.known_seq}"
