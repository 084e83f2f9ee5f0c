"""What was due and has not come."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from plant.deviations import findings
from plant.deviations.evidence import Day
from plant.deviations.findings import Finding
from plant.deviations.judging.values import own_meters
from plant.deviations.rules import lateness
from plant.works.described import Limit
from plant.works.stated import NotStated

NOT_STATED = "reason not stated"


@dataclass(frozen=True)
class Due:
    """One value that is due at a site; ``parameters`` are those of which any one answers."""

    site: str
    parameters: tuple[str, ...]
    due: str | Sequence[str]

    @property
    def parameter(self) -> str:
        return self.parameters[0]


def missing(day: Day, limit: Limit, ref: str) -> Iterator[Finding]:
    """Slots of this day that ended more than the stated hours ago with nothing taken in them and no reason given: one
    finding for all lines of the limit's subject, since a round that nobody walked is one thing and not twenty.
    """
    hours = float(limit.keys.get("hours", 0.0))
    if day.of.began is None:
        return
    absent: list[tuple[Due, list[lateness.Slot]]] = []
    expected = 0
    for due in _due(day, limit):
        kind = day.stated.site_kind(due.site, day.moment) or limit.subject_kind
        if not day.all_day(kind, due.site) or not day.all_day(limit.subject_kind, limit.subject):
            continue
        slots = [slot for slot in _slots(day, due.due) if slot.start >= day.of.began]
        expected += len(slots)
        found = lateness.missing(slots, _taken(day, due, slots), hours=hours, until=day.of.now)
        if found:
            absent.append((due, found))
    if not absent:
        return
    one = absent[0][0] if len(absent) == 1 else None
    words = [
        f"{due.parameter.replace('_', ' ')} at {due.site} ({', '.join(slot.label for slot in found)})" for due, found in absent
    ]
    yield findings.of_limit(
        limit,
        ref,
        day.day,
        parameter=limit.parameter or (_only_parameter(day, limit) if one else ""),
        since=min(found[0].end for _, found in absent),
        value=f"{sum(len(found) for _, found in absent)} of {expected} missing",
        limit="due each " + _due_words(absent[0][0].due),
        sentence="not read: " + "; ".join(words),
    )


def _only_parameter(day: Day, limit: Limit) -> str:
    """The parameter where the subject has but one line; empty otherwise, so that an episode keeps its name."""
    lines = _due(day, limit)
    return lines[0].parameter if len(lines) == 1 else ""


def _due_words(due: str | Sequence[str]) -> str:
    return due if isinstance(due, str) else ", ".join(due)


def _taken(day: Day, due: Due, slots: list[lateness.Slot]) -> list[dt.datetime]:
    if not slots:
        return []
    back = max((day.start - min(slot.start for slot in slots)).days + 1, 0)
    return [
        point.at
        for name in due.parameters
        for point in day.points(due.site, name, days_back=back)
        if point.state != "not_taken" or point.note not in ("", NOT_STATED)
    ]


def _slots(day: Day, due: str | Sequence[str]) -> list[lateness.Slot]:
    calendar = day.of.calendar
    start, end = calendar.bounds(day.day)
    shifts = []
    for shift in day.stated.shifts(start):
        date = day.day if shift.starts >= calendar.day_starts else day.day + dt.timedelta(days=1)
        shifts.append((shift.name, dt.datetime.combine(date, shift.starts, calendar.zone).astimezone(dt.UTC)))
    starts = {}
    if due in ("week", "month"):
        starts = {earlier: calendar.start_of(earlier) for earlier in (day.day - dt.timedelta(days=n) for n in range(32))}
    return lateness.slots(due, day.day, start=start, end=end, shifts=shifts, start_of=starts)


def _due(day: Day, limit: Limit) -> list[Due]:
    """What a limit of kind missing speaks of: the round lines of its subject; without any round line at the works, levels
    or weights and totalisers, once per operating day.
    """
    lines = day.stated.round_lines(day.moment)
    sites = _sites(day, limit)
    if lines:
        found = [
            Due(line.site, (line.parameter,), line.due)
            for line in lines
            if line.site in sites and limit.parameter in ("", line.parameter)
        ]
        if found or limit.subject_kind != "sample_point":
            return found
    if limit.parameter:
        return [Due(limit.subject, (limit.parameter,), "day")]
    return [due for site in sites if (due := _usual(day, site)) is not None]


def _usual(day: Day, site: str) -> Due | None:
    kind = day.stated.site_kind(site, day.moment)
    if kind == "vessel":
        scale = day.stated.vessel(site, day.moment).on_scale
        return Due(site, ("weight", "container_change") if scale else ("level", "volume"), "day")
    if kind == "meter":
        return Due(site, ("totaliser", "volume"), "day")
    return None


def _sites(day: Day, limit: Limit) -> list[str]:
    """The sites whose readings a subject rests on; what points share is looked at once, with the first of them."""
    if limit.subject_kind != "dosing_point":
        return [limit.subject]
    try:
        point = day.stated.dosing_point(limit.subject, day.moment)
    except NotStated:
        return []
    sites = [point.code, *own_meters(day, point.code)]
    earlier: set[str] = set()
    for other in day.stated.dosing_points(day.moment):
        if other.code == point.code:
            break
        earlier.update(code for code in (other.before, other.sample_point) if code)
    sites += [code for code in (point.before, point.sample_point) if code and code not in earlier]
    return list(dict.fromkeys(sites))
