"""Which function does which kind of job. Rooms above register theirs from AppConfig.ready, so imports stay downward."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

JobFunction = Callable[..., Any]
"""Called with keyword arguments only: ``now`` and whatever stands in the row. Must be safe to run twice."""

_functions: dict[str, JobFunction] = {}
_schedule: list[Regular] = []


class UnknownJob(LookupError):
    """A row names a kind of job that no room has registered."""


@dataclass(frozen=True)
class Regular:
    """Work that comes again: ``every`` says how often; ``ask`` enqueues whatever is due at ``now``."""

    name: str
    every: dt.timedelta
    ask: Callable[..., None]


def register(kind: str, function: JobFunction) -> None:
    """Names the function that does a kind of job."""
    _functions[kind] = function


def function(kind: str) -> JobFunction:
    """The function for a kind. Raises UnknownJob."""
    try:
        return _functions[kind]
    except KeyError:
        raise UnknownJob(f"no room has registered the job kind {kind!r}") from None


def regularly(name: str, *, every: dt.timedelta, ask: Callable[..., None]) -> None:
    """Adds to the schedule. ``ask(now=...)`` must be harmless when called too often."""
    if all(regular.name != name for regular in _schedule):
        _schedule.append(Regular(name, every, ask))


def schedule() -> tuple[Regular, ...]:
    """All regular work."""
    return tuple(_schedule)
