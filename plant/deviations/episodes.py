"""Holds what a review found against what is known already, and says what is new: pure, apart from making unsaved rows.

A finding belongs to an episode of the same limit, subject and parameter whose days it overlaps or adjoins. What is known
is never changed; only the difference is added, so a review that is run twice adds nothing the second time.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from plant.deviations.findings import NEEDS_APPROVAL, Finding
from plant.deviations.models import Deviation, DeviationEvent

Kind = DeviationEvent.Kind
GAP_DAYS = {"drift": 4, "dose_vs_design": 3, "dose_vs_need": 3, "certified_maximum": 3, "stock_loss": 3, "stuck": 2}
"""Days without a finding that don't end an episode: a dose that could not be reckoned is not a dose back in place."""
SIGNED = frozenset({"drift", "dose_vs_design", "dose_vs_need", "stock_loss"})
"""Kinds that are off one way or the other: above and below are two episodes, not one."""
MOMENTARY = frozenset({"days_of_supply", "stock_loss", "lot_age", "strength_low", "missing"})
"""Kinds that speak of a moment: what was so at noon was so, whatever the end of the day brings."""


@dataclass
class Episode:
    """An episode with what its events say of each day."""

    deviation: Deviation
    days: dict[dt.date, dict[str, Any]] = field(default_factory=dict)
    withdrawn: dict[dt.date, dict[str, Any]] = field(default_factory=dict)
    closed: bool = False
    void: bool = False

    @property
    def key(self) -> tuple[str, str, str, str]:
        row = self.deviation
        return row.code, row.subject_kind, row.subject, row.parameter

    @property
    def ended(self) -> bool:
        return self.closed or self.void

    @property
    def needs_approval(self) -> bool:
        """Whether what is withdrawn counts only once somebody else has looked. A value that came late corrects nothing."""
        return self.deviation.level in NEEDS_APPROVAL and self.deviation.kind != "missing"

    def span(self) -> tuple[dt.date, dt.date] | None:
        """First and last day that stands."""
        return (min(self.days), max(self.days)) if self.days else None

    def takes(self, finding: Finding) -> bool:
        """Whether a finding of the same key belongs here: on a day that is held already, or beside one, and off the same
        way. When a slow change began is only an estimate, so the days found count and not ``since``.
        """
        if self.void:
            return False
        if finding.day in self.days or finding.day in self.withdrawn:
            return True
        span = self.span()
        if span is None:
            return False
        if self.closed:
            return span[0] <= finding.day <= span[1]
        gap = dt.timedelta(days=1 + GAP_DAYS.get(finding.kind, 0))
        return span[0] - gap <= finding.day <= span[1] + gap and not self._other_way(finding)

    def _other_way(self, finding: Finding) -> bool:
        sizes = [fields["size"] for _, fields in sorted(self.days.items()) if fields.get("size") is not None]
        return finding.kind in SIGNED and bool(sizes) and finding.size is not None and sizes[-1] * finding.size < 0


def from_rows(deviations: Iterable[Deviation], events: Iterable[DeviationEvent]) -> list[Episode]:
    """Episodes from their rows; events in the order of the book."""
    out = {row.pk: Episode(row) for row in deviations}
    for event in events:
        episode = out.get(event.deviation_id)
        if episode is None:
            continue
        if event.kind in (Kind.RAISED, Kind.FINDING) and event.day:
            episode.days[event.day] = event.fields
            episode.withdrawn.pop(event.day, None)
        elif event.kind == Kind.CORRECTED_AWAY and event.day:
            episode.withdrawn[event.day] = event.fields
            episode.days.pop(event.day, None)
        elif event.kind == Kind.CORRECTED_AWAY:
            episode.void = True
        elif event.kind == Kind.CLOSED:
            episode.closed = True
    return list(out.values())


@dataclass(frozen=True)
class Reviewed:
    """One day as it was judged: its findings, up to when, and whether the day was over then."""

    day: dt.date
    until: dt.datetime
    over: bool
    findings: tuple[Finding, ...]


@dataclass
class Difference:
    """What is to be written: new rows in order, and which of them are episodes newly raised."""

    rows: list[Deviation | DeviationEvent] = field(default_factory=list)
    raised: list[Deviation] = field(default_factory=list)


