"""What a tablet (or the plain form) sends: a whole round, or a single line, as one Entry with an id of its own making.

The same id with the same content again is recognised and adds nothing; what can't be read is answered line by line and
nothing of it is kept, so that the tablet keeps all of it.
"""

from __future__ import annotations

import datetime as dt
import uuid
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.intake import actions, ground, lines, matching, models, moments, numbers, records, rules, shifts, walk
from plant.ledger.models import Book, Row
from plant.readings.models import Reading
from plant.works import actions as works_actions
from plant.works.stated import Stated

KINDS = ("round", "line")
MOST_LINES = 200
CONFIRMED = "looked at twice at entry: the instrument shows this"
_AHEAD = dt.timedelta(minutes=10)
_OLDEST_ROUND = dt.timedelta(hours=36)
_NOT_TAKEN_MOST = 200


class Unreadable(ValueError):
    """What was sent can't be taken. ``problems`` are sentences by the place of the line; ``general`` is about the whole."""

    def __init__(self, problems: Mapping[int, str] | None = None, general: str = "") -> None:
        self.problems = dict(problems or {})
        self.general = general
        super().__init__(general or "; ".join(self.problems.values()))


@dataclass(frozen=True)
class Sent:
    """What came of it: the entry, and per line its reading's ref ("" where it was there already) and its doubts."""

    taken: actions.Taken
    refs: tuple[str, ...]


def take(
    *,
    book: Book,
    stated: Stated,
    client_id: str,
    received: Any,
    by: Any,
    now: dt.datetime,
    attested: str = "session",
    device: str = "",
    noted: Any = None,
) -> Sent:
    """Takes a round or a line into the book. Raises Unreadable, ledger.ContentDiffers.

    ``device`` names an enrolled tablet; without one it is what the sender calls itself. ``noted`` is kept beside what came.
    """
    kind, sent, close, own_name = _shape(client_id, received)
    here = ground.Ground(
        stated, stated.calendar(now), spelling=ground.Spelling(decimal=_decimal(stated, now)), history=records.history_of(book)
    )
    understood = _understood(sent, here, by, now)
    with transaction.atomic():
        works_actions.hold(book)
        recall = matching.Recall(book, [one.reading for one in understood], looking=True)
        fresh = [recall.place(one) != matching.SAME for one in understood]
        rows: list[Row] = [one.reading for one, new in zip(understood, fresh, strict=True) if new]
        rows += [_closing(stated, sent, close, now)] if close is not None else []
        rows += [_taking_over(book, received["take_over"], now)] if "take_over" in received else []
        taken = actions.take(
            book=book,
            client_id=client_id,
            kind=kind,
            received=received,
            rows=rows,
            by=by,
            now=now,
            device=device or own_name,
            attested=attested,
            noted=noted,
            judge=False,
        )
    refs = iter([row.ref for row in taken.rows if isinstance(row, Reading)])
    named = tuple(next(refs, "") if new else "" for new in fresh)
    return Sent(actions.judge_taken(book=book, taken=taken, by=by), named if taken.created else ())


def _shape(client_id: str, received: Any) -> tuple[str, list[dict[str, Any]], dict[str, Any] | None, str]:
    try:
        uuid.UUID(client_id)
    except ValueError:
        raise Unreadable(general="the entry's id is not a UUID") from None
    if not isinstance(received, dict) or received.get("kind") not in KINDS:
        raise Unreadable(general=f"expected an object with kind {' or '.join(KINDS)}")
    sent = received.get("lines", [])
    if not isinstance(sent, list) or not all(isinstance(line, dict) for line in sent):
        raise Unreadable(general="expected lines: a list of objects")
    if len(sent) > MOST_LINES:
        raise Unreadable(general=f"at most {MOST_LINES} lines at a time; send the rest as another entry")
    close = received.get("close")
    if close is not None and not isinstance(close, dict):
        raise Unreadable(general="expected close: an object")
    if "take_over" in received and not isinstance(received["take_over"], dict):
        raise Unreadable(general="expected take_over: an object")
    if not sent and close is None and "take_over" not in received:
        raise Unreadable(general="there is nothing in it yet")
    return received["kind"], sent, close, _text(received, "device", 64)


def _decimal(stated: Stated, at: dt.datetime) -> str:
    return numbers.POINT if stated.works(at).units == "us" else numbers.EITHER


def _understood(sent: list[dict[str, Any]], here: ground.Ground, by: Any, now: dt.datetime) -> list[lines.Taken]:
    problems: dict[int, str] = {}
    found: list[lines.Taken] = []
    for place, line in enumerate(sent):
        try:
            found.append(_line(line, place, here, by, now))
        except (Unreadable, moments.NotATime) as problem:
            problems[place] = str(problem)
    if problems:
        raise Unreadable(problems)
    return found


