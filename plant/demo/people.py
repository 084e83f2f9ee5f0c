"""The people of the demo works. Names are invented; passwords are made at the first start and written down once."""

from __future__ import annotations

import datetime as dt
import os
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from plant.accounts import actions as accounts
from plant.accounts.models import Person
from plant.ledger.models import Book
from plant.works import actions as works


@dataclass(frozen=True)
class Role:
    """Somebody of the demo: sign-in name, full name, role, rights to sign, licence."""

    username: str
    full_name: str
    role: str
    may_prepare: bool = False
    may_certify: bool = False
    licence: tuple[str, str] = ("", "")


CAST = (
    Role("nora", "Nora Haugen", "operator", licence=("B-2207", "II")),
    Role("emil", "Emil Brandt", "operator", licence=("B-1954", "II")),
    Role("paula", "Paula Sievers", "supervisor", may_prepare=True, licence=("B-0871", "III")),
    Role("henrik", "Henrik Voss", "manager", may_prepare=True, may_certify=True, licence=("B-0412", "IV")),
    Role("lea", "Lea Winter", "inspector"),
    Role("arne", "Arne Kolb", "administrator"),
)
PEOPLE_FILE = "people.txt"


def add(*, now: dt.datetime) -> tuple[dict[str, Person], dict[str, str]]:
    """Adds the cast; people and passwords by sign-in name."""
    people, passwords = {}, {}
    for role in CAST:
        people[role.username], passwords[role.username] = accounts.add_person(
            username=role.username, full_name=role.full_name, by=None, now=now
        )
    return people, passwords


def join(*, book: Book, by: Any, now: dt.datetime) -> None:
    """Gives each of the cast a role at the demo works."""
    for role in CAST:
        works.set_membership(
            book=book,
            username=role.username,
            role=role.role,
            may_prepare=role.may_prepare,
            may_certify=role.may_certify,
            licence_number=role.licence[0],
            licence_class=role.licence[1],
            by=by,
            now=now,
            reason="demo works set up",
        )


def write_down(path: Path, passwords: dict[str, str]) -> None:
    """Names and passwords into a file only its owner can read."""
    lines = ["The people of the demo works:"]
    lines += [
        f"  {role.username:<8} {passwords[role.username]}   {role.full_name}, {role.role}"
        + (", certifies reports" if role.may_certify else ", prepares reports" if role.may_prepare else "")
        for role in CAST
    ]
    descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
    with os.fdopen(descriptor, "w", encoding="utf-8") as file:
        file.write("\n".join(lines) + "\n")
