"""Who belongs to a works: read for the people page, and the use case of adding somebody."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Any

from django.db import transaction

from plant.accounts import actions as accounts
from plant.accounts.models import Person
from plant.ledger.models import Book
from plant.works import access, actions
from plant.works.stated import Saying, Stated


@dataclass(frozen=True)
class Belonging:
    """One person at one works. ``member`` None: no longer."""

    username: str
    full_name: str
    member: access.Member | None
    since: dt.datetime
    reason: str


def belonging(stated: Stated, now: dt.datetime) -> list[Belonging]:
    """Everybody who belongs to a works or once did, members first."""
    usernames = stated.subjects("membership")
    names = {person.username: person.display_name for person in Person.objects.filter(username__in=usernames)}
    found = []
    for username in usernames:
        saying = stated.saying("membership", username, now)
        if saying is not None:
            member = access.member(stated, username, now)
            found.append(Belonging(username, names.get(username, username), member, saying.effective_from, saying.reason))
    return sorted(found, key=lambda item: (item.member is None, item.username))


def changes(stated: Stated, username: str) -> tuple[Saying, ...]:
    """All that was ever stated of a person here."""
    return stated.history("membership", username)


def add(
    *, book: Book, username: str, full_name: str, by: Any, now: dt.datetime, **membership: Any
) -> tuple[Person, str | None]:
    """Makes somebody a member; adds the person where the name is new, then with a password to hand over.

    Raises accounts.PersonRefused, actions.Refused; then nothing has been written.
    """
    with transaction.atomic():
        person = Person.objects.filter(username=username).first()
        password = None
        if person is None:
            person, password = accounts.add_person(username=username, full_name=full_name, by=by, now=now)
        actions.set_membership(book=book, username=person.username, by=by, now=now, **membership)
    return person, password
