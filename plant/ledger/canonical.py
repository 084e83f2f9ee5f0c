"""One way to write a thing down, so that the same facts always have the same hash."""

from __future__ import annotations

import datetime as dt
import decimal
import hashlib
import json
import uuid
from typing import Any


def plain(value: Any) -> Any:
    """A value as JSON can hold it: instants in UTC with a Z, dates and decimals as text."""
    if isinstance(value, dt.datetime):
        return value.astimezone(dt.UTC).isoformat(timespec="microseconds").replace("+00:00", "Z")
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, decimal.Decimal | uuid.UUID):
        return str(value)
    if isinstance(value, dict):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    return value


def text(value: Any) -> str:
    """Canonical JSON (keys sorted, no spaces, no NaN)."""
    return json.dumps(plain(value), sort_keys=True, ensure_ascii=False, separators=(",", ":"), allow_nan=False)


def digest(value: Any) -> str:
    """SHA-256 of the canonical JSON, in hex."""
    return hashlib.sha256(text(value).encode()).hexdigest()
