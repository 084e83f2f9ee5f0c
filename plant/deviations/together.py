"""Deviations that one likely cause explains together, to be shown as one with its parts: nothing is left out or closed by it.

A meter that counts wrong moves every dose reckoned from it; a gauge that hangs moves a vessel and its dose. They are taken
together when the same cause stands first with each, they began within a few days, and they hang on the same meter or point.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Mapping

from plant.deviations.queries import DeviationView
from plant.works.stated import Stated

OF_DOSES = frozenset({"drift", "dose_vs_design", "dose_vs_need", "stock_loss", "stuck"})
NEAR = dt.timedelta(days=4)
"""How far apart they may have begun: when a slow change began is an estimate (common practice, no source)."""


def chains(stated: Stated, at: dt.datetime) -> dict[str, tuple[str, str]]:
    """Each dosing point, its vessels and its meter -> the point and the meter they hang on (the first point's, if shared)."""
    out: dict[str, tuple[str, str]] = {}
    for point in stated.dosing_points(at):
        for code in (point.code, *point.vessels, point.feed_meter, point.meter):
            if code:
                out.setdefault(code, (point.code, point.meter))
    return out


def together(views: Iterable[DeviationView], hangs_on: Mapping[str, tuple[str, str]]) -> list[list[DeviationView]]:
    """The views in groups, each in the order given, a group where its first stands. Most groups hold one."""
    groups: list[list[DeviationView]] = []
    by_cause: dict[tuple[str, str], list[list[DeviationView]]] = {}
    for view in views:
        key = _key(view, hangs_on)
        mine = (
            next((group for group in by_cause.get(key, []) if abs(view.since - group[0].since) <= NEAR), None) if key else None
        )
        if mine is not None:
            mine.append(view)
            continue
        groups.append([view])
        if key:
            by_cause.setdefault(key, []).append(groups[-1])
    return groups


def _key(view: DeviationView, hangs_on: Mapping[str, tuple[str, str]]) -> tuple[str, str] | None:
    cause = next(iter(view.likely_causes), "unknown")
    place = hangs_on.get(view.subject)
    if view.kind not in OF_DOSES or cause == "unknown" or place is None:
        return None
    point, meter = place
    return cause, meter if cause == "meter_error" else point
