"""A document in the book. Its bytes lie in a folder, under their digest; the row says whose, when and about what."""

from django.db import models

from plant.ledger.models import Record


class Document(Record):
    """One photo or certificate.

    ``about`` is the client id of the entry it belongs to, which may reach the book before or after it, or the ref of a row that
    is there already; ``site`` and ``parameter`` say which line of that entry, where it has several.
    """

    about = models.CharField(max_length=64)
    site = models.CharField(max_length=40, blank=True)
    parameter = models.CharField(max_length=40, blank=True)
    name = models.CharField(max_length=120)
    media_type = models.CharField(max_length=40)
    size = models.PositiveIntegerField()
    sha256 = models.CharField(max_length=64)
    made_at = models.DateTimeField()

    class Meta(Record.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "about"], name="document_about"),
            models.Index(fields=["book", "seq"], name="document_by_seq"),
        ]

    def __str__(self) -> str:
        return f"{self.name} ({self.media_type}, {self.size} bytes)"

    @property
    def is_picture(self) -> bool:
        return self.media_type.startswith("image/")
