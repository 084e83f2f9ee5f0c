"""Everything that the judgement of some days needs, fetched in a fixed number of queries, and cut at the moment up to
which a day may know.

Judging day D uses what happened up to the end of D. A day's dose whose closing boundary lies between two readings rests on
the later one, so it is known only with the day on which that was taken.
"""

from __future__ import annotations

import bisect
import datetime as dt
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from decimal import Decimal
from functools import cached_property

from plant import clock
from plant.deviations.rules.observed import Observed
from plant.dosing import queries as dosing
from plant.dosing.figures import DayDose, VesselStock
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.stock import queries as stock
from plant.stock.models import Delivery, Transfer
from plant.works.described import DosingPoint
from plant.works.stated import Stated

DOSE_DAYS = 60
"""How far back doses are looked at: the window of the drift test and what it takes to know a point's usual scatter."""
READING_DAYS = 35
"""How far back readings are looked at: a month to date, and what is usual."""
AFTER = dt.timedelta(hours=31)
COUNTERS = ("totaliser", "volume")
VESSEL_MARKS = ("level", "weight", "volume")


@dataclass
class Evidence:
    """Facts about days ``first`` to ``last``; ask it only through ``at(day)``, which cuts."""

    book: Book
    stated: Stated
    first: dt.date
    last: dt.date
    now: dt.datetime
    calendar: clock.Calendar
    points: dict[tuple[str, str], list[Point]]
    doses: list[DayDose]
    deliveries: list[Delivery]
    began: dt.datetime | None
    known: int | None = None
    _stock: dict[dt.datetime, list[VesselStock]] = field(default_factory=dict)
    _series: dict[tuple[str, str], list[Point]] = field(default_factory=dict)

    def day(self, day: dt.date, until: dt.datetime | None = None) -> Day:
        """What may be known on the day, or by an earlier moment of it."""
        start, end = self.calendar.bounds(day)
        return Day(self, day, start, min(end, until or self.now))

    @cached_property
    def known_at(self) -> dict[tuple[str, dt.date], dt.datetime | None]:
        """When each dosing point's day was known: at the last of the readings that close it."""
        out: dict[tuple[str, dt.date], dt.datetime | None] = {}
        for row in self.doses:
            out[row.dosing_point, row.day] = None
            if row.used_mg_l.value is None:
                continue
            end = self.calendar.bounds(row.day)[1]
            point = self._dosing_point(row.dosing_point, end)
            if point is not None:
                out[row.dosing_point, row.day] = self._closed(point, end)
        return out

    def _dosing_point(self, code: str, end: dt.datetime) -> DosingPoint | None:
        at = end - dt.timedelta(microseconds=1)
        return next((point for point in self.stated.dosing_points(at) if point.code == code), None)

    def _closed(self, point: DosingPoint, end: dt.datetime) -> dt.datetime | None:
        sources: list[tuple[str, tuple[str, ...]]] = (
            [(point.feed_meter, COUNTERS)] if point.feed_meter else [(code, VESSEL_MARKS) for code in point.vessels]
        )
        sources.append((point.meter, COUNTERS))
        closing: list[dt.datetime] = []
        for site, parameters in sources:
            after = [at for at in (self._next(site, name, end) for name in parameters) if at is not None]
            if not after:
                return None
            closing.append(min(after))
        return max(closing)

    def _next(self, site: str | None, parameter: str, end: dt.datetime) -> dt.datetime | None:
        """When the first usable reading at or after ``end`` was taken; a date's volume closes its own day."""
        found = self.points.get((site or "", parameter), [])
        index = bisect.bisect_left(found, end, key=lambda point: point.at)
        if index and found[index - 1].date_only:
            return end
        return next((point.at for point in found[index:] if point.usable), None)

    @cached_property
    def transfers(self) -> list[Transfer]:
        """Transfers of the days at hand."""
        start, end = self.calendar.span(self.first, self.last)
        return stock.transfers(self.book, start=start, end=end, known=self.known)

    def stock_at(self, at: dt.datetime) -> list[VesselStock]:
        """All vessels at a moment; those of the ends of all days at hand come from one reckoning."""
        if at not in self._stock:
            ends = [self.day(day).until for day in clock.days(self.first, self.last)]
            moments = [end for end in ends if end not in self._stock] if at in ends else [at]
            self._stock |= dosing.stocks(self.book, moments, known=self.known, stated=self.stated)
        return self._stock[at]

    def far_back(self, site: str, parameter: str, start: dt.datetime, end: dt.datetime) -> list[Point]:
        """One series over a longer time than the rest, from a query of its own, kept."""
        if (site, parameter) not in self._series:
            first = start - dt.timedelta(days=31 * 2)
            last = self.calendar.bounds(self.last)[1]
            self._series[site, parameter] = readings.series(self.book, site, parameter, start=first, end=last, known=self.known)
        return [point for point in self._series[site, parameter] if start <= point.at < end]


