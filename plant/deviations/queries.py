"""Reads of deviations: frozen views with their whole life."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from django.db.models import Exists, OuterRef, Q, QuerySet

from plant.deviations.findings import NEEDS_APPROVAL, Cause
from plant.deviations.models import Deviation, DeviationEvent
from plant.ledger.models import Book

Kind = DeviationEvent.Kind
WORST_FIRST = {"regulatory": 0, "action": 1, "alert": 2, "target": 3}


@dataclass(frozen=True)
class EventView:
    """One step of a life. ``at`` is when it happened, ``recorded_at`` when it was written down; ``by`` a name or empty."""

    ref: str
    kind: str
    at: dt.datetime
    recorded_at: dt.datetime
    by: str
    username: str
    day: dt.date | None
    fields: dict[str, Any]


@dataclass(frozen=True)
class Owed:
    """A telling that is still owed: whom, by when, how to reach them."""

    who: str
    due: dt.datetime
    telephone: str = ""


@dataclass(frozen=True)
class DeviationView:
    """One episode as it stands: what was found last, its causes over all its days, its state, its events."""

    pk: int
    ref: str
    code: str
    kind: str
    level: str
    subject_kind: str
    subject: str
    parameter: str
    raised_for: dt.date
    since: dt.datetime
    raised_at: dt.datetime
    value: str
    limit: str
    sentence: str
    likely_causes: tuple[str, ...]
    causes: tuple[Cause, ...]
    state: str
    events: tuple[EventView, ...]
    tellings_owed: tuple[Owed, ...]
    awaiting_approval: bool
    days: tuple[dt.date, ...]
    statement: str = ""
    refs: tuple[str, ...] = field(default_factory=tuple)

    @property
    def last_day(self) -> dt.date:
        """The last day on which it was found."""
        return max(self.days, default=self.raised_for)

    @property
    def open(self) -> bool:
        return self.state not in ("closed", "corrected_away")

    @property
    def acknowledged_by(self) -> str:
        """Who took it on; empty while nobody has."""
        return next((event.by for event in self.events if event.kind == Kind.ACKNOWLEDGED), "")

    @property
    def corrected_by(self) -> tuple[str, ...]:
        """User names of those whose corrections await approval."""
        names = [
            name for event in self.events if event.kind == Kind.CORRECTED_AWAY for name in event.fields.get("corrected_by", [])
        ]
        return tuple(dict.fromkeys(names))


def _ended() -> Q:
    final = DeviationEvent.objects.filter(deviation=OuterRef("pk")).filter(
        Q(kind=Kind.CLOSED) | Q(kind=Kind.CORRECTED_AWAY, day__isnull=True)
    )
    return Q(Exists(final))


def _ended_by(known: int | None) -> Q:
    final = DeviationEvent.objects.filter(deviation=OuterRef("pk")).filter(
        Q(kind=Kind.CLOSED) | Q(kind=Kind.CORRECTED_AWAY, day__isnull=True)
    )
    return Q(Exists(final.filter(seq__lte=known) if known is not None else final))


def open_ones(book: Book, known: int | None = None) -> list[DeviationView]:
    """What is open, worst and oldest first."""
    rows = _known(book, known).exclude(_ended_by(known))
    views = [view for view in views_of(rows, known) if view.open]
    return sorted(views, key=lambda view: (WORST_FIRST.get(view.level, 9), view.since, view.ref))


def between(book: Book, first: dt.date, last: dt.date, known: int | None = None) -> list[DeviationView]:
    """Episodes raised for, or found again on, any of the days, by the day they were raised for."""
    again = DeviationEvent.objects.filter(deviation=OuterRef("pk"), day__gte=first, day__lte=last)
    if known is not None:
        again = again.filter(seq__lte=known)
    rows = _known(book, known).filter(raised_for__lte=last).filter(Q(raised_for__gte=first) | Exists(again))
    return views_of(rows, known)


def raised_for(book: Book, first: dt.date, last: dt.date, known: int | None = None) -> list[DeviationView]:
    """Episodes raised for one of the days."""
    return views_of(_known(book, known).filter(raised_for__gte=first, raised_for__lte=last), known)


def one(book: Book, ref: str, known: int | None = None) -> DeviationView | None:
    """The deviation called ``seq.line``; None for none."""
    seq, _, line = ref.partition(".")
    if not (seq.isdigit() and line.isdigit()):
        return None
    found = views_of(_known(book, known).filter(seq=int(seq), line=int(line)), known)
    return found[0] if found else None


def awaiting_approval(book: Book, known: int | None = None) -> list[DeviationView]:
    """Open episodes of which a correction would clear something, and nobody else has approved it yet."""
    return [view for view in open_ones(book, known) if view.awaiting_approval]


def near(book: Book, first: dt.date, last: dt.date) -> tuple[list[Deviation], list[DeviationEvent]]:
    """Rows that a review of the days has to be held against: what is open, and what touches the days or their neighbours."""
    edge = dt.timedelta(days=8)
    touching = DeviationEvent.objects.filter(deviation=OuterRef("pk"), day__gte=first - edge, day__lte=last + edge)
    rows = list(_known(book, None).filter(~_ended() | Exists(touching)).order_by("raised_for", "seq", "line"))
    return rows, list(_events(rows, None))


def _known(book: Book, known: int | None) -> QuerySet[Deviation]:
    return Deviation.objects.filter(book=book).as_known(known).order_by("raised_for", "seq", "line")


def _events(rows: Sequence[Deviation], known: int | None) -> Iterable[DeviationEvent]:
    for start in range(0, len(rows), 400):
        found = DeviationEvent.objects.filter(deviation__in=[row.pk for row in rows[start : start + 400]])
        if known is not None:
            found = found.filter(seq__lte=known)
        yield from found.order_by("seq", "line").select_related("entry__recorded_by")


def views_of(rows: QuerySet[Deviation], known: int | None = None) -> list[DeviationView]:
    """Views of some episodes: two queries, whatever their number (up to 400)."""
    found = list(rows.select_related("entry"))
    by_deviation: dict[int, list[DeviationEvent]] = {}
    for event in _events(found, known):
        by_deviation.setdefault(event.deviation_id, []).append(event)
    return [_view(row, by_deviation.get(row.pk, [])) for row in found]


def _view(row: Deviation, events: list[DeviationEvent]) -> DeviationView:
    days: dict[dt.date, dict[str, Any]] = {}
    pending: set[dt.date] = set()
    for event in events:
        if event.kind in (Kind.RAISED, Kind.FINDING) and event.day:
            days[event.day] = event.fields
            pending.discard(event.day)
        elif event.kind == Kind.CORRECTED_AWAY and event.day and event.fields.get("awaiting"):
            pending.add(event.day)
        elif event.kind == Kind.CORRECTED_AWAY and event.day:
            days.pop(event.day, None)
        elif event.kind == Kind.APPROVED:
            for day in pending:
                days.pop(day, None)
            pending = set()
    # Until somebody else has approved it, a correction changes nothing here: the day stands as it was found.
    newest = days[max(days)] if days else {}
    causes = _causes(row, days)
    return DeviationView(
        pk=row.pk,
        ref=row.ref,
        code=row.code,
        kind=row.kind,
        level=row.level,
        subject_kind=row.subject_kind,
        subject=row.subject,
        parameter=row.parameter,
        raised_for=row.raised_for,
        since=row.since,
        raised_at=row.entry.recorded_at,
        value=str(newest.get("value", row.value)),
        limit=str(newest.get("limit", row.limit)),
        sentence=str(newest.get("sentence", row.sentence)),
        likely_causes=tuple(cause.name for cause in causes),
        causes=causes,
        state=_state(events),
        events=tuple(_event_view(event) for event in events),
        tellings_owed=_owed(row, events),
        awaiting_approval=bool(pending) and row.level in NEEDS_APPROVAL,
        days=tuple(sorted(days)),
        statement=row.statement,
        refs=tuple(newest.get("refs", ())),
    )


def _state(events: Iterable[DeviationEvent]) -> str:
    state = "raised"
    for event in events:
        kind = event.kind
        if state in ("closed", "corrected_away"):
            continue
        if kind == Kind.ACKNOWLEDGED and state == "raised":
            state = "acknowledged"
        elif kind in (Kind.CAUSE, Kind.ACTION):
            state = "acting"
        elif kind == Kind.VERIFIED:
            state = "verified"
        elif kind == Kind.FINDING and state == "verified":
            # Outside again after it was found back inside.
            state = "acting"
        elif kind == Kind.CLOSED:
            state = "closed"
        elif kind == Kind.CORRECTED_AWAY and event.day is None:
            state = "corrected_away"
    return state


def _causes(row: Deviation, days: dict[dt.date, dict[str, Any]]) -> tuple[Cause, ...]:
    """Each cause with the best evidence any day gave for it, likeliest first."""
    best: dict[str, Cause] = {}
    for day in sorted(days):
        for name, likelihood, evidence in days[day].get("causes", []):
            if name not in best or likelihood >= best[name].likelihood:
                best[name] = Cause(name, likelihood, evidence)
    if not best:
        for item in row.likely_causes:
            best[item["cause"]] = Cause(item["cause"], item["likelihood"], item["evidence"])
    if len(best) > 1:
        best.pop("unknown", None)
    return tuple(sorted(best.values(), key=lambda cause: -cause.likelihood))


def _owed(row: Deviation, events: Iterable[DeviationEvent]) -> tuple[Owed, ...]:
    told = {str(event.fields.get("who", "")).strip().casefold() for event in events if event.kind == Kind.TOLD}
    return tuple(
        Owed(
            str(item["who"]),
            row.entry.recorded_at + dt.timedelta(hours=float(item["within_hours"])),
            str(item.get("telephone", "")),
        )
        for item in row.tell
        if str(item["who"]).strip().casefold() not in told
    )


def _event_view(event: DeviationEvent) -> EventView:
    person = event.entry.recorded_by
    return EventView(
        event.ref,
        event.kind,
        event.at,
        event.entry.recorded_at,
        ""
        if person is None or event.kind in (Kind.RAISED, Kind.FINDING)
        else (getattr(person, "display_name", "") or str(person)),
        "" if person is None else person.get_username(),
        event.day,
        event.fields,
    )
