"""Machines for the tests of the API: clients that show a token, and batches for them to send."""

from __future__ import annotations

import json
import uuid
from typing import Any

from django.test import Client

from plant.api import actions
from plant.api.scopes import SCOPES
from plant.ledger.models import Book
from tests import people


class Machine(Client):
    """A client with a token; ``secret`` "" for none."""

    def __init__(self, secret: str, **more: Any) -> None:
        super().__init__(headers={"Authorization": f"Bearer {secret}"} if secret else {}, **more)

    def send(self, received: Any, ident: str | None = None, code: str = "TST") -> Any:
        body = received if isinstance(received, bytes) else json.dumps(received)
        return self.put(f"/api/w/{code}/batches/{ident or uuid.uuid4()}", body, content_type="application/json")


def machine(book: Book, *scopes: str, name: str = "control system") -> Machine:
    """A machine of the works with a token of these scopes; without any, of all."""
    _, secret = actions.make(book=book, name=name, scopes=scopes or tuple(SCOPES), by=people.person("adam"), now=people.OPENED)
    return Machine(secret)


def reading(**more: Any) -> dict[str, Any]:
    return {
        "site": "ENTRY",
        "timestamp": "2026-03-10T08:00:00Z",
        "parameter": "free_chlorine",
        "value": "0.52",
        "unit": "mg/L",
    } | more


def batch(*rows: dict[str, Any]) -> dict[str, Any]:
    return {"readings": list(rows)}
