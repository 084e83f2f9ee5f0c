"""Times as pages show them: on the works' own wall clock."""

from __future__ import annotations

import datetime as dt

from plant import clock


def at(calendar: clock.Calendar, moment: dt.datetime) -> dt.datetime:
    """The local time without its zone; templates would turn an aware time into the server's zone."""
    return calendar.local(moment).replace(tzinfo=None)
