"""The record of sign-ins, the brakes on guessing, and the second factor."""

from __future__ import annotations

import base64
import datetime as dt
import hashlib
import secrets
from typing import Any

from axes.helpers import get_client_ip_address
from cryptography.fernet import Fernet, InvalidToken, MultiFernet
from cryptography.hazmat.primitives.hashes import SHA256
from cryptography.hazmat.primitives.kdf.hkdf import HKDF
from django.conf import settings
from django.db import transaction
from django.http import HttpRequest

from plant.accounts import totp
from plant.accounts.models import Person, SecondFactor, SecurityEvent

Kind = SecurityEvent.Kind
WINDOW = dt.timedelta(minutes=15)
MOST_REFUSED_FROM_ADDRESS = 30
"""Wrong sign-ins from one address, over all names, in a quarter of an hour: a works' own office stays far below."""
MOST_CODES_REFUSED = 5
"""Wrong codes of one person in a quarter of an hour: of a million codes three count at a time, so guessing takes years."""
RECOVERY_CODES = 8


class Refused(ValueError):
    """The message says why, to the person."""


# The record --------------------------------------------------------------------------------------------------


def record(*, kind: str, now: dt.datetime, person: Any = None, by: Any = None, request: HttpRequest | None = None) -> None:
    """Adds one event."""
    known = person if isinstance(person, Person) and person.pk else None
    doer = by if isinstance(by, Person) else None
    SecurityEvent.objects.create(at=now, kind=kind, person=known, by=doer, address=came_from(request))


def came_from(request: HttpRequest | None) -> str:
    """The address of the browser, as the proxy saw it."""
    return str(get_client_ip_address(request) or "")[:45] if request is not None else ""


def events(*, since: dt.datetime, username: str = "") -> list[SecurityEvent]:
    """Events since a moment, oldest first, of one person or of all."""
    found = SecurityEvent.objects.filter(at__gte=since).select_related("person", "by").order_by("at", "pk")
    return list(found.filter(person__username=username) if username else found)


# Brakes ------------------------------------------------------------------------------------------------------


def address_must_wait(request: HttpRequest, now: dt.datetime) -> bool:
    """Whether too many wrong sign-ins have come from this address of late, whatever names they tried."""
    refused = SecurityEvent.objects.filter(
        address=came_from(request), at__gt=now - WINDOW, kind__in=[Kind.REFUSED, Kind.LOCKED_OUT, Kind.CODE_REFUSED]
    )
    # One switch turns off both brakes on guessing.
    return getattr(settings, "AXES_ENABLED", True) and refused.count() >= MOST_REFUSED_FROM_ADDRESS


def refused(*, username: str, request: HttpRequest, now: dt.datetime) -> None:
    """Records a wrong sign-in, or one that came while this name was locked."""
    person = Person.objects.filter(username=username).first() if len(username) <= 150 else None
    locked = bool(getattr(request, "axes_locked_out", False))
    record(kind=Kind.LOCKED_OUT if locked else Kind.REFUSED, now=now, person=person, request=request)


# The second factor -------------------------------------------------------------------------------------------


def has_second_factor(person: Any) -> bool:
    """Whether this person signs in with a code as well."""
    return SecondFactor.objects.filter(person=person, confirmed_at__isnull=False).exists()


def offer(*, person: Person) -> bytes:
    """A new secret for a person to take over into a telephone; it counts once a code of it was given.

    Raises Refused where one is in use already.
    """
    if has_second_factor(person):
        raise Refused("A second factor is in use already; remove it first.")
    secret = totp.new_secret()
    SecondFactor.objects.update_or_create(
        person=person, defaults={"sealed_secret": _seal(secret), "confirmed_at": None, "last_step": -1, "recovery_digests": []}
    )
    return secret


def offered(person: Person) -> bytes | None:
    """The secret that waits for its first code."""
    waiting = SecondFactor.objects.filter(person=person, confirmed_at__isnull=True).first()
    return None if waiting is None else _unseal(waiting.sealed_secret)


def confirm(*, person: Person, code: str, now: dt.datetime, request: HttpRequest | None = None) -> list[str]:
    """Takes the second factor into use with a first code. Returns recovery codes, to be shown once. Raises Refused."""
    with transaction.atomic():
        waiting = SecondFactor.objects.select_for_update().filter(person=person, confirmed_at__isnull=True).first()
        if waiting is None:
            raise Refused("There is no second factor to confirm.")
        step = totp.matching_step(_unseal(waiting.sealed_secret), code, now.timestamp())
        if step is None:
            raise Refused("This code does not fit. Is the telephone's clock right? Type the code it shows now.")
        recovery = [f"{secrets.token_hex(3)}-{secrets.token_hex(3)}" for _ in range(RECOVERY_CODES)]
        waiting.confirmed_at, waiting.last_step = now, step
        waiting.recovery_digests = [_digest(one) for one in recovery]
        waiting.save()
        record(kind=Kind.FACTOR_ADDED, now=now, person=person, by=person, request=request)
    return recovery


def check_code(*, person: Person, code: str, now: dt.datetime, request: HttpRequest | None = None) -> None:
    """Uses up a code, or a recovery code. Raises Refused, also while too many wrong ones have been given."""
    wrong = SecurityEvent.objects.filter(person=person, kind=Kind.CODE_REFUSED, at__gt=now - WINDOW).count()
    if wrong >= MOST_CODES_REFUSED:
        raise Refused("Too many wrong codes. Wait a quarter of an hour.")
    with transaction.atomic():
        factor = SecondFactor.objects.select_for_update().filter(person=person, confirmed_at__isnull=False).first()
        if factor is not None and (used := _use(factor, code, now)):
            factor.save()
            if used == "recovery":
                record(kind=Kind.RECOVERY_USED, now=now, person=person, request=request)
            return
    record(kind=Kind.CODE_REFUSED, now=now, person=person, request=request)
    raise Refused("This code does not fit, or was used already. Type the one the telephone shows now.")


def _use(factor: SecondFactor, code: str, now: dt.datetime) -> str:
    step = totp.matching_step(_unseal(factor.sealed_secret), code, now.timestamp(), after_step=factor.last_step)
    if step is not None:
        factor.last_step = step
        return "code"
    digest = _digest(code.strip().lower())
    if digest in factor.recovery_digests:
        factor.recovery_digests = [one for one in factor.recovery_digests if one != digest]
        return "recovery"
    return ""


def remove(*, person: Person, by: Person | None, now: dt.datetime, request: HttpRequest | None = None) -> bool:
    """Takes the second factor away. False where there was none."""
    with transaction.atomic():
        there, _ = SecondFactor.objects.filter(person=person).delete()
        if there:
            record(kind=Kind.FACTOR_REMOVED, now=now, person=person, by=by, request=request)
    return bool(there)


def _digest(code: str) -> str:
    # Twelve random hex digits need no slow hash.
    return hashlib.sha256(code.encode()).hexdigest()


def _sealer() -> MultiFernet:
    keys = [settings.SECRET_KEY, *settings.SECRET_KEY_FALLBACKS]
    return MultiFernet([Fernet(base64.urlsafe_b64encode(_derived(str(key)))) for key in keys])


def _derived(key: str) -> bytes:
    return HKDF(algorithm=SHA256(), length=32, salt=None, info=b"weirbook second factor").derive(key.encode())


def _seal(secret: bytes) -> str:
    return _sealer().encrypt(secret).decode()


def _unseal(text: str) -> bytes:
    try:
        return _sealer().decrypt(text.encode())
    except InvalidToken:
        raise Refused("The site's key was changed: the administrator must remove this second factor.") from None
