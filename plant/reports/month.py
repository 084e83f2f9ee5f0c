"""One month of a works, gathered once: everything the sections of its report are made from, as known at one seq."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from plant import clock
from plant.dosing import queries as dosing
from plant.dosing.figures import DayDose, PeriodDose, ProductReconciliation, VesselStock
from plant.ledger.models import Book, Entry
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.reports.measures import Measures
from plant.works import described, parameters
from plant.works import queries as works
from plant.works.stated import NotStated, Stated

SEVEN_DAYS = 7


class NoSuchMonth(ValueError):
    """Nothing can be reported of this month: it has not begun, or nothing was stated of the works by then."""


@dataclass(frozen=True)
class Month:
    """A month of operating days, half-open [start, end). ``at`` is the last instant of it: what is in force then is printed.

    ``known`` is the seq the report stands at; ``ask`` is what the rooms below are asked with (None where nothing has been
    recorded since, so that kept figures may be used).
    """

    book: Book
    year: int
    month: int
    known: int
    ask: int | None
    now: dt.datetime
    stated: Stated
    calendar: clock.Calendar
    first: dt.date
    last: dt.date
    start: dt.datetime
    end: dt.datetime
    works: described.Works
    explanations: dict[str, dict[str, str]] = field(default_factory=dict)
    _counts: dict[str, list[Point]] = field(default_factory=dict, repr=False, compare=False)

    @property
    def at(self) -> dt.datetime:
        return self.end - dt.timedelta(microseconds=1)

    @property
    def code(self) -> str:
        return f"{self.year:04d}-{self.month:02d}"

    @property
    def words(self) -> str:
        return f"{self.first:%B} {self.year}"

    @property
    def over(self) -> bool:
        """Whether the last operating day has ended."""
        return self.now >= self.end

    @cached_property
    def days(self) -> list[dt.date]:
        return clock.days(self.first, self.last)

    @cached_property
    def measures(self) -> Measures:
        return Measures(self.works.units)

    @cached_property
    def works_value(self) -> dict[str, Any]:
        """The works' own block, with what only paper needs (address, owner, censored_in_means)."""
        for _, value in self.stated.in_force("works", self.at):
            return value
        return {}

    @cached_property
    def form(self) -> dict[str, Any]:
        """What is stated of the regulator's form; empty where nothing is."""
        return self.stated.value("report", "form", self.at) or {}

    @cached_property
    def year_first(self) -> dt.date:
        """The first day of the year with anything on record, so that the year to date says what it covers."""
        january = dt.date(self.year, 1, 1)
        start = self.calendar.start_of(january)
        earliest = readings.models.Reading.objects.filter(book=self.book, taken_at__gte=start, taken_at__lt=self.end)
        at = earliest.order_by("taken_at").values_list("taken_at", flat=True).first()
        return january if at is None else max(january, self.calendar.day_of(at))

    @cached_property
    def _doses(self) -> list[DayDose]:
        reach = min(self.first - dt.timedelta(days=SEVEN_DAYS - 1), self.year_first)
        return dosing.comparison(self.book, reach, self.last, known=self.ask)

    @cached_property
    def doses(self) -> list[DayDose]:
        """The month's comparison: the same rows as on the board."""
        return [row for row in self._doses if row.day >= self.first]

    @cached_property
    def doses_with_week_before(self) -> list[DayDose]:
        reach = self.first - dt.timedelta(days=SEVEN_DAYS - 1)
        return [row for row in self._doses if row.day >= reach]

    @cached_property
    def periods(self) -> list[PeriodDose]:
        return dosing.period(self.doses)

    @cached_property
    def year_to_date(self) -> dict[str, PeriodDose]:
        return {row.dosing_point: row for row in dosing.period([row for row in self._doses if row.day >= self.year_first])}

    @cached_property
    def reconciliation(self) -> list[ProductReconciliation]:
        return dosing.reconciliation(self.book, self.first, self.last, known=self.ask)

    @cached_property
    def stock(self) -> list[VesselStock]:
        return dosing.stock(self.book, self.at, known=self.ask)

    @cached_property
    def points(self) -> list[Point]:
        """All readings of the month, by time."""
        return readings.points(self.book, start=self.start, end=self.end, known=self.ask)

    @cached_property
    def series(self) -> dict[tuple[str, str], list[Point]]:
        return readings.by_series(self.points)

    def counts_with_day_before(self, meter: str) -> list[Point]:
        """A meter's totaliser readings of the month and of the day before it."""
        if meter not in self._counts:
            start = self.calendar.start_of(self.first - dt.timedelta(days=1))
            self._counts[meter] = readings.series(self.book, meter, "totaliser", start=start, end=self.end, known=self.ask)
        return self._counts[meter]

    @cached_property
    def parameters(self) -> dict[str, parameters.Parameter]:
        return parameters.known(self.stated, self.at)

    @cached_property
    def recorded(self) -> dict[int, dt.datetime]:
        """When each entry that holds one of the month's readings was recorded."""
        seqs = {int(point.ref.partition(".")[0]) for point in self.points}
        if not seqs:
            return {}
        rows = Entry.objects.filter(book=self.book, seq__gte=min(seqs), seq__lte=max(seqs))
        return {seq: at for seq, at in rows.values_list("seq", "recorded_at") if seq in seqs}

    @cached_property
    def points_by_code(self) -> dict[str, described.DosingPoint]:
        return {point.code: point for point in self.stated.dosing_points(self.at)}

    @cached_property
    def products(self) -> dict[str, described.Product]:
        return {product.code: product for product in self.stated.products(self.at)}

    def local(self, moment: dt.datetime) -> str:
        """An instant on the works' clock, as printed."""
        return f"{self.calendar.local(moment):%Y-%m-%d %H:%M}"

    def day_words(self, day: dt.date) -> str:
        return f"{day.day:02d} {day:%b}"


def gather(
    book: Book,
    year: int,
    month: int,
    *,
    now: dt.datetime,
    known: int | None = None,
    unchanged: bool = False,
    explanations: dict[str, dict[str, str]] | None = None,
) -> Month:
    """The month as known at a seq (None: the head of the book). ``unchanged`` says that nothing recorded since that seq
    touches it, so that kept figures may be used. Raises NoSuchMonth.
    """
    book.refresh_from_db()
    seq = book.head_seq if known is None else known
    ask = None if seq >= book.head_seq or unchanged else seq
    stated = works.stated(book, known=seq)
    first, last = clock.month_days(year, month)
    try:
        # Two steps, because the zone that says when the month ends is itself stated.
        rough = dt.datetime.combine(last, dt.time(12), dt.UTC)
        calendar = stated.calendar(rough)
        start, end = calendar.span(first, last)
        here = stated.works(end - dt.timedelta(microseconds=1))
    except NotStated as problem:
        raise NoSuchMonth(f"{first:%B %Y}: {problem}") from None
    if now < start:
        raise NoSuchMonth(f"{first:%B %Y} has not begun")
    return Month(book, year, month, seq, ask, now, stated, calendar, first, last, start, end, here, explanations or {})
