"""remove_second_factor NAME: for somebody whose telephone and recovery codes are lost."""

from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant import clock
from plant.accounts import security
from plant.accounts.models import Person


class Command(BaseCommand):
    help = "Removes somebody's second factor; the password alone signs in then. Make sure who is asking."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("username")

    def handle(self, *args: Any, **options: Any) -> None:
        person = Person.objects.filter(username=options["username"]).first()
        if person is None:
            raise CommandError(f"there is no person named {options['username']}")
        if not security.remove(person=person, by=None, now=clock.now()):
            raise CommandError(f"{person.username} has no second factor")
        self.stdout.write(f"{person.username} signs in with the password alone now.")
