"""issue_report: writes a month's report as PDF, and its figures as CSV. Issued once; a second run writes the same bytes, unless
something has changed since: then it issues a revision that says what."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from django.core.management.base import CommandError, CommandParser

from plant.accounts.models import Person
from plant.reports import actions, content, facts, queries
from plant.reports.management import writing
from plant.reports.month import NoSuchMonth, gather
from plant.reports.pdf.document import Document
from plant.works import commands


class Command(commands.WorksCommand):
    help = "Issues a month's operating report, or with --draft only writes it down as it would print now."
    takes_now = True

    def add_arguments(self, parser: CommandParser) -> None:
        super().add_arguments(parser)
        parser.add_argument("--month", required=True, type=commands.month, metavar="YYYY-MM")
        parser.add_argument("--output", required=True, type=Path, metavar="FILE.pdf", help="where the PDF is written")
        parser.add_argument("--figures", type=Path, metavar="FILE.csv", help="where the same figures are written, one a row")
        parser.add_argument("--draft", action="store_true", help="issue nothing")
        parser.add_argument("--prepared-by", metavar="NAME", help="user name printed as preparing; no password is asked")
        parser.add_argument("--certified-by", metavar="NAME", help="user name printed as certifying; no password is asked")
        parser.add_argument("--reason", default="", help="why a revision is made")

    def run(self, asked: commands.Asked, **options: Any) -> None:
        year, month = options["month"]
        try:
            if options["draft"]:
                made = content.draft(gather(asked.book, year, month, now=asked.now))
                pdf, words = content.render(made), f"{made.number}: draft, not issued"
            else:
                made, pdf, words = self._issued(asked, year, month, options)
        except NoSuchMonth as problem:
            raise CommandError(str(problem)) from None
        writing.write(options["output"], pdf)
        if options["figures"] is not None:
            writing.write(options["figures"], facts.to_csv(made).encode())
        self.stderr.write(words)
        self.stdout.write(str(options["output"]))

    def _issued(self, asked: commands.Asked, year: int, month: int, options: dict[str, Any]) -> tuple[Document, bytes, str]:
        try:
            done = actions.issue_from_shell(
                book=asked.book,
                year=year,
                month=month,
                now=asked.now,
                prepared_by=_person(options["prepared_by"]),
                certified_by=_person(options["certified_by"]),
                reason=options["reason"],
            )
        except (actions.NotReady, actions.MayNotSign) as problem:
            raise CommandError(f"nothing was issued: {problem}") from None
        report = done.report
        state = "issued" if done.created else "issued before, nothing has changed"
        words = f"{report.number} revision {report.revision}: {state}; SHA-256 {report.pdf_hash}"
        return queries.document(report), queries.pdf(report), words


def _person(name: str | None) -> Person | None:
    if name is None:
        return None
    found = Person.objects.filter(username=name).first()
    if found is None:
        raise CommandError(f"there is nobody called {name!r}")
    return found
