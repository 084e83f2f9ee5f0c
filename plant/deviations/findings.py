"""What a judgement of a day comes to, before it is held against what is known already."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field
from typing import Any

from plant.works.described import Limit

LEVELS = ("target", "alert", "action", "regulatory")
NEEDS_APPROVAL = ("action", "regulatory")
"""Levels at which a correction that clears a deviation counts only once somebody else has approved it."""


@dataclass(frozen=True)
class Cause:
    """A likely cause: one of the names below, how likely (0 to 1, only to put them in order), and the evidence."""

    name: str
    likelihood: float
    evidence: str


CAUSES = (
    "feeder_drift",
    "weak_product",
    "leak",
    "raw_water_change",
    "wrong_reading",
    "stuck_sensor",
    "meter_error",
    "unbooked_delivery",
    "missing_readings",
    "vessel_empty",
    "aged_stock",
    "stale_design",
    "process_change",
    "unknown",
)


@dataclass(frozen=True)
class Finding:
    """A limit crossed on an operating day."""

    code: str
    kind: str
    level: str
    subject_kind: str
    subject: str
    parameter: str
    day: dt.date
    since: dt.datetime
    value: str
    limit: str
    sentence: str
    refs: tuple[str, ...] = ()
    until: dt.datetime | None = None
    size: float | None = None
    causes: tuple[Cause, ...] = ()
    statement: str = ""
    tell: tuple[dict[str, Any], ...] = field(default_factory=tuple)

    @property
    def key(self) -> tuple[str, str, str, str]:
        """What episodes are matched by, beside their days."""
        return self.code, self.subject_kind, self.subject, self.parameter

    def content(self) -> dict[str, Any]:
        """What a later review compares: the day's finding without anything that depends on when it was made."""
        return {
            "value": self.value,
            "limit": self.limit,
            "since": self.since.astimezone(dt.UTC).isoformat(timespec="seconds"),
            "sentence": self.sentence,
            "causes": [[cause.name, round(cause.likelihood, 2), cause.evidence] for cause in self.causes],
        }


def of_limit(limit: Limit, statement: str, day: dt.date, /, **rest: Any) -> Finding:
    """A finding with the head of its limit. ``subject``, ``subject_kind`` and ``parameter`` may be given otherwise."""
    head: dict[str, Any] = {
        "subject_kind": limit.subject_kind,
        "subject": limit.subject,
        "parameter": limit.parameter,
    }
    return Finding(
        **head | rest, code=limit.code, kind=limit.kind, level=limit.level, day=day, statement=statement, tell=limit.tell
    )
