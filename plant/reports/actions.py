"""Preparing, certifying and issuing. Each signature is given by entering the password again; an issue is never changed."""

from __future__ import annotations

import datetime as dt
import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.ledger import actions as ledger
from plant.ledger import canonical
from plant.ledger.models import Book
from plant.reports import checklist, content, queries
from plant.reports.models import Preparation, Report, ReportFile
from plant.reports.month import Month, gather
from plant.reports.parts import revision as revision_part
from plant.works import access
from plant.works import queries as works

PREPARED, CERTIFIED = "report.sign_prepared", "report.sign_certified"
GIVEN_AGAIN = "Signed by entering the password again"
NAMED_AT_SHELL = "Named at the shell; no password was entered"


class MayNotSign(PermissionError):
    """The person has no right to this signature at this works."""


class WrongPassword(PermissionError):
    """The password entered is not that of the person signed in."""


class NotReady(ValueError):
    """Something hinders; ``open_items`` says what is neither mended nor explained."""

    def __init__(self, open_items: Sequence[checklist.Hindrance]) -> None:
        self.open_items = tuple(open_items)
        super().__init__("; ".join(item.words for item in open_items))


class NotPrepared(ValueError):
    """Nobody has prepared this month, or what was prepared has changed since."""


class ReasonMissing(ValueError):
    """A revision says why."""


@dataclass(frozen=True)
class Issued:
    """The report; ``created`` is False when it had been issued before and nothing has changed."""

    report: Report
    created: bool


def prepare(
    *,
    book: Book,
    year: int,
    month: int,
    by: Any,
    password: str,
    explanations: dict[str, str],
    now: dt.datetime,
) -> Preparation:
    """Signs a month as prepared, as known now. ``explanations`` are by the key of what hinders.

    Raises MayNotSign, WrongPassword, NotReady, month.NoSuchMonth.
    """
    member = _signer(book, by, password, PREPARED, now)
    gathered = gather(book, year, month, now=now)
    open_items = checklist.of(gathered)
    lacking = [item for item in open_items if item.must or not explanations.get(item.key, "").strip()]
    if lacking:
        raise NotReady(lacking)
    kept = {item.key: {"open": item.words, "why": explanations[item.key].strip()} for item in open_items}
    row = Preparation(
        month=gathered.code,
        known_seq=gathered.known,
        figures_hash=content.figures_hash(content.sections(gathered)),
        prepared_by=by,
        prepared_name=by.display_name,
        prepared_licence=_licence(member),
        prepared_at=now,
        explanations=kept,
    )
    appended = ledger.append(
        book=book,
        client_id=f"prepare {gathered.code} {by.pk} {canonical.digest([gathered.known, kept])[:24]}",
        kind="report.prepare",
        received={"month": gathered.code, "explanations": kept, "known_seq": gathered.known},
        rows=[row],
        by=by,
        now=now,
    )
    if not appended.created:
        return Preparation.objects.get(entry=appended.entry)
    return row


def certify_and_issue(
    *,
    book: Book,
    year: int,
    month: int,
    by: Any,
    password: str,
    now: dt.datetime,
    reason: str = "",
) -> Issued:
    """Certifies what was prepared, and issues it. Asking twice gives the one report.

    Raises MayNotSign, WrongPassword, NotPrepared, ReasonMissing (a revision needs one).
    """
    member = _signer(book, by, password, CERTIFIED, now)
    code = f"{year:04d}-{month:02d}"
    prepared = queries.preparation(book, code)
    previous = queries.latest(book, code)
    if prepared is None:
        if previous is not None:
            return Issued(previous, False)
        raise NotPrepared("Nobody has prepared this month yet.")
    gathered = gather(
        book,
        year,
        month,
        now=now,
        known=prepared.known_seq,
        unchanged=_unchanged(book, year, month, prepared, now),
        explanations=prepared.explanations,
    )
    found = content.sections(gathered)
    if content.figures_hash(found) != prepared.figures_hash:
        raise NotPrepared("What was prepared cannot be computed again to the same figures: prepare the month again.")
    signed = (
        content.Signed("Prepared by", prepared.prepared_name, prepared.prepared_licence, prepared.prepared_at, GIVEN_AGAIN),
        content.Signed("Certified by", by.display_name, _licence(member), now, GIVEN_AGAIN),
    )
    return _issue(
        gathered,
        found,
        signed=signed,
        previous=previous,
        reason=reason,
        now=now,
        by=by,
        manner="signed",
        people={"prepared_by": prepared.prepared_by, "certified_by": by},
    )


def _unchanged(book: Book, year: int, month: int, prepared: Preparation, now: dt.datetime) -> bool:
    """True when nothing recorded since the preparation touches the month. Raises NotPrepared when something does."""
    current = gather(book, year, month, now=now)
    later = queries.changes.since(
        book, current.start - queries.changes.BOUNDARY, current.end + queries.changes.BOUNDARY, after=prepared.known_seq
    )
    inside = [change for change in later if current.start <= change.of < current.end]
    if inside:
        raise NotPrepared(
            f"{len(inside)} record{'s' if len(inside) != 1 else ''} or settings of the month became known after it was "
            "prepared, the first: "
            f"{inside[0].what}. Prepare the month again."
        )
    return not later


