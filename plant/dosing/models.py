"""The one derived table: what a day came to, kept so that a screen need not reckon it again."""

from django.db import models

from plant.ledger.models import Book


class DayState(models.Model):
    """Figures of one subject on one operating day, as known through a seq, reckoned by one version of the code.

    It can be thrown away at any time and comes back the same; questions about past knowledge never look at it.
    """

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    subject = models.CharField(max_length=80)
    day = models.DateField()
    through_seq = models.PositiveBigIntegerField()
    code_version = models.PositiveIntegerField()
    figures = models.JSONField()

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "subject", "day"], name="day_state_once")]

    def __str__(self) -> str:
        return f"{self.subject} {self.day}"
