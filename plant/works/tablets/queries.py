"""Reads about shared tablets that several pages need."""

from __future__ import annotations

import datetime as dt
import json
import uuid
from dataclasses import dataclass

from django.db.models import Max

from plant.accounts.models import Person
from plant.ledger.models import Book, Entry
from plant.works import access
from plant.works.stated import Stated
from plant.works.tablets.models import Confirmation, Device, Pin, Spell, Tries


@dataclass(frozen=True)
class Seen:
    """A device and when it last sent something."""

    device: Device
    last_sent: dt.datetime | None


@dataclass(frozen=True)
class Hand:
    """Somebody who enters readings here, as a tablet lists them."""

    username: str
    name: str
    has_pin: bool = False
    pin_set_at: dt.datetime | None = None
    locked_until: dt.datetime | None = None


def devices(book: Book) -> list[Seen]:
    """All tablets a works has enrolled, those in use first."""
    sent = dict(
        Entry.objects.filter(book=book).exclude(device="").values_list("device").annotate(last=Max("recorded_at")).order_by()
    )
    found = Device.objects.filter(book=book).select_related("enrolled_by", "revoked_by").order_by("name")
    return sorted((Seen(one, sent.get(one.name)) for one in found), key=lambda seen: seen.device.revoked_at is not None)


def hands(book: Book, stated: Stated, now: dt.datetime) -> list[Hand]:
    """Everybody who may enter readings, by name."""
    usernames = [
        username
        for username in stated.subjects("membership")
        if (who := access.member(stated, username, now)) is not None and who.may("round.enter")
    ]
    pins = {pin.person_id: pin for pin in Pin.objects.filter(book=book)}
    locked = dict(Tries.objects.filter(book=book, locked_until__gt=now).values_list("person_id", "locked_until"))
    people = Person.objects.filter(username__in=usernames, is_active=True)
    return sorted(
        (
            Hand(
                one.username,
                one.display_name,
                one.pk in pins,
                pins[one.pk].set_at if one.pk in pins else None,
                locked.get(one.pk),
            )
            for one in people
        ),
        key=lambda hand: hand.name,
    )


def attested(device: Device, person: Person, spell: str) -> str:
    """How the person of an entry from a tablet is attested: pin where the spell has been proved, claimed otherwise."""
    try:
        ident = uuid.UUID(spell)
    except ValueError:
        return "claimed"
    return "pin" if Spell.objects.filter(device=device, ident=ident, person=person).exists() else "claimed"


def in_words(entry: Entry) -> str:
    """How the person behind an entry was attested, in words; "" for a full sign-in or a file."""
    if entry.attested == "pin":
        return f"name and PIN at {entry.device}"
    if entry.attested != "claimed" or entry.recorded_by is None:
        return ""
    rows = Confirmation.objects.filter(book=entry.book_id, person=entry.recorded_by.username, device=entry.device)
    for row in rows.order_by("seq"):
        if entry.seq in row.entries:
            return f"name chosen at {entry.device}, confirmed by PIN afterwards"
    return f"name chosen at {entry.device}, PIN owed"


def clock_in_words(entry: Entry) -> str:
    """What is to be said about the device's clock behind an entry: only where it was far off."""
    if '"clock_flagged":true' not in entry.payload:
        return ""
    off_s = json.loads(entry.payload)["noted"]["clock_off_s"]
    size = f"{abs(off_s) / 3600:.0f} h" if abs(off_s) >= 5400 else f"{abs(off_s) / 60:.0f} min"
    return f"the device’s clock was {size} {'fast' if off_s > 0 else 'slow'}"
