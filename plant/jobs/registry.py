"""Which function does which kind of job. Rooms above register theirs from AppConfig.ready, so imports stay downward."""

from __future__ import annotations

import datetime as dt
import logging
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

logger = logging.getLogger(__name__)

JobFunction = Callable[..., Any]
"""Called with keyword arguments only: ``now`` and whatever stands in the row (ids and codes, no objects). It must be safe
to run twice, since a worker may die after the work is done and before that is written down."""

LIMIT = dt.timedelta(minutes=4)
LONGEST_LIMIT = dt.timedelta(minutes=30)
"""No kind may take longer; the broker's own limits are set above it."""


@dataclass(frozen=True)
class Kind:
    """How one kind of job is done: by which function, for how long at most, and what it is called on a page."""

    function: JobFunction
    limit: dt.timedelta
    words: str


@dataclass(frozen=True)
class Regular:
    """Work that comes again: ``every`` says how often; ``ask`` enqueues whatever is due at ``now``."""

    name: str
    every: dt.timedelta
    ask: Callable[..., Any]


class UnknownJob(LookupError):
    """A row names a kind of job that no room has registered."""


_kinds: dict[str, Kind] = {}
_schedule: list[Regular] = []
_wakers: list[Callable[[], None]] = []


def register(kind: str, function: JobFunction, *, limit: dt.timedelta = LIMIT, words: str = "") -> None:
    """Names the function that does a kind of job. A run longer than ``limit`` is broken off and counts as an error.

    Raises ValueError for a limit above LONGEST_LIMIT.
    """
    if limit > LONGEST_LIMIT:
        raise ValueError(f"{kind}: a job may take {LONGEST_LIMIT} at most")
    _kinds[kind] = Kind(function, limit, words or kind)


def kind(name: str) -> Kind:
    """How a kind is done. Raises UnknownJob."""
    try:
        return _kinds[name]
    except KeyError:
        raise UnknownJob(f"no room has registered the job kind {name!r}") from None


def words(name: str) -> str:
    """What a kind is called on a page."""
    return _kinds[name].words if name in _kinds else name


def regularly(name: str, *, every: dt.timedelta, ask: Callable[..., Any]) -> None:
    """Adds to the schedule. ``ask(now=...)`` must be harmless when called too often."""
    if all(regular.name != name for regular in _schedule):
        _schedule.append(Regular(name, every, ask))


def schedule() -> tuple[Regular, ...]:
    """All regular work."""
    return tuple(_schedule)


def wake_by(waker: Callable[[], None]) -> None:
    """Adds a way to wake workers. It must return at once, whatever the state of what it sends through."""
    _wakers.append(waker)


def wake() -> None:
    """Tells workers that something waits. Nothing depends on it: they look by themselves too, a little later."""
    for waker in _wakers:
        try:
            waker()
        except Exception:  # the row is committed; the one who asked for it must not see an error
            logger.exception("a waker failed")
