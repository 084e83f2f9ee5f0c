"""Every write of a person. What a person may do at a works is stated by that works."""

from __future__ import annotations

import datetime as dt
import logging
import secrets
from typing import Any

from django.contrib.auth import password_validation
from django.core.exceptions import ValidationError
from django.db import transaction

from plant import clock
from plant.accounts import security
from plant.accounts.models import Person

logger = logging.getLogger(__name__)

# No letters or figures that are easily taken for one another on paper.
_SIGNS = "abcdefghijkmnpqrstuvwxyzACDEFGHJKLMNPQRTUVWXYZ2346789"


class PersonRefused(ValueError):
    """A person that can't be added; the message says why."""


def new_password() -> str:
    """A password of three groups of five signs, about 85 bits."""
    return "-".join("".join(secrets.choice(_SIGNS) for _ in range(5)) for _ in range(3))


def add_person(
    *,
    username: str,
    full_name: str,
    by: Any,
    now: dt.datetime,
    password: str | None = None,
    opens_works: bool = False,
) -> tuple[Person, str]:
    """Adds a person and returns it with the password, to be handed over once.

    ``opens_works``: may load the first file of a new works and is its first administrator. Raises PersonRefused.
    """
    first, _, last = full_name.strip().partition(" ")
    person = Person(username=username, first_name=first, last_name=last.strip(), is_superuser=opens_works)
    person.date_joined = now
    given = password or new_password()
    try:
        person.clean_fields(exclude=["password"])
        password_validation.validate_password(given, person)
    except ValidationError as problem:
        raise PersonRefused("; ".join(problem.messages)) from None
    person.set_password(given)
    with transaction.atomic():
        if Person.objects.filter(username__iexact=username).exists():
            raise PersonRefused(f"there is a person named {username} already")
        person.save()
        security.record(kind=security.Kind.PERSON_ADDED, now=now, person=person, by=by)
    logger.info("person added", extra={"person": person.pk, "by": getattr(by, "pk", None)})
    return person, given


def give_new_password(*, person: Person, by: Any, now: dt.datetime | None = None) -> str:
    """Replaces a forgotten password; the old one and all sessions under it end."""
    given = new_password()
    person.set_password(given)
    with transaction.atomic():
        person.save(update_fields=["password"])
        security.record(kind=security.Kind.PASSWORD_REPLACED, now=now or clock.now(), person=person, by=by)
    logger.info("password replaced", extra={"person": person.pk, "by": getattr(by, "pk", None)})
    return given