def compare(
    episodes: Sequence[Episode],
    reviewed: Sequence[Reviewed],
    *,
    correctors: Any = None,
    still_so: Any = None,
) -> Difference:
    """The difference between what was found and what is known.

    ``correctors(deviation, day)`` says who corrected readings it rests on; ``still_so(deviation, day, fields)`` whether a
    finding of a moment within the day was true at that moment.
    """
    out = Difference()
    by_key: dict[tuple[str, str, str, str], list[Episode]] = {}
    for episode in episodes:
        by_key.setdefault(episode.key, []).append(episode)
    for one in sorted(reviewed, key=lambda item: item.day):
        matched = {id(_place(out, by_key, finding, one)) for finding in one.findings}
        for known in by_key.values():
            for episode in known:
                if id(episode) not in matched and one.day in episode.days and not episode.void:
                    _withdraw(out, episode, one, correctors, still_so)
    return out


def _place(
    out: Difference,
    by_key: dict[tuple[str, str, str, str], list[Episode]],
    finding: Finding,
    one: Reviewed,
) -> Episode:
    candidates = [episode for episode in by_key.get(finding.key, []) if episode.takes(finding)]
    fields = finding.content() | {"refs": list(finding.refs[:50]), "until": one.until.isoformat(), "size": finding.size}
    if not candidates:
        episode = _raise(out, finding, one, fields)
        by_key.setdefault(finding.key, []).append(episode)
        return episode
    # The one that holds the day already, else one still open, else the oldest.
    episode = min(candidates, key=lambda item: (one.day not in item.days, item.ended, item.deviation.raised_for))
    if _differs(episode.days.get(one.day), fields, one.over):
        fields |= {"after_closing": True} if episode.closed else {}
        out.rows.append(_event(episode.deviation, Kind.FINDING, one, fields))
        episode.days[one.day] = fields
        episode.withdrawn.pop(one.day, None)
    return episode


def _differs(known: dict[str, Any] | None, fields: dict[str, Any], over: bool) -> bool:
    if known is None:
        return True
    if not over:
        # A running day is written down anew only for another reading outside, not for every minute that passes.
        return known.get("refs") != fields["refs"]
    names = ("value", "limit", "since", "sentence", "causes", "refs")
    return any(known.get(name) != fields[name] for name in names)


def _raise(out: Difference, finding: Finding, one: Reviewed, fields: dict[str, Any]) -> Episode:
    row = Deviation(
        code=finding.code,
        kind=finding.kind,
        level=finding.level,
        subject_kind=finding.subject_kind,
        subject=finding.subject,
        parameter=finding.parameter,
        raised_for=finding.day,
        since=finding.since,
        value=finding.value[:80],
        limit=finding.limit[:120],
        sentence=finding.sentence,
        likely_causes=[
            {"cause": cause.name, "likelihood": round(cause.likelihood, 2), "evidence": cause.evidence}
            for cause in finding.causes
        ],
        statement=finding.statement,
        tell=[dict(item) for item in finding.tell],
    )
    out.rows += [row, _event(row, Kind.RAISED, one, fields)]
    out.raised.append(row)
    return Episode(row, {one.day: fields})


def _withdraw(out: Difference, episode: Episode, one: Reviewed, correctors: Any, still_so: Any) -> None:
    known = episode.days[one.day]
    if episode.deviation.kind in MOMENTARY and still_so is not None and still_so(episode.deviation, one.day, known):
        return
    fields: dict[str, Any] = {"was": known.get("value", ""), "until": one.until.isoformat()}
    if episode.needs_approval:
        fields |= {"awaiting": True, "corrected_by": correctors(episode.deviation, one.day) if correctors else []}
    out.rows.append(_event(episode.deviation, Kind.CORRECTED_AWAY, one, fields))
    del episode.days[one.day]
    episode.withdrawn[one.day] = fields
    if not episode.days and not episode.closed and not episode.needs_approval:
        out.rows.append(
            DeviationEvent(deviation=episode.deviation, kind=Kind.CORRECTED_AWAY, at=one.until, fields={"whole": True})
        )
        episode.void = True


def _event(deviation: Deviation, kind: str, one: Reviewed, fields: dict[str, Any]) -> DeviationEvent:
    return DeviationEvent(deviation=deviation, kind=kind, at=one.until, day=one.day, fields=fields)
