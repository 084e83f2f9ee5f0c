"""What the board shows, gathered with few questions to the database whatever the works' age."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass

from plant.board import changed, line, missing, shown, things
from plant.deviations import queries as deviations
from plant.deviations import together
from plant.deviations.queries import DeviationView
from plant.dosing import queries as dosing
from plant.ledger.models import Book
from plant.notices import queries as notices
from plant.readings import queries as readings
from plant.works import access, parameters
from plant.works import queries as works
from plant.works.stated import NotStated, Stated

ENDS = ("closed", "corrected_away")
NEWEST_DAYS = 3
"""A value older than this is not "newest" any more: the line leaves it out, and what is due shows as missing."""


@dataclass(frozen=True)
class Board:
    """One screen that answers "is anything wrong?"."""

    sentence: str
    things: list[things.Thing]
    stops: list[line.Stop]
    missing: list[str]
    day: str
    date: str
    at: str
    empty: str = ""
    changed: tuple[changed.Change, ...] = ()


def names(stated: Stated, at: dt.datetime) -> dict[str, str]:
    """The name of every place and thing of a works, by code."""
    out: dict[str, str] = {}
    for found in (
        stated.sample_points(at),
        stated.meters(at),
        stated.vessels(at),
        stated.dosing_points(at),
        stated.products(at),
    ):
        out |= {item.code: item.name for item in found}
    return out


def board(at: access.At) -> Board:
    """The board of a works now."""
    stated, now = at.stated, at.now
    try:
        calendar = stated.calendar(now)
    except NotStated:
        return Board("Nothing is stated of this works yet.", [], [], [], "", "", "", empty="works")
    today = calendar.day_of(now)
    start = calendar.start_of(today - dt.timedelta(days=NEWEST_DAYS))
    points = readings.points(at.book, start=start, end=now + dt.timedelta(hours=1))
    yesterday = today - dt.timedelta(days=1)
    doses = dosing.comparison(at.book, yesterday, yesterday, stated=stated) if stated.dosing_points(now) else []
    open_now = deviations.open_ones(at.book)
    labels = {name: parameter.label for name, parameter in parameters.known(stated, now).items()}
    operator = at.member.role == "operator"
    called = names(stated, now)
    listed = things.listed(
        open_now,
        code=at.code,
        now=now,
        calendar=calendar,
        names=called,
        labels=labels,
        hangs_on=together.chains(stated, now),
        call=lambda view: notices.words(stated, calendar, view, now),
    )
    raised = {view.subject for view in open_now if view.kind == "missing"}
    absent = [one for one in missing.missing(stated, points, now) if one.site not in raised]
    return Board(
        sentence=things.sentence(listed, _settled_at(at, today) if not listed else ""),
        things=listed,
        stops=line.stops(
            stated,
            now=now,
            newest=_newest(points),
            doses=doses,
            levels=_levels(open_now),
            whisker=not operator,
            code=at.code,
        ),
        missing=[_missing_words(one, stated, now, labels) for one in absent],
        day=shown.day(yesterday, now, calendar),
        date=f"{calendar.local(now).day} {calendar.local(now):%B %Y}",
        at=f"{calendar.local(now):%H:%M}",
        empty="" if points or (doses and any(row.used_mg_l.known for row in doses)) else "readings",
        changed=tuple(changed.changed(at.book, now=now, calendar=calendar, names=called, labels=labels)),
    )


def _newest(points: Iterable[readings.Point]) -> dict[tuple[str, str], readings.Point]:
    """The last reading of each series that says something; a "not taken" does not hide the value before it."""
    out: dict[tuple[str, str], readings.Point] = {}
    for point in points:
        if point.state != "not_taken" and point.statistic == "reading" and point.settled != "set_aside":
            out[point.site, point.parameter] = point
    return out


def _levels(views: Iterable[DeviationView]) -> dict[tuple[str, str], str]:
    """The worst level that speaks of a place and parameter, and of the place at all; what is missing speaks of no value."""
    out: dict[tuple[str, str], str] = {}
    for view in views:
        if view.kind == "missing":
            continue
        for key in ((view.subject, view.parameter or ""), (view.subject, "")):
            out[key] = things.worst([view.level, *([out[key]] if key in out else [])])
    return out


def _missing_words(one: missing.Missing, stated: Stated, now: dt.datetime, labels: dict[str, str]) -> str:
    label = labels.get(one.parameter, one.parameter.replace("_", " "))
    local = stated.calendar(now).local(one.slot.start)
    slot = "" if one.slot.label in ("day", "week", "month") else f" {one.slot.label} shift"
    return f"{label} at {one.site} ({local.day} {local:%b}{slot})"


def _settled_at(at: access.At, today: dt.date) -> str:
    """When the last deviation of the last thirty days was closed or corrected away; empty where none was."""
    closed = [
        event.recorded_at
        for view in deviations.between(at.book, today - dt.timedelta(days=30), today)
        for event in view.events
        if event.kind in ENDS
    ]
    return shown.moment(max(closed), at.now, at.stated.calendar(at.now)) if closed else ""


@dataclass(frozen=True)
class WorksLine:
    """One works in the list of one's works."""

    code: str
    name: str
    role: str
    sentence: str
    level: str


def of_person(books: Iterable[Book], username: str, now: dt.datetime) -> list[WorksLine]:
    """Each of a person's works with its sentence, worst first."""
    out = []
    for book in books:
        stated = works.stated(book)
        member = access.member(stated, username, now)
        try:
            name = stated.works(now).name
        except NotStated:
            name = book.code
        open_now = deviations.open_ones(book)
        number = len(open_now)
        words = (
            "Nothing needs anyone."
            if not number
            else f"{shown.count(number, 'thing')} {'needs' if number == 1 else 'need'} someone."
        )
        out.append(
            WorksLine(book.code, name, member.role if member else "", words, things.worst(one.level for one in open_now))
        )
    return sorted(out, key=lambda one: (deviations.WORST_FIRST.get(one.level, 9), one.name))
