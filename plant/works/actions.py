"""Every write of what is stated of a works."""

from __future__ import annotations

import datetime as dt
import uuid
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry
from plant.works import blocks, models, picture, queries
from plant.works.stated import Saying, Stated

_FAR = 2**62


@dataclass(frozen=True)
class Change:
    """One statement to be made. ``value`` has no keys that name the subject; a withdrawal needs none."""

    kind: str
    subject: str
    value: dict[str, Any]
    effective_from: dt.datetime
    withdrawn: bool = False
    reason: str = ""


class Refused(ValueError):
    """What was to be stated can't be; nothing has been written.

    ``problems`` are (index of the change, sentence), in the order of the changes.
    """

    def __init__(self, problems: list[tuple[int, str]]) -> None:
        self.problems = sorted(problems)
        super().__init__("; ".join(message for _, message in self.problems))

    @property
    def messages(self) -> list[str]:
        return [message for _, message in self.problems]


class Overtaken(ValueError):
    """Somebody has stated something of the same subject since the form was opened."""


def state(
    *,
    book: Book,
    kind: str,
    subject: str,
    value: dict[str, Any],
    effective_from: dt.datetime,
    reason: str,
    by: Any,
    now: dt.datetime,
    withdrawn: bool = False,
    seen: str | None = None,
) -> models.Statement:
    """States one thing of a works. Returns the statement.

    ``seen`` is the ref of the subject's last statement as the person saw it ("" for none; None: not asked).
    Raises Refused, Overtaken.
    """
    change = Change(kind, subject, value, effective_from, withdrawn, reason)
    with transaction.atomic():
        hold(book)
        if seen is not None:
            _refuse_overtaken(book, kind, subject, seen)
        return state_many(book=book, changes=[change], by=by, now=now)[1][0]


def state_many(
    *,
    book: Book,
    changes: Sequence[Change],
    by: Any,
    now: dt.datetime,
    entry_kind: str = "settings",
    received: Any = None,
    reason: str = "",
) -> tuple[Entry, list[models.Statement]]:
    """States many things as one entry: all of them or none, checked against the whole resulting picture.

    ``received`` is what came in as it came (a file's text); by default the changes. Raises Refused.
    """
    with transaction.atomic():
        hold(book)
        clean = checked(queries.stated(book), changes)
        rows = [
            models.Statement(
                kind=change.kind,
                subject=change.subject,
                value=change.value,
                effective_from=change.effective_from,
                withdrawn=change.withdrawn,
                reason=change.reason or reason,
            )
            for change in clean
        ]
        if received is None:
            received = [
                {
                    "kind": change.kind,
                    "subject": change.subject,
                    "value": change.value,
                    "effective_from": change.effective_from,
                    "withdrawn": change.withdrawn,
                }
                for change in clean
            ]
        done = ledger.append(
            book=book,
            client_id=str(uuid.uuid4()),
            kind=entry_kind,
            received=received,
            rows=rows,
            by=by,
            now=now,
        )
        return done.entry, rows


def hold(book: Book) -> None:
    """Holds the book's head until the transaction ends: what was looked at still holds when it is written."""
    Book.objects.select_for_update().get(pk=book.pk)


def checked(stated: Stated, changes: Sequence[Change]) -> list[Change]:
    """The changes with their values cleaned. Raises Refused when a block or the resulting picture is wrong.

    The picture is looked at wherever a change comes into force and wherever anything changes later. What did
    not fit before is nobody's fault here and doesn't count.
    """
    problems: list[tuple[int, str]] = []
    clean: list[Change] = []
    for index, change in enumerate(changes):
        try:
            value = {} if change.withdrawn else blocks.check(change.kind, change.subject, change.value)
        except blocks.BlockError as problem:
            problems += [(index, message) for message in problem.messages]
        else:
            clean.append(Change(change.kind, change.subject, value, change.effective_from, change.withdrawn, change.reason))
    if problems:
        raise Refused(problems)
    after = stated.adding(
        Saying(item.kind, item.subject, item.effective_from, item.value, item.withdrawn, _FAR, line, item.reason)
        for line, item in enumerate(clean)
    )
    indexes = {(item.kind, item.subject): index for index, item in reversed(list(enumerate(clean)))}
    told: set[tuple[str, str, str]] = set()
    for moment in _moments(after, clean):
        before = {(item.kind, item.subject, item.message) for item in picture.misfits(stated, moment)}
        for misfit in picture.misfits(after, moment):
            key = (misfit.kind, misfit.subject, misfit.message)
            if key in told or key in before:
                continue
            told.add(key)
            found = indexes.get(key[:2])
            own = found is not None and (moment == clean[found].effective_from or moment.year < 1950)
            words = misfit.message if own else f"{misfit.message} (from {moment:%Y-%m-%d %H:%M} UTC)"
            name = "" if found is not None else f"{misfit.kind.replace('_', ' ')} {misfit.subject}: "
            problems.append((len(clean) if found is None else found, name + words))
    if problems:
        raise Refused(problems)
    return clean


def _moments(stated: Stated, changes: Sequence[Change]) -> list[dt.datetime]:
    if not changes:
        return []
    earliest = min(change.effective_from for change in changes)
    later = {saying.effective_from for saying in stated.changes(earliest, dt.datetime.max.replace(tzinfo=dt.UTC))}
    return sorted(later)


def _refuse_overtaken(book: Book, kind: str, subject: str, seen: str) -> None:
    last = models.Statement.objects.filter(book=book, kind=kind, subject=subject).order_by("-seq", "-line")
    newest = last.select_related("entry__recorded_by").first()
    if newest is not None and newest.ref != seen:
        who = newest.entry.recorded_by or "the command line"
        at = f"{newest.entry.recorded_at:%Y-%m-%d %H:%M} UTC"
        raise Overtaken(
            f"{who} has stated {kind.replace('_', ' ')} {subject} at {at}, after this page was opened. "
            "Look at what holds now, then state yours."
        )


def set_membership(
    *,
    book: Book,
    username: str,
    role: str,
    by: Any,
    now: dt.datetime,
    reason: str,
    may_prepare: bool = False,
    may_certify: bool = False,
    licence_number: str = "",
    licence_class: str = "",
) -> models.Statement:
    """Gives a person a role at a works from now on, with or without the right to sign. Raises Refused."""
    value: dict[str, Any] = {"role": role, "may_prepare": may_prepare, "may_certify": may_certify}
    value |= {"licence_number": licence_number} if licence_number else {}
    value |= {"licence_class": licence_class} if licence_class else {}
    return state(
        book=book,
        kind="membership",
        subject=username,
        value=value,
        effective_from=now,
        reason=reason,
        by=by,
        now=now,
    )


def end_membership(*, book: Book, username: str, by: Any, now: dt.datetime, reason: str) -> models.Statement:
    """Ends a person's membership from now on. What the person has recorded stays."""
    return state(
        book=book,
        kind="membership",
        subject=username,
        value={},
        effective_from=now,
        reason=reason,
        by=by,
        now=now,
        withdrawn=True,
    )
