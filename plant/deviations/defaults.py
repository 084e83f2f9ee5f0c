"""Limits that hold without being stated: on a dosing point or a vessel, each of these kinds, unless the works states one
of that kind there, or withdraws the default by its code (``default-KIND-SUBJECT``). Common practice, no source.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator

from plant.works.described import Limit
from plant.works.stated import Stated

DOSE_PCT = 20.0
FALSE_ALARM_DAYS = 365.0
SIGMAS = 5.0
STUCK_READINGS = 4
LATE_HOURS = 2.0
MAXIMUM_DAYS = 7
PCT_BELOW = 10.0

ON_DOSING_POINTS: tuple[tuple[str, dict[str, float]], ...] = (
    ("dose_vs_design", {"pct": DOSE_PCT}),
    ("drift", {"mean_days_between_false_alarms": FALSE_ALARM_DAYS}),
    ("missing", {"hours": LATE_HOURS}),
    ("stuck", {"readings": STUCK_READINGS}),
)
ON_VESSELS: tuple[tuple[str, dict[str, float]], ...] = (
    ("stock_loss", {"sigmas": SIGMAS}),
    ("missing", {"hours": LATE_HOURS}),
    ("stuck", {"readings": STUCK_READINGS}),
)


def code(kind: str, subject: str) -> str:
    """What a default is called."""
    return f"default-{kind}-{subject}"


def is_default(name: str) -> bool:
    """Whether a code is that of a default."""
    return name.startswith("default-")


def holding(stated: Stated, at: dt.datetime) -> Iterator[Limit]:
    """The defaults that hold at a moment."""
    own = {(limit.subject_kind, limit.subject, limit.kind) for limit in stated.limits(at)}
    for point in stated.dosing_points(at):
        yield from _of(stated, at, "dosing_point", point.code, ON_DOSING_POINTS, own)
    for vessel in stated.vessels(at):
        yield from _of(stated, at, "vessel", vessel.code, ON_VESSELS, own)


def _of(
    stated: Stated,
    at: dt.datetime,
    subject_kind: str,
    subject: str,
    kinds: tuple[tuple[str, dict[str, float]], ...],
    own: set[tuple[str, str, str]],
) -> Iterator[Limit]:
    for kind, keys in kinds:
        name = code(kind, subject)
        if (subject_kind, subject, kind) in own or stated.saying("limit", name, at) is not None:
            continue
        yield Limit(
            name,
            kind,
            "alert",
            subject_kind,
            subject,
            source="default of the program: common practice, no source",
            keys=dict(keys),
        )
