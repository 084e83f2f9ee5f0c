"""Every write: judging days, and each step of a deviation's life."""

from __future__ import annotations

import datetime as dt
import logging
import uuid
from collections.abc import Iterable, Sequence
from typing import Any

from django.db import transaction

from plant import clock
from plant.deviations import episodes, judging, queries, verifying
from plant.deviations.evidence import Evidence, gather
from plant.deviations.findings import CAUSES, Finding
from plant.deviations.models import Deviation, DeviationEvent
from plant.deviations.queries import DeviationView
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry
from plant.readings.models import Reading, Settlement
from plant.works import access, described
from plant.works import queries as works
from plant.works.stated import NotStated, Stated

logger = logging.getLogger(__name__)

Kind = DeviationEvent.Kind
BLOCK_DAYS = 31
"""Days judged from one fetch; a longer span is cut, so that memory does not grow with it."""
OWN_KINDS = ("review", "deviation")
LATE = dt.timedelta(hours=48)
LONGEST_TRIAL_DAYS = 396
"""Thirteen months: a running annual mean and the month before it."""
TRIES = 3
HOW = ("telephone", "e-mail", "in person", "letter", "form")


class NotAllowed(PermissionError):
    """The person's role at the works does not have this right."""


class NotPossible(ValueError):
    """The step does not fit the state of the deviation; the message says why and what to do first."""


# Judging.


def judge(*, book: Book, days: Sequence[dt.date], now: dt.datetime, by: Any = None) -> list[Deviation]:
    """Holds operating days against all limits and writes down what is new; twice changes nothing.

    Days that have not begun by ``now`` are passed over. Yesterday is looked at again for two days after its end, since a
    value may be late by then. Returns the episodes newly raised.
    """
    try:
        calendar = works.stated(book).calendar(now)
    except NotStated:
        return []
    wanted = {day for day in days if calendar.start_of(day) < now}
    for day in list(wanted):
        before = day - dt.timedelta(days=1)
        if calendar.bounds(before)[1] > now - LATE:
            wanted.add(before)
    raised: list[Deviation] = []
    for block in _blocks(sorted(wanted)):
        raised += _judge_block(book, block, now, by)
    return raised


def _blocks(days: list[dt.date]) -> list[list[dt.date]]:
    out: list[list[dt.date]] = []
    for day in days:
        if out and (day - out[-1][0]).days < BLOCK_DAYS:
            out[-1].append(day)
        else:
            out.append([day])
    return out


def _judge_block(book: Book, days: list[dt.date], now: dt.datetime, by: Any) -> list[Deviation]:
    """Reckons outside the lock, writes inside it; where facts came in meanwhile, reckons again."""
    for attempt in range(1, TRIES + 1):
        seq = _head(book)
        evidence, reviewed = _review(book, days, now)
        with transaction.atomic():
            Book.objects.select_for_update().get(pk=book.pk)
            moved = Entry.objects.filter(book=book, seq__gt=seq).exclude(kind__in=OWN_KINDS).exists()
            if moved and attempt < TRIES:
                continue
            if moved:
                evidence, reviewed = _review(book, days, now)
            return _write(book, evidence, reviewed, now, by)
    return []


def _head(book: Book) -> int:
    return int(Book.objects.values_list("head_seq", flat=True).get(pk=book.pk))


def _review(book: Book, days: list[dt.date], now: dt.datetime) -> tuple[Evidence, list[episodes.Reviewed]]:
    evidence = gather(book, works.stated(book), days[0], days[-1], now=now)
    reviewed = []
    for on in days:
        day = evidence.day(on)
        reviewed.append(episodes.Reviewed(on, day.until, day.over, tuple(judging.judge_day(day))))
    return evidence, reviewed


def _write(book: Book, evidence: Evidence, reviewed: list[episodes.Reviewed], now: dt.datetime, by: Any) -> list[Deviation]:
    known = episodes.from_rows(*queries.near(book, reviewed[0].day, reviewed[-1].day))

    def still_so(row: Deviation, day: dt.date, fields: dict[str, Any]) -> bool:
        return _still_so(evidence, row, day, fields)

    def correctors(row: Deviation, day: dt.date) -> list[str]:
        return _correctors(evidence, row, day)

    difference = episodes.compare(known, reviewed, correctors=correctors, still_so=still_so)
    if not difference.rows:
        return []
    ledger.append(
        book=book,
        client_id=uuid.uuid4().hex,
        kind="review",
        received={"days": [one.day.isoformat() for one in reviewed], "rows": len(difference.rows)},
        rows=sorted(difference.rows, key=lambda row: isinstance(row, DeviationEvent)),  # an event names its episode
        by=by,
        now=now,
        attested="session" if by is not None else "program",
    )
    return difference.raised


