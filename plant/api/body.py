"""The body of a request, read without trusting it."""

from __future__ import annotations

import json
from typing import Any

from django.http import HttpRequest

from plant.api.problems import Problem

MOST_BYTES = 8_000_000
"""Ten thousand readings with every field at its usual length take about 3 MB."""


class Digits(str):
    """A JSON number, digit for digit as it was sent, so that 0.50 is kept as 0.50."""

    __slots__ = ()


def read(request: HttpRequest) -> Any:
    """The JSON in a request, its numbers as Digits. Raises Problem."""
    if request.content_type != "application/json":
        raise Problem(415, "Send application/json.", headers={"Accept": "application/json"})
    if int(request.headers.get("Content-Length") or 0) > MOST_BYTES:
        raise Problem(413, f"At most {MOST_BYTES // 1_000_000} MB at a time: send the readings in several batches.")
    try:
        found = json.loads(request.body, parse_float=Digits, parse_int=Digits, parse_constant=_no_number)
        # Half of a surrogate pair can be written as an escape and is no text that could be kept.
        json.dumps(found, ensure_ascii=False).encode()
    except RecursionError:
        raise Problem(400, "This JSON is nested too deeply.") from None
    except ValueError as problem:
        raise Problem(400, f"This is not JSON that can be kept: {str(problem)[:200]}") from None
    return found


def _no_number(name: str) -> Any:
    raise ValueError(f"{name} is no number in JSON")
