"""Whose turn it is. Pure: the list as stated, how long nobody has taken a deviation on, the time of day."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from plant.deviations.queries import WORST_FIRST


@dataclass(frozen=True)
class Call:
    """One name of the call list. ``minutes``: how long a deviation may wait before it is this one's turn; ``level``: the
    mildest worth the call; ``start`` and ``end``: on call from and to, local, over midnight too; equal or None: always.
    """

    code: str
    name: str
    telephone: str = ""
    email: str = ""
    level: str = "action"
    minutes: int = 0
    start: dt.time | None = None
    end: dt.time | None = None
    digest: bool = False

    def on_call(self, at: dt.time) -> bool:
        """Whether the hours hold at a local time."""
        if self.start is None or self.end is None or self.start == self.end:
            return True
        if self.start < self.end:
            return self.start <= at < self.end
        return at >= self.start or at < self.end

    def wants(self, level: str) -> bool:
        """Whether a level is at least as bad as the one stated."""
        return WORST_FIRST.get(level, 9) <= WORST_FIRST[self.level]


def call(code: str, value: Mapping[str, Any]) -> Call:
    """A name as the works states it."""
    times = [dt.time.fromisoformat(str(value[key])) if value.get(key) else None for key in ("from", "to")]
    return Call(
        code,
        str(value["name"]),
        str(value.get("telephone") or ""),
        str(value.get("email") or ""),
        str(value.get("level") or "action"),
        int(value.get("minutes") or 0),
        times[0],
        times[1],
        bool(value.get("digest")),
    )


def turns(listed: Sequence[Call], level: str, waited: dt.timedelta, at: dt.time) -> tuple[list[Call], Call | None]:
    """Those whose turn has come, in order, and who is next; only names that are on call and want the level."""
    able = sorted((one for one in listed if one.on_call(at) and one.wants(level)), key=lambda one: (one.minutes, one.code))
    come = [one for one in able if waited >= dt.timedelta(minutes=one.minutes)]
    return come, next((one for one in able if one not in come), None)
