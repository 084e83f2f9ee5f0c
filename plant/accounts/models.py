"""People. One account a person; no shared sign-in."""

from django.contrib.auth.models import AbstractUser


class Person(AbstractUser):
    """Somebody who signs in. Rights are held per works, by statements of the works, not here."""

    @property
    def display_name(self) -> str:
        """The name as it is printed."""
        return self.get_full_name() or self.username

    def __str__(self) -> str:
        return self.display_name
