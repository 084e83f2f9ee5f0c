"""How the API says that something went wrong: problem details, RFC 9457."""

from __future__ import annotations

import http
from typing import Any

from django.http import HttpResponse, JsonResponse

MEDIA_TYPE = "application/problem+json"


class Problem(Exception):
    """Ends a request. ``detail`` is for a person; what a program needs to know stands in ``more``."""

    def __init__(self, status: int, detail: str, *, headers: dict[str, str] | None = None, **more: Any) -> None:
        super().__init__(detail)
        self.status, self.detail, self.headers, self.more = status, detail, headers or {}, more

    def answer(self) -> HttpResponse:
        """As a response. ``type`` is about:blank, so ``title`` is the status's own name (RFC 9457, 4.2.1)."""
        body = {"type": "about:blank", "title": http.HTTPStatus(self.status).phrase, "status": self.status}
        out = JsonResponse(
            body | {"detail": self.detail} | self.more,
            status=self.status,
            content_type=MEDIA_TYPE,
            json_dumps_params={"ensure_ascii": False},
        )
        for name, value in self.headers.items():
            out[name] = value
        return out


def nowhere() -> HttpResponse:
    """For an address below /api/ that isn't there."""
    return Problem(404, "There is no such address. /api/openapi.json lists those there are.").answer()


def away() -> HttpResponse:
    """While the database is away, for a moment as a rule."""
    words = "The database does not answer at the moment. Send the same again: nothing is taken twice."
    return Problem(503, words, headers={"Retry-After": "5"}).answer()


def broken() -> HttpResponse:
    """For a fault of the program itself."""
    return Problem(500, "Something is broken here. It is written in the server's log.").answer()
