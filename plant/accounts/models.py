"""People. One account a person; no shared sign-in."""

from django.contrib.auth.models import AbstractUser
from django.db import models

from plant.ledger.models import AppendOnly


class Person(AbstractUser):
    """Somebody who signs in. Rights are held per works, by statements of the works, not here."""

    @property
    def display_name(self) -> str:
        """The name as it is printed."""
        return self.get_full_name() or self.username

    def __str__(self) -> str:
        return self.display_name


class SecondFactor(models.Model):
    """What a person proves beside the password: the codes of a telephone.

    The secret is sealed with the site's secret key, which no back-up holds. ``last_step`` is the last code used up.
    """

    person = models.OneToOneField(Person, models.CASCADE, related_name="second_factor")
    sealed_secret = models.TextField()
    confirmed_at = models.DateTimeField(null=True)
    last_step = models.BigIntegerField(default=-1)
    recovery_digests = models.JSONField(default=list)


class SecurityEvent(AppendOnly):
    """A sign-in, a refusal, a change of what somebody proves himself by. Only ever added.

    A name that belongs to nobody is not kept: it may be a password typed into the wrong field.
    """

    class Kind(models.TextChoices):
        SIGNED_IN = "signed_in"
        SIGNED_OUT = "signed_out"
        REFUSED = "refused"
        LOCKED_OUT = "locked_out"
        CODE_REFUSED = "code_refused"
        RECOVERY_USED = "recovery_used"
        SESSION_ENDED = "session_ended"
        PERSON_ADDED = "person_added"
        PASSWORD_CHANGED = "password_changed"  # noqa: S105
        PASSWORD_REPLACED = "password_replaced"  # noqa: S105
        FACTOR_ADDED = "factor_added"
        FACTOR_REMOVED = "factor_removed"

    at = models.DateTimeField()
    kind = models.CharField(max_length=20, choices=Kind)
    person = models.ForeignKey(Person, models.PROTECT, null=True, related_name="+")
    by = models.ForeignKey(Person, models.PROTECT, null=True, related_name="+")
    address = models.CharField(max_length=45, blank=True)

    class Meta(AppendOnly.Meta):
        abstract = False
        indexes = [
            models.Index(fields=["address", "at"], name="security_by_address"),
            models.Index(fields=["person", "at"], name="security_by_person"),
        ]
