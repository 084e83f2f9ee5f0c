"""One table of dated statements. What each kind may say is in blocks.py; what it says at a moment, in
stated.py.
"""

from django.db import models

from plant.ledger.models import Statement as LedgerStatement


class Statement(LedgerStatement):
    """ "Setting, in force from": a kind (vessel, limit, design_dose …), its subject, and what is stated of
    it.
    """

    kind = models.CharField(max_length=24)
    subject = models.CharField(max_length=80)
    value = models.JSONField()

    class Meta(LedgerStatement.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["book", "kind", "subject", "effective_from"], name="statement_in_force"),
            models.Index(fields=["book", "seq"], name="statement_by_seq"),
            models.Index(fields=["kind", "subject"], name="statement_across_books"),
        ]

    def __str__(self) -> str:
        return f"{self.kind} {self.subject} from {self.effective_from:%Y-%m-%d %H:%M}"


from plant.works.tablets.models import Confirmation, Device, Pin, Spell, Tries  # noqa: E402  (Django looks for models here)

__all__ = ["Confirmation", "Device", "Pin", "Spell", "Statement", "Tries"]