def _still_so(evidence: Evidence, row: Deviation, day: dt.date, fields: dict[str, Any]) -> bool:
    """Whether a finding of a moment was true at that moment, by what is known of it now."""
    until = dt.datetime.fromisoformat(fields["until"]) if fields.get("until") else None
    start, end = evidence.calendar.bounds(day)
    if until is None or not start < until < end:
        return False
    at = evidence.day(day, until)
    limit = next((limit for limit, _ in judging.limits_of(at) if limit.code == row.code), None)
    if limit is None:
        return False
    found: list[Finding] = judging.judge_day(at, limit)
    return any(item.key == (row.code, row.subject_kind, row.subject, row.parameter) for item in found)


def _correctors(evidence: Evidence, row: Deviation, day: dt.date) -> list[str]:
    """Who corrected or settled readings about the day since the deviation was raised: they can't approve it themselves."""
    start, end = evidence.calendar.bounds(day)
    start -= dt.timedelta(days=1)
    end += dt.timedelta(days=1)
    rows = Reading.objects.filter(book=row.book_id or evidence.book.pk, seq__gt=row.seq or 0, supersedes__isnull=False)
    names = set(rows.filter(taken_at__gte=start, taken_at__lt=end).values_list("entry__recorded_by__username", flat=True))
    settled = Settlement.objects.filter(book=evidence.book, seq__gt=row.seq or 0)
    names |= set(
        settled.filter(reading__taken_at__gte=start, reading__taken_at__lt=end).values_list(
            "entry__recorded_by__username", flat=True
        )
    )
    return sorted(name for name in names if name)


def try_limit(*, book: Book, limit: described.Limit, first: dt.date, last: dt.date, now: dt.datetime) -> list[Finding]:
    """When a limit that is not stated yet would have been crossed on past days: the first day of each episode.

    Writes nothing. At most 13 months; raises NotPossible for more.
    """
    days = clock.days(first, last)
    if len(days) > LONGEST_TRIAL_DAYS:
        raise NotPossible("a draft limit is tried on at most 13 months at a time")
    stated = works.stated(book)
    known: list[episodes.Episode] = []
    firsts: list[Finding] = []
    for block in _blocks(days):
        evidence = gather(book, stated, block[0], block[-1], now=now, with_doses=limit.kind not in judging.OF_READINGS)
        for on in block:
            day = evidence.day(on)
            found = judging.judge_day(day, limit)
            one = episodes.Reviewed(on, day.until, day.over, tuple(found))
            before = len(known)
            difference = episodes.compare(known, [one])
            known += [episodes.Episode(row, {on: {}}) for row in difference.raised]
            firsts += [item for item in found if any(item.key == episode.key for episode in known[before:])]
    return firsts


# The life of a deviation.


def acknowledge(
    *, book: Book, ref: str, by: Any, now: dt.datetime, note: str = "", client_id: str | None = None
) -> DeviationView:
    """Somebody has seen it and takes it on."""
    view = _for(book, ref, by, now, "deviation.acknowledge")
    if view.state != "raised":
        raise NotPossible(f"it is {view.state.replace('_', ' ')} already")
    return _add(book, view, [(Kind.ACKNOWLEDGED, now, {"note": note.strip()})], by, now, client_id)


def tell(
    *,
    book: Book,
    ref: str,
    who: str,
    how: str,
    by: Any,
    now: dt.datetime,
    at: dt.datetime | None = None,
    reference: str = "",
    client_id: str | None = None,
) -> DeviationView:
    """Somebody was told: whom, how, when (now unless said), under which reference."""
    view = _for(book, ref, by, now, "deviation.act", ended=True)
    when = at or now
    if not who.strip():
        raise NotPossible("say who was told")
    if how not in HOW:
        raise NotPossible(f"say how: {', '.join(HOW)}")
    if when > now:
        raise NotPossible("a telling lies in the past: give the time at which it was done")
    fields = {"who": who.strip(), "how": how, "reference": reference.strip()}
    return _add(book, view, [(Kind.TOLD, when, fields)], by, now, client_id)


def act(
    *,
    book: Book,
    ref: str,
    by: Any,
    now: dt.datetime,
    cause: str = "",
    cause_words: str = "",
    action: str = "",
    at: dt.datetime | None = None,
    client_id: str | None = None,
) -> DeviationView:
    """The cause that was found, the corrective action that was taken, or both."""
    view = _for(book, ref, by, now, "deviation.act")
    when = at or now
    if when > now:
        raise NotPossible("what was done lies in the past: give the time at which it was done")
    steps: list[tuple[str, dt.datetime, dict[str, Any]]] = []
    if cause or cause_words.strip():
        if cause and cause not in CAUSES:
            raise NotPossible(f"cause is one of {', '.join(CAUSES)}")
        steps.append((Kind.CAUSE, when, {"cause": cause or "unknown", "words": cause_words.strip()}))
    if action.strip():
        steps.append((Kind.ACTION, when, {"words": action.strip()}))
    if not steps:
        raise NotPossible("say what the cause was or what was done")
    return _add(book, view, steps, by, now, client_id)


