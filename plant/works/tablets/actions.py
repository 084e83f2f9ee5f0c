"""Every write about shared tablets."""

from __future__ import annotations

import datetime as dt
import hashlib
import json
import secrets
import uuid
from dataclasses import dataclass
from typing import Any

from django.contrib.auth.hashers import check_password, make_password
from django.db import IntegrityError, transaction

from plant.accounts.models import Person
from plant.ledger import actions as ledger
from plant.ledger.models import Book, Entry
from plant.works import access
from plant.works.stated import Stated
from plant.works.tablets import pins
from plant.works.tablets.models import Confirmation, Device, Pin, Spell, Tries


class Refused(ValueError):
    """What was asked for can't be; the message says why."""


@dataclass(frozen=True)
class Proof:
    """What came of a PIN. ``confirmed`` counts earlier entries under the claimed name; ``locked_until`` pauses more tries."""

    right: bool
    confirmed: int = 0
    locked_until: dt.datetime | None = None
    no_pin: bool = False


def digest(token: str) -> str:
    """How a device's token is kept."""
    return hashlib.sha256(token.encode()).hexdigest()


def enrol(*, book: Book, name: str, by: Any, now: dt.datetime) -> tuple[Device, str]:
    """A new device of a works and the token for its cookie, which is kept nowhere else. Raises Refused."""
    name = " ".join(name.split())
    if not name or len(name) > 40:
        raise Refused("Give the tablet a name of at most 40 characters, the one written on its back.")
    token = secrets.token_urlsafe(32)
    try:
        with transaction.atomic():
            made = Device.objects.create(book=book, name=name, token_hash=digest(token), enrolled_by=by, enrolled_at=now)
    except IntegrityError:
        raise Refused(f"There is, or was, a tablet named {name} here already: take another name.") from None
    return made, token


def revoke(*, device: Device, why: str, by: Any, now: dt.datetime) -> None:
    """The device is refused from now on; what it has sent stays. Raises Refused."""
    if not why.strip():
        raise Refused("Say why: lost, broken, replaced …")
    Device.objects.filter(pk=device.pk, revoked_at=None).update(revoked_by=by, revoked_at=now, revoked_why=why.strip()[:200])


def set_pin(*, book: Book, person: Any, pin: str, by: Any, now: dt.datetime) -> None:
    """A person's PIN at the tablets of a works; a pause after wrong tries ends. Raises pins.Unfit."""
    kept = make_password(pins.check(pin))
    with transaction.atomic():
        Pin.objects.update_or_create(book=book, person=person, defaults={"digest": kept, "set_by": by, "set_at": now})
        Tries.objects.filter(book=book, person=person).delete()


def prove(*, device: Device, stated: Stated, username: str, spell: str, pin: str, now: dt.datetime) -> Proof:
    """Checks a PIN for a spell at a tablet, and confirms what was entered in it before under the claimed name.

    A pause after wrong tries refuses even the right PIN; it never stops entry. Raises Refused.
    """
    ident = _uuid(spell)
    person = holder(stated, username, now)
    book = device.book
    kept = Pin.objects.filter(book=book, person=person).first()
    if kept is None:
        return Proof(False, no_pin=True)
    tries, _ = Tries.objects.get_or_create(book=book, person=person)
    if tries.locked_until is not None and now < tries.locked_until:
        return Proof(False, locked_until=tries.locked_until)
    # Outside any transaction: the hash is slow on purpose, and the book must not wait for it.
    if not check_password(pin, kept.digest):
        return Proof(False, locked_until=_one_more_wrong(tries, now))
    with transaction.atomic():
        Tries.objects.filter(pk=tries.pk).update(wrong=0, locked_until=None)
        made, _ = Spell.objects.get_or_create(device=device, ident=ident, defaults={"person": person, "proved_at": now})
        if made.person_id != person.pk:
            raise Refused("This spell at the tablet belongs to somebody else.")
        return Proof(True, _confirm(device, person, str(ident), now))


def holder(stated: Stated, username: str, now: dt.datetime) -> Person:
    """Somebody who enters rounds here now. Raises Refused."""
    who = access.member(stated, username, now)
    person = Person.objects.filter(username=username, is_active=True).first()
    if who is None or not who.may("round.enter") or person is None:
        raise Refused("Nobody of this name enters readings here.")
    return person


def _one_more_wrong(tries: Tries, now: dt.datetime) -> dt.datetime | None:
    with transaction.atomic():
        held = Tries.objects.select_for_update().get(pk=tries.pk)
        held.wrong += 1
        if held.wrong >= pins.TRIES:
            held.wrong, held.locked_until = 0, now + dt.timedelta(minutes=pins.LOCKED_MINUTES)
        held.save()
    return held.locked_until if held.locked_until is not None and now < held.locked_until else None


def _confirm(device: Device, person: Person, spell: str, now: dt.datetime) -> int:
    """Writes down which claimed entries of this spell the PIN stands for; none twice."""
    Book.objects.select_for_update().get(pk=device.book_id)
    # The tablet's name is on the entry, the spell in what it sent; both must fit.
    claimed = Entry.objects.filter(book=device.book, recorded_by=person, device=device.name, attested="claimed")
    done = {
        seq
        for row in Confirmation.objects.filter(book=device.book, person=person.username, device=device.name)
        for seq in row.entries
    }
    seqs = [
        entry.seq
        for entry in claimed.exclude(seq__in=done).order_by("seq")
        if json.loads(entry.payload)["received"].get("spell") == spell
    ]
    if seqs:
        row = Confirmation(device=device.name, person=person.username, spell=spell, entries=seqs, confirmed_at=now)
        ledger.append(
            book=device.book,
            client_id=f"confirm {spell} {seqs[0]}",
            kind="attestation",
            received={"spell": spell, "entries": seqs},
            rows=[row],
            by=person,
            now=now,
            device=device.name,
            attested="pin",
        )
    return len(seqs)


def _uuid(text: str) -> uuid.UUID:
    try:
        return uuid.UUID(text)
    except (ValueError, AttributeError, TypeError):
        raise Refused("The spell at the tablet has no proper id.") from None
