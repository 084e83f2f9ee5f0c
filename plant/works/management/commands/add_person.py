"""add_person NAME --works CODE --role ROLE: somebody who works there, with a password to hand over."""

from typing import Any

from django.core.management.base import CommandError, CommandParser
from django.db import transaction

from plant.accounts import actions as accounts
from plant.accounts.models import Person
from plant.works import access, actions, commands


class Command(commands.WorksCommand):
    help = "Gives a person a role at a works; adds the person, and prints the password, where the name is new."
    takes_now = True

    def add_arguments(self, parser: CommandParser) -> None:
        super().add_arguments(parser)
        parser.add_argument("username")
        parser.add_argument("--role", required=True, choices=sorted(access.ROLES))
        parser.add_argument("--full-name", default="")
        parser.add_argument("--may-prepare", action="store_true", help="may sign reports as prepared")
        parser.add_argument("--may-certify", action="store_true", help="may certify reports")

    def run(self, asked: commands.Asked, **options: Any) -> None:
        name, password = options["username"], None
        try:
            with transaction.atomic():
                if not Person.objects.filter(username=name).exists():
                    _, password = accounts.add_person(username=name, full_name=options["full_name"], by=None, now=asked.now)
                actions.set_membership(
                    book=asked.book,
                    username=name,
                    role=options["role"],
                    may_prepare=options["may_prepare"],
                    may_certify=options["may_certify"],
                    by=None,
                    now=asked.now,
                    reason="stated from the command line",
                )
        except (accounts.PersonRefused, actions.Refused) as problem:
            raise CommandError(str(problem)) from None
        self.stdout.write(f"{name} is {options['role']} at {asked.code}")
        if password:
            self.stdout.write(f"password: {password}")
