"""The base of the commands that ask or tell one works something.

A subclass states what it takes and writes ``run(asked, **options)``::

    class Command(commands.WorksCommand):
        takes_known_at = True          # a question: --known-at
        takes_now = True               # it writes: --now
        takes_days = True              # --from and --to, operating days

        def run(self, asked: commands.Asked, **options): ...

``asked`` carries the book, the moment, the seq as known at, what is stated, the calendar and the days. Times
without an offset are the works' local time. Whatever is wrong with what was typed ends in a CommandError of
one sentence.
"""

from __future__ import annotations

import abc
import argparse
import csv
import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from django.conf import settings
from django.core.management.base import BaseCommand, CommandError, CommandParser

from plant import clock
from plant.ledger import actions as ledger
from plant.ledger import queries as books
from plant.ledger.models import Book
from plant.works import queries
from plant.works.stated import NotStated, Stated


@dataclass(frozen=True)
class Asked:
    """What a command was asked. ``known`` is a seq (None: now); ``first``/``last`` only where it takes days.

    ``moment`` is when the answer stands: ``--known-at`` where it was given, otherwise ``now``.
    """

    book: Book
    now: dt.datetime
    known: int | None
    moment: dt.datetime
    stated: Stated
    calendar: clock.Calendar
    first: dt.date
    last: dt.date

    @property
    def code(self) -> str:
        return self.book.code


def moment(text: str, calendar: clock.Calendar | None, *, option: str) -> dt.datetime:
    """The instant (UTC) an ISO 8601 text names; without an offset it is local time of the calendar.
    CommandError.
    """
    try:
        found = dt.datetime.fromisoformat(text)
    except ValueError:
        raise CommandError(
            f"{option} {text!r} is not a time: expected ISO 8601, e.g. 2026-03-01T07:00 or 2026-03-01T06:00Z"
        ) from None
    if found.tzinfo is not None:
        return found.astimezone(dt.UTC)
    if calendar is None:
        raise CommandError(f"{option} {text!r} needs an offset here, e.g. {text}Z")
    try:
        return calendar.instant(found)
    except clock.LocalTimeError as problem:
        raise CommandError(f"{option}: {problem}") from None


def date(text: str) -> dt.date:
    """An argparse type: YYYY-MM-DD."""
    try:
        return dt.date.fromisoformat(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is not a date: expected YYYY-MM-DD") from None


def month(text: str) -> tuple[int, int]:
    """An argparse type: YYYY-MM as (year, month)."""
    try:
        found = dt.datetime.strptime(text, "%Y-%m")  # noqa: DTZ007  # only year and month are read from it
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is not a month: expected YYYY-MM") from None
    return found.year, found.month


def add_now(parser: CommandParser) -> None:
    """The option --now."""
    parser.add_argument("--now", metavar="ISO", help="act as if it were this moment; only where WEIRBOOK_ALLOW_NOW=1")


def set_now(text: str | None, calendar: clock.Calendar | None, book: Book | None) -> dt.datetime:
    """The moment a command acts at: the clock's, or the one of --now where that is allowed. CommandError."""
    if text is None:
        return clock.now()
    if not settings.WEIRBOOK_ALLOW_NOW:
        raise CommandError("--now is refused: it is for replaying a history, and only where WEIRBOOK_ALLOW_NOW=1 is set")
    at = moment(text, calendar, option="--now")
    if book is not None:
        try:
            ledger.refuse_earlier(book, at)
        except ledger.EarlierThanBook as problem:
            raise CommandError(f"--now is refused: {problem}") from None
    return at


def find_book(code: str) -> Book:
    """The book of a works. CommandError naming the codes there are."""
    try:
        return books.book(code)
    except books.NoSuchBook as problem:
        codes = ", ".join(Book.objects.order_by("code").values_list("code", flat=True)[:20])
        raise CommandError(f"{problem}; there is {codes or 'none yet: load a works file first'}") from None


class WorksCommand(BaseCommand, abc.ABC):
    """Base of a command about one works; see the module's docstring."""

    takes_known_at = False
    takes_now = False
    takes_days = False

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--works", required=True, metavar="CODE", help="the works' code")
        if self.takes_known_at:
            parser.add_argument("--known-at", metavar="ISO", help="answer as it stood at this moment")
        if self.takes_now:
            add_now(parser)
        if self.takes_days:
            parser.add_argument(
                "--from",
                dest="first",
                required=True,
                type=date,
                metavar="YYYY-MM-DD",
                help="first operating day",
            )
            parser.add_argument("--to", dest="last", required=True, type=date, metavar="YYYY-MM-DD", help="last operating day")

    def handle(self, *args: Any, **options: Any) -> None:
        book = find_book(options.pop("works"))
        current = queries.stated(book)
        here = _calendar(current, clock.now(), book)
        now = set_now(options.pop("now", None), here, book)
        known, when = None, now
        if (text := options.pop("known_at", None)) is not None:
            when = moment(text, here, option="--known-at")
            known = books.seq_known_at(book, when)
        stated = queries.stated(book, known=known)
        calendar = _calendar(stated, when, book)
        today = calendar.day_of(when)
        first, last = options.pop("first", today), options.pop("last", today)
        if first > last:
            raise CommandError(f"--from {first} lies after --to {last}")
        self.run(Asked(book, now, known, when, stated, calendar, first, last), **options)

    @abc.abstractmethod
    def run(self, asked: Asked, **options: Any) -> None:
        """Does the work; ``options`` are the subclass's own."""

    def write_csv(self, header: Sequence[str], rows: Iterable[Sequence[Any]]) -> None:
        """A CSV table to standard output; None is an empty cell."""
        writer = csv.writer(self.stdout, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(["" if cell is None else cell for cell in row] for row in rows)


def _calendar(stated: Stated, at: dt.datetime, book: Book) -> clock.Calendar:
    try:
        return stated.calendar(at)
    except NotStated:
        when = f"{at:%Y-%m-%d %H:%M} UTC"
        raise CommandError(f"nothing was stated of works {book.code} by {when}: load a works file first") from None
