"""What needs someone: open deviations as the board lists them, worst first, many from one cause as one."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, replace

from plant import clock
from plant.board import shown
from plant.deviations.queries import WORST_FIRST, DeviationView
from plant.deviations.together import together

AS_ONE = ("missing", "suspicious_reading")
"""Kinds of which many at once have one cause (a round not walked, a file of bad values)."""

SPEAK_FOR_THEMSELVES = ("drift", "dose_vs_design", "dose_vs_need", "suspicious_reading", "stock_loss")

KINDS = {
    "bound": "outside its limit",
    "held_below": "too low for too long",
    "held_above": "too high for too long",
    "share_of_month": "too many of the month outside",
    "running_mean": "running mean outside",
    "rate_of_change": "changing too fast",
    "stuck": "not moving",
    "missing": "missing",
    "dose_vs_design": "dose away from design",
    "dose_vs_need": "dose away from need",
    "certified_maximum": "above the certified maximum",
    "drift": "dose drifting",
    "stock_loss": "stock not explained",
    "days_of_supply": "running out",
    "holding": "more held than stated",
    "lot_age": "lot too old",
    "strength_low": "weaker than its certificate",
    "inactivation_ratio": "inactivation too low",
    "suspicious_reading": "a doubtful reading",
}
CAUSES = {
    "feeder_drift": "the feeder is drifting",
    "weak_product": "the product is weak",
    "leak": "something leaks",
    "raw_water_change": "the raw water has changed",
    "wrong_reading": "a reading is wrong",
    "stuck_sensor": "a sensor is stuck",
    "meter_error": "the flow meter is wrong",
    "unbooked_delivery": "a delivery was not booked",
    "missing_readings": "readings are missing",
    "vessel_empty": "the vessel is empty",
    "aged_stock": "the stock is old",
    "stale_design": "the design dose is out of date",
    "process_change": "the process was changed",
    "unknown": "not known",
}


@dataclass(frozen=True)
class Thing:
    """One line of the list. ``telling`` says who must be told by when; ``waits``: a correction needs a second person."""

    level: str
    title: str
    found: str
    since: str
    who: str
    cause: str
    path: str
    parts: tuple[str, ...] = ()
    telling: str = ""
    waits: bool = False
    call: str = ""


def worst(levels: Iterable[str]) -> str:
    """The worst of some levels; empty for none."""
    return min(levels, key=lambda level: WORST_FIRST.get(level, 9), default="")


def listed(
    views: Iterable[DeviationView],
    *,
    code: str,
    now: dt.datetime,
    calendar: clock.Calendar,
    names: Mapping[str, str],
    labels: Mapping[str, str],
    hangs_on: Mapping[str, tuple[str, str]] | None = None,
    call: Callable[[DeviationView], str] = lambda _: "",
) -> list[Thing]:
    """Open deviations, worst and oldest first. The likeliest cause stands there in words; how likely it is does not.

    ``hangs_on`` (deviations.together.chains) lets what one cause explains stand as one.
    """
    ordered = sorted(views, key=lambda view: (WORST_FIRST.get(view.level, 9), view.since, view.ref))
    things: list[Thing] = []
    grouped: dict[tuple[str, str], list[DeviationView]] = {}
    for view in ordered:
        if view.kind in AS_ONE:
            grouped.setdefault((view.kind, view.level), []).append(view)
    for group in together(ordered, hangs_on or {}):
        view = group[0]
        many = grouped.get((view.kind, view.level), group)
        if len(many) == 1:
            things.append(replace(_one(view, code, now, calendar, names, labels), call=call(view)))
        elif view is many[0]:
            first = next((said for one in many if (said := call(one))), "")
            things.append(replace(_as_one(many, code, now, calendar, names, labels), call=first))
    return things


def subject_words(view: DeviationView, names: Mapping[str, str], labels: Mapping[str, str]) -> str:
    """What it is about: the parameter and the place, by their names."""
    place = names.get(view.subject, view.subject)
    parameter = labels.get(view.parameter, view.parameter.replace("_", " ")) if view.parameter else ""
    return f"{parameter}, {place}" if parameter and place else parameter or place


def _one(
    view: DeviationView,
    code: str,
    now: dt.datetime,
    calendar: clock.Calendar,
    names: Mapping[str, str],
    labels: Mapping[str, str],
) -> Thing:
    likely = [CAUSES.get(cause, cause.replace("_", " ")) for cause in view.likely_causes if cause != "unknown"]
    return Thing(
        level=view.level,
        title=f"{subject_words(view, names, labels)}: {KINDS.get(view.kind, view.kind.replace('_', ' '))}",
        found=_found(view),
        since=shown.moment(view.since, now, calendar),
        who=_who(view),
        cause=likely[0] if likely else "",
        path=f"/w/{code}/deviations/{view.ref}/",
        telling=_telling([view], now, calendar),
        waits=view.awaiting_approval,
    )


def _found(view: DeviationView) -> str:
    """What was found, without the statistics of it, which stand on the deviation's own page."""
    sentence = view.sentence.partition("; statistic")[0]
    if sentence and view.kind in SPEAK_FOR_THEMSELVES:
        return sentence
    measured = ", limit ".join(part for part in (view.value, view.limit) if part)
    return "; ".join(part for part in (measured, sentence) if part)


def _as_one(
    many: list[DeviationView],
    code: str,
    now: dt.datetime,
    calendar: clock.Calendar,
    names: Mapping[str, str],
    labels: Mapping[str, str],
) -> Thing:
    first = min(many, key=lambda view: view.since)
    cause = CAUSES.get(many[0].likely_causes[0], "") if first.kind not in AS_ONE and many[0].likely_causes else ""
    words = {"missing": "values are missing", "suspicious_reading": "doubtful readings"}.get(first.kind, "signs of one cause")
    return Thing(
        level=many[0].level,
        title=f"{len(many)} {words}",
        found="",
        since=shown.moment(first.since, now, calendar),
        who="nobody yet" if any(view.state == "raised" for view in many) else _who(first),
        cause=cause,
        path=f"/w/{code}/deviations/",
        parts=tuple(": ".join(part for part in (subject_words(view, names, labels), view.sentence) if part) for view in many),
        telling=_telling(many, now, calendar),
        waits=any(view.awaiting_approval for view in many),
    )


def _who(view: DeviationView) -> str:
    """Who has it: whoever took it on, or nobody yet."""
    if view.state == "raised":
        return "nobody yet"
    return view.acknowledged_by or next((event.by for event in reversed(view.events) if event.by), "nobody yet")


def _telling(views: Iterable[DeviationView], now: dt.datetime, calendar: clock.Calendar) -> str:
    """The telling that is due first."""
    owed = sorted((one for view in views for one in view.tellings_owed), key=lambda one: one.due)
    if not owed:
        return ""
    first = owed[0]
    telephone = f", telephone {first.telephone}" if first.telephone else ""
    late = " (overdue)" if first.due < now else ""
    return f"Tell {first.who} by {shown.moment(first.due, now, calendar)}{late}{telephone}."


def sentence(things: list[Thing], settled_at: str) -> str:
    """The one sentence that answers "is anything wrong?"."""
    if not things:
        return f"Nothing needs anyone since {settled_at}." if settled_at else "Nothing needs anyone."
    if len(things) == 1:
        return "1 thing needs someone."
    return f"{len(things)} things need someone."