def _line(line: dict[str, Any], place: int, here: ground.Ground, by: Any, now: dt.datetime) -> lines.Taken:
    value, why_not = _text(line, "value", 80), _text(line, "not_taken", _NOT_TAKEN_MOST)
    if value and why_not:
        raise Unreadable(general="a value and a reason for having none: keep one of them")
    if not value and not why_not:
        raise Unreadable(general="neither a value nor a reason why it was not taken")
    commas = here.decimal == numbers.EITHER
    if value and rules.parse(value, commas=commas) is None:
        raise Unreadable(general="this is not a number")
    note = why_not or _text(line, "note", 1000)
    if line.get("confirmed") is True and value:
        note = f"{note}; {CONFIRMED}" if note else CONFIRMED
    typed = lines.Typed(
        site=_text(line, "site", 80),
        timestamp=taken_at(line, here, now).isoformat(),
        parameter=_text(line, "parameter", 80),
        value=value,
        unit=_text(line, "unit", 24),
        by=str(getattr(by, "display_name", "") or by or "")[:80],
        note=note,
        sample=_text(line, "sample", 40),
        method=_text(line, "method", 60),
    )
    found = lines.read_line(typed, here, line=place + 1)
    if isinstance(found, lines.Refusal):
        raise Unreadable(general=f"read {found.read}; expected {found.expected}")
    return found


def taken_at(line: Mapping[str, Any], here: ground.Ground, now: dt.datetime) -> dt.datetime:
    """When a line was read: its instant, or the latest moment at which the works' clock showed ``clock`` (HH:MM).

    Without either it is now. Raises Unreadable for a time still to come, moments.NotATime.
    """
    clock_text = _text(line, "clock", 5)
    if clock_text:
        at = _on_the_clock(clock_text, here, now)
    elif _text(line, "taken_at", 40):
        at = here.moment(_text(line, "taken_at", 40)).at
    else:
        at = now
    if at > now + _AHEAD:
        raise Unreadable(general=f"{here.calendar.local(at):%d %b %H:%M} is still to come")
    return at.replace(second=0, microsecond=0)


def _on_the_clock(text: str, here: ground.Ground, now: dt.datetime) -> dt.datetime:
    try:
        hour = dt.time.fromisoformat(text)
    except ValueError:
        raise Unreadable(general=f"{text!r} is not a time of day such as 07:30") from None
    today = here.calendar.local(now).date()
    tries = [today, today - dt.timedelta(days=1)]
    moments_ = [here.moment(f"{date}T{hour:%H:%M}").at for date in tries]
    return next((at for at in moments_ if at <= now + _AHEAD), moments_[-1])


def _closing(stated: Stated, sent: list[dict[str, Any]], close: dict[str, Any], now: dt.datetime) -> models.HandOver:
    calendar = stated.calendar(now)
    # A page opened before the change of shifts closes the shift it was opened in.
    meant = _started(close, now) or now
    shift, _ = shifts.on_duty(stated, calendar, meant)
    due = shifts.due_now(stated, calendar, shifts.expected(stated, meant), meant)
    still_open = [str(key)[:120] for key in close.get("open", []) if isinstance(key, str)][:MOST_LINES]
    return models.HandOver(
        day=shift.day,
        shift=shift.name,
        starts_at=shift.start,
        closed_at=now,
        note=_text(close, "note", 4000),
        lines_due=len(due),
        lines_answered=max(len(due) - len(still_open), 0),
        lines_open=still_open,
    )


def _taking_over(book: Book, said: Mapping[str, Any], now: dt.datetime) -> models.TakeOver:
    started = _started(said, now)
    if started is None:
        raise Unreadable(general="take_over: expected starts_at, the start of the shift that is taken over from")
    closed = models.HandOver.objects.filter(book=book, starts_at=started).as_known().order_by("-seq", "-line").first()
    return models.TakeOver(hand_over=closed, from_starts_at=started, taken_at=now)


def _started(close: Mapping[str, Any], now: dt.datetime) -> dt.datetime | None:
    """The start of the shift a round was opened in, where the page says so and it can be."""
    typed = _text(close, "starts_at", 40)
    try:
        found = dt.datetime.fromisoformat(typed) if typed else None
    except ValueError:
        raise Unreadable(general="close: starts_at is not a time") from None
    if found is None or found.tzinfo is None or not now - _OLDEST_ROUND <= found <= now:
        return None
    return found


def _text(line: Mapping[str, Any], name: str, most: int) -> str:
    value = line.get(name)
    if value is None:
        return ""
    if not isinstance(value, str) or len(value) > most or "\x00" in value:
        raise Unreadable(general=f"{name}: expected text of at most {most} characters")
    return value.strip()


def answers(book: Book, stated: Stated, sent: list[dict[str, Any]], now: dt.datetime) -> list[rules.Answer]:
    """The instant answers to lines as they were sent; the plain form asks for them, a tablet has them already."""
    out = []
    for line in sent:
        definition = walk.rules_of(book, stated, now, str(line.get("site", "")), str(line.get("parameter", "")))
        value, unit = str(line.get("value", "")), str(line.get("unit", ""))
        out.append(rules.answer(definition, value, unit, int(now.timestamp())) if definition else rules.Answer(rules.STOPPED))
    return out


def site_sent(parameter: str, unit: str) -> str:
    """Litres typed for a level are a volume; everything else is what it is called."""
    return "volume" if parameter == "level" and unit == "L" else parameter