def gather(
    book: Book,
    stated: Stated,
    first: dt.date,
    last: dt.date,
    *,
    now: dt.datetime,
    known: int | None = None,
    with_doses: bool = True,
) -> Evidence:
    """Fetches what judging the days first to last needs. Raises NotStated for an empty works.

    ``with_doses`` False leaves doses out, which cost most, where only limits on readings are asked about.
    """
    calendar = stated.calendar(now)
    start = calendar.start_of(first - dt.timedelta(days=READING_DAYS))
    end = calendar.bounds(last)[1]
    began = readings.first_taken_at(book, known=known)
    doses: list[DayDose] = []
    if with_doses and began is not None and any(True for _ in stated.subjects("dosing_point")):
        back = max(first - dt.timedelta(days=DOSE_DAYS), calendar.day_of(began))
        if back <= last:
            doses = dosing.comparison(book, back, last, known=known, stated=stated)
            start = min(start, calendar.start_of(back)) if _closes_late(doses) else start
    found = readings.points(book, start=start, end=end + AFTER, known=known)
    return Evidence(
        book,
        stated,
        first,
        last,
        now,
        calendar,
        readings.by_series(found),
        doses,
        stock.deliveries(book, start=start, end=end, known=known),
        began,
        known,
    )


def _closes_late(doses: Iterable[DayDose]) -> bool:
    return any(row.used_mg_l.value is not None for row in doses)


@dataclass(frozen=True)
class Day:
    """One operating day as it may be known at ``until``: its end, or now while it is still running."""

    of: Evidence
    day: dt.date
    start: dt.datetime
    until: dt.datetime

    @property
    def moment(self) -> dt.datetime:
        """The last instant that belongs to the day: what is in force then holds for it."""
        return max(self.start, self.until - dt.timedelta(microseconds=1))

    @property
    def stated(self) -> Stated:
        return self.of.stated

    @property
    def over(self) -> bool:
        """Whether the day has ended."""
        return self.until == self.of.calendar.bounds(self.day)[1]

    def points(self, site: str, parameter: str, *, days_back: int = 0) -> list[Point]:
        """Readings of the day, and of so many days before it, up to ``until``."""
        start = self.start if not days_back else self.of.calendar.start_of(self.day - dt.timedelta(days=days_back))
        found = self.of.points.get((site, parameter), [])
        low = bisect.bisect_left(found, start, key=lambda point: point.at)
        high = bisect.bisect_left(found, self.until, key=lambda point: point.at)
        return found[low:high]

    def all_points(self) -> Iterator[Point]:
        """Every reading of the day."""
        for site, parameter in self.of.points:
            yield from self.points(site, parameter)

    def rows(self, dosing_point: str) -> list[DayDose]:
        """The point's days, known or not, up to the newest that may be known now."""
        known = self.of.known_at
        out = []
        for row in self.of.doses:
            if row.dosing_point != dosing_point or row.day > self.day:
                continue
            closed = known[row.dosing_point, row.day]
            if closed is None or closed <= self.until:
                out.append(row)
        while out and out[-1].used_mg_l.value is None:
            out.pop()
        return out

    def newly_known(self, row: DayDose) -> bool:
        """Whether a row became known within this day."""
        closed = self.of.known_at[row.dosing_point, row.day]
        # What is known at the very start of this day closed the day before.
        return closed is not None and closed <= self.until and (closed > self.start or self.day == row.day)

    def in_service(self, kind: str, code: str) -> bool:
        """Whether the works and the subject were in service at any time of the day up to ``until``."""
        works = self.stated.works(self.moment).code
        subjects = [("works", works)] + ([(kind, code)] if kind in ("vessel", "dosing_point") else [])
        return all(self._at_all(f"{name}:{subject}") for name, subject in subjects)

    def _at_all(self, subject: str) -> bool:
        kind, _, code = subject.partition(":")
        if self.stated.state(kind, code, self.start) == "in_service":
            return True
        changes = [item for item in self.stated.history("state", subject) if self.start < item.effective_from < self.until]
        return any(item.withdrawn or item.value.get("is") == "in_service" for item in changes)

    def all_day(self, kind: str, code: str) -> bool:
        """Whether subject and works were in service the whole day up to ``until``: only then is use expected."""
        works = self.stated.works(self.moment).code
        for name, subject in (("works", works), (kind, code)):
            if self.stated.state(name, subject, self.start) != "in_service":
                return False
            changes = self.stated.history("state", f"{name}:{subject}")
            if any(
                self.start < item.effective_from < self.until and not item.withdrawn and item.value.get("is") != "in_service"
                for item in changes
            ):
                return False
        return True


def observed(points: Iterable[Point], statistic: str | None = None) -> list[Observed]:
    """Points as limits see them: numbers only, doubtful ones too, not what was set aside. A mean of the day is left out
    where single values are asked for.
    """
    out = []
    for point in points:
        value: Decimal | None = point.decimal
        if value is None or point.settled == "set_aside":
            continue
        if statistic is None and point.statistic == "day_mean":
            continue
        if statistic is not None and point.statistic != statistic:
            continue
        out.append(Observed(point.at, value, point.qualifier, point.ref))
    return out
