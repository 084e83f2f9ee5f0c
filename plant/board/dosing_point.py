"""One dosing point: the sentence of the three answers, what happened there, and the rows of its table."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

from plant import clock, scene
from plant.board import shown, things
from plant.deviations import queries as deviations
from plant.dosing.figures import DayDose
from plant.ledger.models import Book
from plant.scene import numbers, run
from plant.stock import queries as stock
from plant.works import described
from plant.works.stated import Stated

CHANGES = {
    "design_dose": "design dose",
    "dosing_point": "dosing point",
    "state": "state",
    "vessel": "vessel",
    "product": "product",
    "limit": "limit",
}


@dataclass(frozen=True)
class Event:
    """Something that bears on the dose."""

    at: dt.datetime
    when: str
    kind: str
    words: str
    role: str
    path: str = ""


def answers(row: DayDose) -> str:
    """Used, designed and needed in one sentence."""
    day = f"On {row.day.day} {row.day:%B}"
    unit = row.used_mg_l.unit or "mg/L"
    if not row.expected:
        return f"{day} this point was not in service, so nothing was expected of it."
    used, design, need = row.used_mg_l.value, row.design_mg_l.value, row.need_mg_l.value
    if used is None:
        why = "; ".join(row.used_mg_l.remarks or row.remarks)
        first = f"{day} the dose used is not known" + (f" ({why})" if why else "")
    else:
        first = f"{day} {numbers.tidy(used)} {unit} was used"
        if design:
            first += f", {_beside(used, design, 'the design')} {numbers.tidy(design)}"
    parts = [first]
    if used is None and design is not None:
        parts.append(f"the design is {numbers.tidy(design)} {unit}")
    if need is None:
        why = "; ".join(row.need_mg_l.remarks)
        parts.append("what the chemistry asks for is not known" + (f" ({why})" if why else ""))
    else:
        parts.append(f"the chemistry asks for {numbers.tidy(need)}")
    words = "; ".join(parts) + "."
    if row.weak:
        words += " The day’s use is under 5 % of the vessel, so this figure is weak: judge seven days."
    return words


def _beside(used: float, other: float, name: str) -> str:
    off = 100 * (used / other - 1)
    if abs(off) < 1:
        return f"as {name} of"
    return f"{abs(off):.0f} % {'above' if off > 0 else 'below'} {name} of"


def events(
    book: Book,
    stated: Stated,
    point: described.DosingPoint,
    rows: Sequence[DayDose],
    *,
    now: dt.datetime,
    calendar: clock.Calendar,
    code: str,
) -> list[Event]:
    """Deliveries, changes of setting, corrected days and deviations between the first and the last row, newest first."""
    start, end = calendar.span(rows[0].day, rows[-1].day)
    end = max(end, now)
    out = [*_deliveries(book, point, start, end, now, calendar), *_changes(stated, point, start, end, now, calendar, code)]
    out += _deviations(book, point, rows, now, calendar, code)
    for row in rows:
        if row.corrected:
            at = calendar.start_of(row.day) + dt.timedelta(hours=12)
            words = "a reading behind this day was corrected"
            out.append(Event(at, shown.day(row.day, now, calendar), "correction", words, "need", ""))
    return sorted(out, key=lambda one: one.at, reverse=True)


def _deliveries(
    book: Book, point: described.DosingPoint, start: dt.datetime, end: dt.datetime, now: dt.datetime, calendar: clock.Calendar
) -> list[Event]:
    return [
        Event(
            one.taken_at,
            shown.moment(one.taken_at, now, calendar),
            "delivery",
            f"{numbers.tidy(one.quantity)} {one.unit} into {one.vessel}" + (f", lot {one.lot}" if one.lot else ""),
            "settled",
        )
        for one in stock.deliveries(book, start=start, end=end, vessels=point.vessels)
    ]


def _changes(
    stated: Stated,
    point: described.DosingPoint,
    start: dt.datetime,
    end: dt.datetime,
    now: dt.datetime,
    calendar: clock.Calendar,
    code: str,
) -> list[Event]:
    subjects = {
        "design_dose": {point.code},
        "dosing_point": {point.code},
        "state": {f"dosing_point:{point.code}", *(f"vessel:{vessel}" for vessel in point.vessels)},
        "vessel": set(point.vessels),
        "product": {point.product},
    }
    out = []
    for saying in stated.changes(start, end):
        about = saying.kind == "limit" and saying.value.get("dosing_point") == point.code
        if not about and saying.subject not in subjects.get(saying.kind, set()):
            continue
        words = f"{CHANGES[saying.kind]} {saying.subject}"
        if saying.kind == "design_dose":
            words = "design dose withdrawn" if saying.withdrawn else f"design dose {saying.value['dose_mg_per_L']:g} mg/L"
        elif saying.kind == "state":
            words = f"{saying.subject.partition(':')[2]} {str(saying.value.get('is', '')).replace('_', ' ')}"
        reason = f": {saying.reason}" if saying.reason else ""
        when = shown.moment(saying.effective_from, now, calendar)
        out.append(Event(saying.effective_from, when, "setting", words + reason, "water", f"/w/{code}/settings/"))
    return out


def _deviations(
    book: Book,
    point: described.DosingPoint,
    rows: Sequence[DayDose],
    now: dt.datetime,
    calendar: clock.Calendar,
    code: str,
) -> list[Event]:
    places = {point.code, *point.vessels}
    return [
        Event(
            view.since,
            shown.moment(view.since, now, calendar),
            "deviation",
            f"{view.level}: {things.KINDS.get(view.kind, view.kind.replace('_', ' '))}, {view.state.replace('_', ' ')}",
            view.level if view.level in scene.ROLES else "quiet",
            f"/w/{code}/deviations/{view.ref}/",
        )
        for view in deviations.between(book, rows[0].day, max(rows[-1].day, calendar.day_of(now)))
        if view.subject in places
    ]


def flags(found: Sequence[Event], calendar: clock.Calendar, anchor: str) -> list[run.Flag]:
    """The events as flags on the time axis; one that opens nothing of its own leads to the list below."""
    return [
        run.Flag(calendar.local(one.at), f"{one.kind}: {one.words}", one.role, one.path or anchor)
        for one in sorted(found, key=lambda one: one.at)
    ]


def levels_by_day(book: Book, dosing_point: str, rows: Sequence[DayDose]) -> dict[dt.date, str]:
    """The worst deviation of the dose raised for each day."""
    out: dict[dt.date, str] = {}
    for view in deviations.between(book, rows[0].day, rows[-1].day):
        if view.subject == dosing_point:
            before = [out[view.raised_for]] if view.raised_for in out else []
            out[view.raised_for] = things.worst([view.level, *before])
    return out
