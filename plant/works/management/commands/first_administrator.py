"""first_administrator NAME: the person who may open works in an empty installation."""

from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant import clock
from plant.accounts import actions
from plant.accounts.models import Person


class Command(BaseCommand):
    help = (
        "Adds the first administrator and prints name and password. Does nothing where there is one already. "
        "Works loaded afterwards make this person their administrator."
    )

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("username")
        parser.add_argument("--full-name", default="")

    def handle(self, *args: Any, **options: Any) -> None:
        if Person.objects.filter(is_superuser=True).exists():
            self.stderr.write("There is a first administrator already; nothing was changed.")
            return
        try:
            person, password = actions.add_person(
                username=options["username"],
                full_name=options["full_name"],
                by=None,
                now=clock.now(),
                opens_works=True,
            )
        except actions.PersonRefused as problem:
            raise CommandError(str(problem)) from None
        self.stdout.write(f"First administrator: {person.username}   password: {password}")
