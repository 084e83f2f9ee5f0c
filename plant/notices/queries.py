"""The call list of a works, and what it says of a deviation now."""

from __future__ import annotations

import datetime as dt

from plant import clock
from plant.deviations.queries import DeviationView
from plant.notices import calls
from plant.works.stated import Stated


def listed(stated: Stated, at: dt.datetime) -> list[calls.Call]:
    """The call list in force, first turns first."""
    found = [calls.call(code, value) for code, value in stated.in_force("call", at)]
    return sorted(found, key=lambda one: (one.minutes, one.code))


def waits(view: DeviationView) -> bool:
    """Whether nobody has taken it on yet."""
    return view.state == "raised"


def words(stated: Stated, calendar: clock.Calendar, view: DeviationView, now: dt.datetime) -> str:
    """Whom to call now, and who is next when; empty for what is taken on, and where no list is stated."""
    if not waits(view):
        return ""
    come, following = calls.turns(listed(stated, now), view.level, now - view.raised_at, calendar.local(now).time())
    said = f"Call {_reached(come[-1])}." if come else ""
    if following is not None:
        when = calendar.local(view.raised_at + dt.timedelta(minutes=following.minutes))
        said += f" If nobody has taken it on by {when:%H:%M}: {_reached(following)}."
    return said.strip()


def telephones(stated: Stated, at: dt.datetime) -> str:
    """Names and numbers in their order, for a device that has no network."""
    return "; ".join(_reached(one) for one in listed(stated, at) if one.telephone)


def _reached(one: calls.Call) -> str:
    return f"{one.name}, {one.telephone}" if one.telephone else one.name
