"""The people of the tests and a small works for them to stand in.

olga the operator, sam the supervisor (prepares), mira the manager (certifies), ira the inspector, adam the
administrator; stan belongs nowhere. All have the password PASSWORD.

    def test_x(db):
        works = people.small_works()          # a book with everyone in it
        client = people.signed_in("olga")     # a test client
"""

from __future__ import annotations

import datetime as dt
from pathlib import Path

from django.test import Client

from plant.accounts.models import Person
from plant.ledger.models import Book
from plant.works import actions, load

PASSWORD = "water over the weir 7"
ROLES = {
    "olga": ("operator", "Olga Ottesen"),
    "sam": ("supervisor", "Sam Sundby"),
    "mira": ("manager", "Mira Maas"),
    "ira": ("inspector", "Ira Ives"),
    "adam": ("administrator", "Adam Arendt"),
}
OPENED = dt.datetime(2026, 1, 1, 5, 0, tzinfo=dt.UTC)
SMALL = Path(__file__).parent / "works" / "data" / "small.toml"
"""A works of three products: hypochlorite, caustic, peroxide. Code TST, Europe/Berlin, days from 07:00."""


def person(username: str) -> Person:
    """The person of this name, made where there is none."""
    found = Person.objects.filter(username=username).first()
    if found is None:
        first, _, last = ROLES.get(username, ("", "Stan Stranger"))[1].partition(" ")
        found = Person.objects.create_user(
            username, password=PASSWORD, first_name=first, last_name=last, email=f"{username}@example.org"
        )
    return found


def join(book: Book, *usernames: str, now: dt.datetime = OPENED) -> None:
    """Gives people their roles at a works; without names everyone but stan."""
    for username in usernames or tuple(ROLES):
        person(username)
        role = ROLES[username][0]
        actions.set_membership(
            book=book,
            username=username,
            role=role,
            may_prepare=username in ("sam", "mira"),
            may_certify=username == "mira",
            licence_number="L-1001" if username in ("sam", "mira") else "",
            licence_class="III" if username in ("sam", "mira") else "",
            by=None,
            now=now,
            reason="test",
        )


def open_works(toml: str | bytes, *, now: dt.datetime = OPENED) -> Book:
    """The book of a works described by the text of a works file, without people."""
    data = toml.encode() if isinstance(toml, str) else toml
    return load.load(data=data, by=None, now=now, source="test").book


def small_works(*, now: dt.datetime = OPENED) -> Book:
    """The small works with everyone in it."""
    book = open_works(SMALL.read_bytes(), now=now)
    join(book, now=now)
    person("stan")
    return book


def signed_in(username: str) -> Client:
    """A client signed in as this person."""
    client = Client()
    client.force_login(person(username), backend="django.contrib.auth.backends.ModelBackend")
    return client
