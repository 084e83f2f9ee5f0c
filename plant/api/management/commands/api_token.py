"""api_token make|list|revoke --works CODE: the tokens of devices, from the command line."""

from typing import Any

from django.core.management.base import CommandError, CommandParser

from plant.api import actions, queries
from plant.api.scopes import SCOPES
from plant.works import commands


class Command(commands.WorksCommand):
    help = "Makes, lists and withdraws the tokens by which machines send readings and read figures."

    def add_arguments(self, parser: CommandParser) -> None:
        super().add_arguments(parser)
        parser.add_argument("what", choices=("make", "list", "revoke"))
        parser.add_argument("name", nargs="?", default="", help="name of the device")
        parser.add_argument("--scope", action="append", default=[], choices=list(SCOPES), help="may be given several times")
        parser.add_argument("--why", default="", help="why it is withdrawn")

    def run(self, asked: commands.Asked, **options: Any) -> None:
        try:
            getattr(self, f"_{options['what']}")(asked, options)
        except actions.Refused as problem:
            raise CommandError(str(problem)) from None

    def _make(self, asked: commands.Asked, options: dict[str, Any]) -> None:
        token, secret = actions.make(book=asked.book, name=options["name"], scopes=options["scope"], by=None, now=asked.now)
        self.stderr.write(f"{token.name} may {', '.join(token.scopes)} at {asked.code}. Shown this once:")
        self.stdout.write(secret)

    def _list(self, asked: commands.Asked, options: dict[str, Any]) -> None:
        header = ("name", "scopes", "made", "last used", "withdrawn", "why")
        shown = asked.calendar.local
        self.write_csv(
            header,
            [
                (
                    token.name,
                    " ".join(token.scopes),
                    *(at and f"{shown(at):%Y-%m-%d %H:%M}" for at in (token.made_at, token.last_used_at, token.revoked_at)),
                    token.revoked_why,
                )
                for token in queries.tokens(asked.book)
            ],
        )

    def _revoke(self, asked: commands.Asked, options: dict[str, Any]) -> None:
        found = next((token for token in queries.tokens(asked.book) if token.name == options["name"]), None)
        if found is None or found.revoked_at is not None:
            raise CommandError(f"no token in use at {asked.code} is named {options['name']!r}")
        actions.revoke(token=found, why=options["why"], by=None, now=asked.now)
        self.stdout.write(f"{found.name} is refused from now on")
