"""A batch of readings from a device: one Entry, through the same door as the tablet's, with an answer for every row.

What can be understood is taken, what can't is refused in words, row by row. A batch that was taken keeps its answer beside
it, so that sending it again gives the same answer and adds nothing.
"""

from __future__ import annotations

import datetime as dt
import json
import uuid
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.api import body
from plant.api.models import Token
from plant.api.problems import Problem
from plant.intake import actions, ground, lines, matching, records
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry
from plant.readings import marks
from plant.readings.models import Reading
from plant.works import actions as works_actions
from plant.works.stated import Stated

MOST_ROWS = 10_000
REQUIRED = ("site", "timestamp", "parameter", "value")
OPTIONAL = ("unit", "qualifier", "method", "by", "note", "sample", "statistic")
AHEAD = dt.timedelta(minutes=10)
"""A device's clock may be as far ahead as a tablet's (common practice, no source)."""

TAKEN, SAME, REFUSED = "taken", "same", "refused"


@dataclass(frozen=True)
class Answer:
    """What came of a batch. ``entry`` is None where nothing was new; ``rows`` hold one object a row, in order."""

    entry: Entry | None
    created: bool
    judged: bool
    rows: list[dict[str, Any]]

    def count(self, outcome: str) -> int:
        return sum(row["outcome"] == outcome for row in self.rows)


def take(*, token: Token, stated: Stated, ident: str, received: Any, now: dt.datetime) -> Answer:
    """Takes a batch into the book. Raises Problem: 422 (not a batch, or no row of it could be taken), 409 (other content)."""
    client_id = _client_id(ident)
    sent = _rows(received)
    book = token.book
    here = ground.Ground(stated, stated.calendar(now), history=records.history_of(book))
    found = [_read(row, place, here, token, now) for place, row in enumerate(sent)]
    taken, rows = _write(book, token, client_id, received, found, now)
    if taken is None:
        answer = Answer(None, False, True, rows)
        if answer.count(REFUSED):
            words = f"None of these {len(rows)} rows was new and could be taken; nothing is kept, and the id is free."
            raise Problem(422, words, taken=0, same=answer.count(SAME), refused=answer.count(REFUSED), rows=rows)
        return answer
    if not taken.created:
        return Answer(taken.entry, False, True, again(taken.entry))
    done = actions.judge_taken(book=book, taken=taken, by=None)
    return Answer(done.entry, True, done.judged, rows)


def _write(
    book: Book,
    token: Token,
    client_id: str,
    received: Any,
    found: list[lines.Taken | lines.Refusal],
    now: dt.datetime,
) -> tuple[actions.Taken | None, list[dict[str, Any]]]:
    understood = [one for one in found if isinstance(one, lines.Taken)]
    with transaction.atomic():
        works_actions.hold(book)
        repeated = actions.known(book, client_id)
        recall = matching.Recall(book, [] if repeated else [one.reading for one in understood], looking=True)
        fresh = [not repeated and recall.place(one) != matching.SAME for one in understood]
        readings = [one.reading for one, new in zip(understood, fresh, strict=True) if new]
        rows = _told(found, iter(fresh))
        if not (readings or repeated):
            return None, rows
        try:
            taken = actions.take(
                book=book,
                client_id=client_id,
                kind="api",
                received=received,
                rows=readings,
                by=None,
                now=now,
                device=token.name,
                attested="token",
                noted={"rows": [row for row in rows if row["outcome"] != TAKEN]},
                judge=False,
            )
        except ledger.ContentDiffers:
            raise Problem(409, "Another content has been sent under this id already. Take a new id for a new batch.") from None
    refs = iter([row.ref for row in taken.rows])
    for row in rows:
        if row["outcome"] == TAKEN:
            row["ref"] = next(refs, "")
    return taken, rows


def _told(found: list[lines.Taken | lines.Refusal], fresh: Any) -> list[dict[str, Any]]:
    out = []
    for place, one in enumerate(found):
        row: dict[str, Any] = {"row": place}
        if isinstance(one, lines.Refusal):
            row |= {"outcome": REFUSED, "field": one.field, "read": one.read[:200], "expected": one.expected}
        elif next(fresh):
            row |= {"outcome": TAKEN} | _doubts(one.reading.marks)
        else:
            row["outcome"] = SAME
        out.append(row)
    return out


def _doubts(found: list[str]) -> dict[str, Any]:
    return {"doubts": marks.in_words(found)} if found else {}


def again(entry: Entry) -> list[dict[str, Any]]:
    """The rows' answers to a batch that is in the book already, from what stands there."""
    payload = json.loads(entry.payload)
    told = {row["row"]: row for row in payload["noted"]["rows"]}
    kept = iter(enumerate(payload["rows"], start=1))
    out = []
    for place in range(len(payload["received"]["readings"])):
        if place in told:
            out.append(told[place])
        else:
            line, facts = next(kept)
            out.append({"row": place, "outcome": TAKEN} | _doubts(facts["marks"]) | {"ref": f"{entry.seq}.{line}"})
    return out


def _client_id(ident: str) -> str:
    try:
        return str(uuid.UUID(ident)) if len(ident) == 36 else _no_uuid()
    except ValueError:
        return _no_uuid()


def _no_uuid() -> str:
    raise Problem(422, "The id of a batch is a UUID that the sender makes, a new one for each batch.", parameter="batch")


def _rows(received: Any) -> list[Any]:
    if not isinstance(received, dict) or set(received) != {"readings"} or not isinstance(received["readings"], list):
        raise Problem(422, 'Expected an object with one name, "readings": a list.')
    sent = received["readings"]
    if not 1 <= len(sent) <= MOST_ROWS:
        raise Problem(422, f"{len(sent)} readings; expected 1 to {MOST_ROWS}.")
    return sent


def _read(row: Any, place: int, here: ground.Ground, token: Token, now: dt.datetime) -> lines.Taken | lines.Refusal:
    if not isinstance(row, dict):
        return lines.Refusal(place, _short(row), "an object", field="")
    for name in REQUIRED:
        if name not in row:
            return lines.Refusal(place, f"no {name}", name, field=name)
    cells = {}
    for name, cell in row.items():
        if name not in REQUIRED + OPTIONAL:
            return lines.Refusal(place, f"a field {_short(name)}", f"one of: {', '.join(REQUIRED + OPTIONAL)}", field=name[:80])
        # null is a value that was not taken; the note says why.
        fits = isinstance(cell, str) and not isinstance(cell, body.Digits)
        if not (fits or (name == "value" and (cell is None or isinstance(cell, body.Digits)))):
            expected = "a number, text or null" if name == "value" else "text"
            return lines.Refusal(place, f"{name} {_short(cell)}", expected, field=name)
        cells[name] = cell or ""
    found = lines.read_line(lines.Typed(**{"unit": "", "by": token.name, **cells}), here, line=place)
    if isinstance(found, lines.Taken) and _to_come(found.reading, here, now):
        read = f"timestamp {cells['timestamp'].strip()[:40]!r}"
        return lines.Refusal(place, read, "a time that is not still to come", field="timestamp")
    return found


def _to_come(reading: Reading, here: ground.Ground, now: dt.datetime) -> bool:
    if reading.date_only:
        return here.calendar.local(reading.taken_at).date() > here.calendar.local(now).date()
    return reading.taken_at > now + AHEAD


def _short(thing: Any) -> str:
    return json.dumps(thing, ensure_ascii=False)[:60]
