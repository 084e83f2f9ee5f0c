"""load_works FILE.toml: states what a works file says and is not stated yet."""

from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant.ledger.models import Book
from plant.works import commands, load


class Command(BaseCommand):
    help = "Loads a works file. The first load opens the book; loading the same file again changes nothing."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("file", metavar="FILE.toml")
        parser.add_argument("--effective-from", metavar="ISO", help="from when blocks without a date hold (default: now)")
        parser.add_argument("--reason", default="", help="why, for blocks that don't say it")
        commands.add_now(parser)

    def handle(self, *args: Any, **options: Any) -> None:
        path = Path(options["file"])
        try:
            if path.stat().st_size > load.MOST_BYTES:
                raise CommandError(f"{path} is larger than {load.MOST_BYTES:,} bytes: it is no works file")
            data = path.read_bytes()
        except OSError as problem:
            raise CommandError(f"{path} can't be read: {problem.strerror}") from None
        try:
            code, calendar = load.whose(data)
            book = Book.objects.filter(code=code).first()
            done = load.load(
                data=data,
                by=None,
                now=commands.set_now(options["now"], calendar, book),
                effective_from=options["effective_from"],
                reason=options["reason"],
                source=path.name,
            )
        except load.FileRefused as problem:
            raise CommandError(
                "\n".join([f"{path}: nothing was loaded", *(f"  {message}" for message in problem.messages)])
            ) from None
        if done.entry is None:
            self.stdout.write(f"{done.book.code}: nothing new; {done.unchanged} block(s) hold already")
        else:
            opened = "opened its book, " if done.new_book else ""
            self.stdout.write(
                f"{done.book.code}: {opened}{done.stated} block(s) stated in entry {done.entry.seq}, "
                f"{done.unchanged} held already"
            )
