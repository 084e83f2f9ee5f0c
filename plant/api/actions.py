"""Every write about tokens."""

from __future__ import annotations

import datetime as dt
import hashlib
import secrets
import uuid
from collections.abc import Sequence
from typing import Any

from django.conf import settings
from django.db import IntegrityError, transaction
from django.db.models import F

from plant.api.models import Token
from plant.api.scopes import SCOPES
from plant.ledger import actions as ledger
from plant.ledger.models import Book

PREFIX = "wb_"
"""So that a secret that was written down by mistake can be told from other words."""

WINDOW = dt.timedelta(minutes=1)


class Refused(ValueError):
    """What was asked for can't be; the message says why."""


class TooMany(Exception):
    """More requests in this minute than a token may make; ``wait_s`` says when the next minute begins."""

    def __init__(self, wait_s: int) -> None:
        super().__init__(f"wait {wait_s} s")
        self.wait_s = wait_s


def digest(secret: str) -> str:
    """How a token is kept: 256 random bits need no slow hash."""
    return hashlib.sha256(secret.encode()).hexdigest()


def make(*, book: Book, name: str, scopes: Sequence[str], by: Any, now: dt.datetime) -> tuple[Token, str]:
    """A new token of a works, and its secret, which is kept nowhere else; the book notes what it may do. Raises Refused."""
    name = " ".join(name.split())
    if not name or len(name) > 40:
        raise Refused("Give the device a name of at most 40 characters: it stands beside every reading it sends.")
    unknown = sorted(set(scopes) - set(SCOPES))
    if unknown or not scopes:
        raise Refused(f"Say what it may do, one or more of: {', '.join(SCOPES)}.")
    secret = PREFIX + secrets.token_urlsafe(32)
    kept = [scope for scope in SCOPES if scope in scopes]
    try:
        with transaction.atomic():
            made = Token.objects.create(book=book, name=name, token_hash=digest(secret), scopes=kept, made_by=by, made_at=now)
            _note(made, {"is": "let in", "scopes": kept}, by, now)
    except IntegrityError:
        raise Refused(f"There is, or was, a device named {name} here already: take another name.") from None
    return made, secret


def revoke(*, token: Token, why: str, by: Any, now: dt.datetime) -> None:
    """The token is refused from now on; what was sent with it stays. Raises Refused."""
    if not why.strip():
        raise Refused("Say why: device replaced, token written down somewhere …")
    why = why.strip()[:200]
    with transaction.atomic():
        mine = Token.objects.filter(pk=token.pk, revoked_at=None)
        if mine.update(revoked_by=by, revoked_at=now, revoked_why=why):
            _note(token, {"is": "withdrawn", "why": why}, by, now)


def _note(token: Token, what: dict[str, Any], by: Any, now: dt.datetime) -> None:
    """An entry of the book without rows: who let a device in, and who withdrew it, can't be changed afterwards."""
    ledger.append(
        book=token.book,
        client_id=f"device {uuid.uuid4()}",
        kind="device",
        received={"device": token.name, **what},
        rows=[],
        by=by,
        now=now,
        attested="session" if by is not None else "shell",
    )


def use(*, token: Token, now: dt.datetime) -> None:
    """Counts a request and notes when the token was last used. Raises TooMany, and then notes nothing."""
    mine = Token.objects.filter(pk=token.pk)
    if mine.filter(window_start__gt=now - WINDOW, window_count__lt=settings.WEIRBOOK_API_PER_MINUTE).update(
        window_count=F("window_count") + 1, last_used_at=now
    ):
        return
    if mine.exclude(window_start__gt=now - WINDOW).update(window_start=now, window_count=1, last_used_at=now):
        return
    start = mine.values_list("window_start", flat=True).first() or now
    raise TooMany(max(1, int((start + WINDOW - now).total_seconds()) + 1))
