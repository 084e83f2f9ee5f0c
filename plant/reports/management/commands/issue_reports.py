"""issue_reports: one month of several works in one run. What hinders one works hinders no other."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant.ledger.models import Book
from plant.reports import actions, queries
from plant.reports.management import writing
from plant.reports.month import NoSuchMonth
from plant.works import commands


class Command(BaseCommand):
    help = "Issues a month's operating report of several works, each as its own PDF in a folder."

    def add_arguments(self, parser: CommandParser) -> None:
        which = parser.add_mutually_exclusive_group(required=True)
        which.add_argument("--works", nargs="+", metavar="CODE", help="the works' codes")
        which.add_argument("--all", action="store_true", help="every works with anything on record")
        parser.add_argument("--month", required=True, type=commands.month, metavar="YYYY-MM")
        parser.add_argument("--into", required=True, type=Path, metavar="FOLDER", help="where the PDFs are written")
        commands.add_now(parser)

    def handle(self, *args: Any, **options: Any) -> None:
        year, month = options["month"]
        books = list(Book.objects.exclude(head_seq=0).order_by("code")) if options["all"] else []
        books += [commands.find_book(code) for code in dict.fromkeys(options["works"] or ())]
        if not options["into"].is_dir():
            raise CommandError(f"{options['into']} is no folder")
        failed = 0
        for number, book in enumerate(books, start=1):
            now = commands.set_now(options["now"], None, book)
            try:
                done = actions.issue_from_shell(book=book, year=year, month=month, now=now)
            except (actions.NotReady, actions.MayNotSign, NoSuchMonth) as problem:
                failed += 1
                self.stderr.write(f"{book.code} ({number} of {len(books)}): nothing was issued: {problem}")
                continue
            path = options["into"] / f"{done.report.number}.pdf"
            writing.write(path, queries.pdf(done.report))
            state = "issued" if done.created else "issued before, nothing has changed"
            self.stderr.write(f"{book.code} ({number} of {len(books)}): revision {done.report.revision}, {state}")
            self.stdout.write(str(path))
        if failed:
            raise CommandError(f"{failed} of {len(books)} works: nothing was issued, for the reasons above")
