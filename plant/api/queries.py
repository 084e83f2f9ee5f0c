"""Reads of tokens."""

from __future__ import annotations

from plant.api.actions import PREFIX, digest
from plant.api.models import Token
from plant.ledger.models import Book
from plant.reports.models import Report


def tokens(book: Book) -> list[Token]:
    """All tokens of a works, those in use first, then by name."""
    found = Token.objects.filter(book=book).select_related("made_by", "revoked_by")
    return sorted(found, key=lambda token: (token.revoked_at is not None, token.name.casefold()))


def of_secret(secret: str) -> Token | None:
    """The token in use whose secret this is."""
    if not secret.startswith(PREFIX) or len(secret) > 200:
        return None
    return Token.objects.filter(token_hash=digest(secret), revoked_at=None).select_related("book").first()


def issued(book: Book) -> list[Report]:
    """Every issue of every month, newest month first."""
    return list(Report.objects.filter(book=book).order_by("-month", "-revision"))