def issue_from_shell(
    *,
    book: Book,
    year: int,
    month: int,
    now: dt.datetime,
    prepared_by: Any = None,
    certified_by: Any = None,
    reason: str = "",
) -> Issued:
    """Issues a month from the command line. The cover says that nobody signed, or who was named without a password.

    A second call gives the one report, unless something has changed: then a revision. Raises NotReady (the month is not
    over), MayNotSign, month.NoSuchMonth.
    """
    gathered = gather(book, year, month, now=now)
    open_items = checklist.of(gathered)
    if not gathered.over:
        raise NotReady([item for item in open_items if item.key == "not-over"])
    gathered.explanations.update(
        {item.key: {"open": item.words, "why": ""} for item in open_items if item.key != "nobody-certifies"}
    )
    signed = (
        _named(book, prepared_by, "Prepared by", PREPARED, now),
        _named(book, certified_by, "Certified by", CERTIFIED, now),
    )
    found = content.sections(gathered)
    previous = queries.latest(book, gathered.code)
    if previous is not None:
        since = queries.changed_since_issue(previous, gathered, found)
        if not since.anything:
            return Issued(previous, False)
    return _issue(
        gathered,
        found,
        signed=signed,
        previous=previous,
        reason=reason or "records of the month changed since its issue",
        now=now,
        by=None,
        manner="shell",
        people={"prepared_by": prepared_by, "certified_by": certified_by},
    )


def _issue(
    month: Month,
    found: tuple[Any, ...],
    *,
    signed: tuple[content.Signed, content.Signed],
    previous: Report | None,
    reason: str,
    now: dt.datetime,
    by: Any,
    manner: str,
    people: dict[str, Any],
) -> Issued:
    number = 1 if previous is None else previous.revision + 1
    first: list[Any] = []
    if previous is not None:
        if not reason.strip():
            raise ReasonMissing("A revision says why it is made.")
        since = queries.changed_since_issue(previous, month, found)
        first = [
            revision_part.section(
                month, revision=number, reason=reason.strip(), found=list(since.found), moved=list(since.moved)
            )
        ]
    made = content.whole(month, found, revision=number, issued_at=now, signed=signed, first=first)
    text = content.to_json(made)
    # Rendered before the book is held: nothing slow runs while others wait to write.
    pdf = content.render(made)
    row = Report(
        month=month.code,
        number=content.number_of(month),
        revision=number,
        known_seq=month.known,
        head_hash=content.head_hash(month),
        renderer=content.paper.RENDERER,
        content_hash=hashlib.sha256(text.encode()).hexdigest(),
        pdf_hash=hashlib.sha256(pdf).hexdigest(),
        prepared_name=signed[0].name,
        prepared_licence=signed[0].licence,
        prepared_at=signed[0].at,
        certified_name=signed[1].name,
        certified_licence=signed[1].licence,
        issued_at=now,
        manner=manner,
        explanations=month.explanations,
        supersedes=previous,
        reason=reason.strip() if previous is not None else "",
        **people,
    )
    received = {"month": month.code, "revision": number, "content_hash": row.content_hash, "pdf_hash": row.pdf_hash}
    try:
        with transaction.atomic():
            appended = ledger.append(
                book=month.book,
                client_id=f"report {month.code} revision {number}",
                kind="report.issue",
                received=received,
                rows=[row],
                by=by,
                now=now,
            )
            if appended.created:
                ReportFile.objects.create(report=row, content=text, pdf=pdf)
    except ledger.ContentDiffers:
        # Somebody else issued this revision in the same moment; theirs is the one.
        appended = None
    if appended is None or not appended.created:
        return Issued(Report.objects.get(book=month.book, month=month.code, revision=number), False)
    return Issued(row, True)


def _signer(book: Book, by: Any, password: str, permission: str, now: dt.datetime) -> access.Member:
    member = access.member(works.stated(book), by.get_username(), now)
    if member is None or not member.may(permission):
        what = "prepared" if permission == PREPARED else "certified"
        raise MayNotSign(f"{by.display_name} has no right to sign “{what}” at this works.")
    if not by.check_password(password):
        raise WrongPassword("That is not your password. Nothing was signed.")
    return member


def _named(book: Book, person: Any, meaning: str, permission: str, now: dt.datetime) -> content.Signed:
    if person is None:
        return content.Signed(meaning)
    member = access.member(works.stated(book), person.get_username(), now)
    if member is None or not member.may(permission):
        raise MayNotSign(f"{person.display_name} has no right to this signature ({meaning.lower()}) at this works.")
    return content.Signed(meaning, person.display_name, _licence(member), now, NAMED_AT_SHELL)


def _licence(member: access.Member) -> str:
    number = f"Licence {member.licence_number}" if member.licence_number else ""
    return ", ".join(part for part in (number, f"class {member.licence_class}" if member.licence_class else "") if part)
