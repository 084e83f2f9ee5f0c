"""What was mailed to whom: one row for each deviation and name, so that nobody is written to twice about the same."""

from django.db import models

from plant.ledger.models import Book


class Notice(models.Model):
    """One mail: made, and sent once a mail server has taken it. ``about`` is a deviation's ref, or the day of a digest."""

    book = models.ForeignKey(Book, models.PROTECT, related_name="+")
    about = models.CharField(max_length=40)
    call = models.CharField(max_length=40)
    address = models.CharField(max_length=254)
    made_at = models.DateTimeField()
    sent_at = models.DateTimeField(null=True)

    class Meta:
        constraints = [models.UniqueConstraint(fields=["book", "about", "call"], name="notice_once")]

    def __str__(self) -> str:
        return f"{self.about} to {self.call}"