def verify(*, book: Book, ref: str, by: Any, now: dt.datetime, note: str = "", client_id: str | None = None) -> DeviationView:
    """Back inside: by a reading, or a day's figure, after the last one outside. Raises NotPossible where there is none."""
    view = _for(book, ref, by, now, "deviation.act")
    if view.state == "verified":
        raise NotPossible("it is verified already")
    found = verifying.back_inside(book, view, now)
    if not found.inside:
        raise NotPossible(found.words)
    fields = {"words": found.words, "reading": found.ref, "note": note.strip()}
    return _add(book, view, [(Kind.VERIFIED, now, fields)], by, now, client_id)


def close(*, book: Book, ref: str, by: Any, now: dt.datetime, note: str = "", client_id: str | None = None) -> DeviationView:
    """The end of it: verified, nobody left to be told, no correction awaiting approval."""
    view = _for(book, ref, by, now, "deviation.close")
    if view.tellings_owed:
        names = ", ".join(owed.who for owed in view.tellings_owed)
        raise NotPossible(f"somebody must still be told: {names}")
    if view.awaiting_approval:
        raise NotPossible("a correction awaits approval by somebody else")
    if view.state != "verified":
        raise NotPossible("it is not verified yet: a reading back inside the limit is needed first")
    return _add(book, view, [(Kind.CLOSED, now, {"note": note.strip()})], by, now, client_id)


def comment(*, book: Book, ref: str, words: str, by: Any, now: dt.datetime, client_id: str | None = None) -> DeviationView:
    """A remark, at any time, after closing too."""
    view = _for(book, ref, by, now, "deviation.acknowledge", ended=True)
    if not words.strip():
        raise NotPossible("an empty comment says nothing")
    return _add(book, view, [(Kind.COMMENT, now, {"words": words.strip()})], by, now, client_id)


def approve(*, book: Book, ref: str, by: Any, now: dt.datetime, note: str = "", client_id: str | None = None) -> DeviationView:
    """Somebody other than who corrected it agrees that the correction is right: from now on it counts."""
    view = _for(book, ref, by, now, "deviation.close")
    if not view.awaiting_approval:
        raise NotPossible("no correction awaits approval")
    if by.get_username() in view.corrected_by:
        raise NotPossible("whoever corrected it can't approve it: somebody else must look")
    pending = _pending(view)
    steps: list[tuple[str, dt.datetime, dict[str, Any]]] = [
        (Kind.APPROVED, now, {"note": note.strip(), "days": [day.isoformat() for day in pending]})
    ]
    if set(view.days) <= set(pending):
        steps.append((Kind.CORRECTED_AWAY, now, {"whole": True}))
    return _add(book, view, steps, by, now, client_id)


def _pending(view: DeviationView) -> list[dt.date]:
    out: dict[dt.date, bool] = {}
    for event in view.events:
        if event.kind == Kind.APPROVED:
            out = {}
        elif event.day and event.kind == Kind.CORRECTED_AWAY and event.fields.get("awaiting"):
            out[event.day] = True
        elif event.day and event.kind == Kind.FINDING:
            out.pop(event.day, None)
    return sorted(out)


def may(stated: Stated, by: Any, now: dt.datetime, right: str) -> bool:
    """Whether a person has a right at the works."""
    member = access.member(stated, by.get_username(), now) if by is not None else None
    return member is not None and member.may(right)


def _for(book: Book, ref: str, by: Any, now: dt.datetime, right: str, *, ended: bool = False) -> DeviationView:
    if not may(works.stated(book), by, now, right):
        raise NotAllowed(f"this needs the right “{right}”, which this person does not have here")
    view = queries.one(book, ref)
    if view is None:
        raise NotPossible(f"there is no deviation {ref}")
    if not view.open and not ended:
        raise NotPossible(f"it is {view.state.replace('_', ' ')}: a comment can still be added")
    return view


def _add(
    book: Book,
    view: DeviationView,
    steps: Iterable[tuple[str, dt.datetime, dict[str, Any]]],
    by: Any,
    now: dt.datetime,
    client_id: str | None,
) -> DeviationView:
    """Appends the steps, unless somebody else's step came first."""
    deviation = Deviation.objects.get(pk=view.pk)
    done = list(steps)
    received = {"deviation": view.ref, "steps": [[kind, at.isoformat(), fields] for kind, at, fields in done]}
    with transaction.atomic():
        Book.objects.select_for_update().get(pk=book.pk)
        current = queries.one(book, view.ref)
        again = client_id is not None and Entry.objects.filter(book=book, client_id=client_id).exists()
        if current is not None and current.state != view.state and not again:
            raise NotPossible(f"somebody was quicker: it is {current.state.replace('_', ' ')} now")
        rows = [
            DeviationEvent(
                deviation=deviation, kind=kind, at=at, fields={key: item for key, item in fields.items() if item != ""}
            )
            for kind, at, fields in done
        ]
        ledger.append(
            book=book,
            client_id=client_id or uuid.uuid4().hex,
            kind="deviation",
            received=received,
            rows=rows,
            by=by,
            now=now,
        )
    found = queries.one(book, view.ref)
    if found is None:
        raise NotPossible(f"there is no deviation {view.ref}")
    return found
