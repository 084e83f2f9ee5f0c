"""The round's page: what the last shift left open, then one line per value that is due, in walking order."""

from __future__ import annotations

import datetime as dt
from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from plant import clock
from plant.intake import definitions, ground, models, shifts
from plant.ledger.models import Book
from plant.readings import queries as readings
from plant.readings.queries import Point
from plant.works import parameters
from plant.works.described import RoundLine
from plant.works.stated import Stated

LOOK_BACK = dt.timedelta(days=35)
AHEAD = dt.timedelta(minutes=10)


@dataclass(frozen=True)
class Line:
    """One value to take: its names, what was last, what is usual, its rules, and what this shift has taken already."""

    key: str
    site: str
    site_name: str
    parameter: str
    label: str
    last: Point | None
    last_at: dt.datetime | None
    usual: str
    rules: dict[str, Any]
    taken: tuple[Point, ...]

    @property
    def answered(self) -> bool:
        return bool(self.taken)


@dataclass(frozen=True)
class Round:
    """All of it, for one shift of one works."""

    shift: shifts.Span
    before: shifts.Span
    lines: tuple[Line, ...]
    left_open: tuple[str, ...]
    said: models.HandOver | None
    closed: models.HandOver | None
    taken_over: models.TakeOver | None = None

    @property
    def due(self) -> int:
        return len(self.lines)

    @property
    def answered(self) -> int:
        return sum(line.answered for line in self.lines)


def walk(book: Book, stated: Stated, now: dt.datetime) -> Round:
    """The round that is on."""
    calendar = stated.calendar(now)
    shift, before = shifts.on_duty(stated, calendar, now)
    expected = shifts.expected(stated, now)
    known = parameters.known(stated, now)
    sites = names(stated, now)
    seen = _seen(book, expected, now)
    taken = {key: [point.at for point in points] for key, points in seen.items()}
    due = shifts.due_now(stated, calendar, expected, now)
    walked = tuple(
        _line(book, stated, calendar, line, seen, due, known[line.parameter], sites, now)
        for line in expected
        if line.parameter in known and line.code in due
    )
    open_lines = shifts.left_open(stated, calendar, expected, taken, before)
    return Round(
        shift,
        before,
        walked,
        tuple(
            f"{sites.get(line.site, line.site)}: {known[line.parameter].label}"
            for line in open_lines
            if line.parameter in known
        ),
        hand_over(book, before),
        hand_over(book, shift),
        taken_over(book, before),
    )


def names(stated: Stated, at: dt.datetime) -> dict[str, str]:
    """What each site is called."""
    return {code: str(value.get("name") or code) for kind in ground.SITE_KINDS for code, value in stated.in_force(kind, at)}


def hand_over(book: Book, span: shifts.Span) -> models.HandOver | None:
    """How a shift's round was closed, if it was; the last word counts."""
    rows = models.HandOver.objects.filter(book=book, starts_at=span.start).as_known()
    return rows.select_related("entry__recorded_by").order_by("-seq", "-line").first()


def taken_over(book: Book, span: shifts.Span) -> models.TakeOver | None:
    """Who took the works over from a shift, if somebody said so; the first word counts."""
    rows = models.TakeOver.objects.filter(book=book, from_starts_at=span.start).as_known()
    return rows.select_related("entry__recorded_by").order_by("seq", "line").first()


def rules_of(book: Book, stated: Stated, now: dt.datetime, site: str, parameter: str) -> dict[str, Any] | None:
    """The rules of one value, for the server's own look at it; None for what nobody knows."""
    known = parameters.known(stated, now).get(parameter)
    if known is None or stated.site_kind(site, now) is None:
        return None
    recent = readings.points(book, start=now - LOOK_BACK, end=now + AHEAD, sites=[site], parameters=[parameter])
    return definitions.definition(stated, now, site, parameter, recent, known=known)


def _seen(book: Book, lines: Sequence[RoundLine], now: dt.datetime) -> dict[tuple[str, str], list[Point]]:
    wanted = {(line.site, line.parameter) for line in lines}
    found = readings.points(
        book,
        start=now - LOOK_BACK,
        end=now + AHEAD,
        sites={site for site, _ in wanted} or [],
        parameters={parameter for _, parameter in wanted} | {"volume"},
    )
    out: dict[tuple[str, str], list[Point]] = defaultdict(list)
    for point in found:
        out[point.site, point.parameter].append(point)
        # Litres read off a sight tube answer the line that asks for the level.
        if point.parameter == "volume" and (point.site, "level") in wanted:
            out[point.site, "level"].append(point)
    return out


def _line(
    book: Book,
    stated: Stated,
    calendar: clock.Calendar,
    line: RoundLine,
    seen: Mapping[tuple[str, str], Sequence[Point]],
    due: Mapping[str, Any],
    known: parameters.Parameter,
    sites: Mapping[str, str],
    now: dt.datetime,
) -> Line:
    points = list(seen.get((line.site, line.parameter), ()))
    usable = [point for point in points if point.usable and point.statistic == "reading"]
    last = usable[-1] if usable else None
    if not points:
        last = readings.latest(book, line.site, line.parameter, before=now)
    slot = due[line.code]
    taken = tuple(point for point in points if slot.start <= point.at < slot.end and point.at <= now + AHEAD)
    own = [point for point in usable if point.parameter == line.parameter]
    low, high = definitions.usual_range([point for point in own if not point.qualifier], known)
    usual = ""
    if low is not None and high is not None and parameters.SAMPLE_POINT in known.sites:
        usual = f"{shown(low, known.decimals)} to {shown(high, known.decimals)}"
    return Line(
        f"{line.site}:{line.parameter}",
        line.site,
        sites.get(line.site, line.site),
        line.parameter,
        known.label,
        last,
        calendar.local(last.at).replace(tzinfo=None) if last else None,
        usual,
        definitions.definition(stated, now, line.site, line.parameter, own, known=known),
        taken,
    )


def shown(value: Any, decimals: int) -> str:
    """A number as a line shows it: its own digits, or the parameter's where it has more."""
    text = format(value, "f")
    return text if len(text.partition(".")[2]) <= decimals else f"{value:.{decimals}f}"
