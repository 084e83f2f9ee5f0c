"""The gate of the API: a token of this works, with the scope, not more often than it may."""

from __future__ import annotations

import functools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse
from django.views.decorators.csrf import csrf_exempt

from plant import clock
from plant.api import actions, queries
from plant.api.models import Token
from plant.api.problems import Problem
from plant.works import access
from plant.works import queries as works

NOBODY = 'Bearer realm="weirbook"'
NO_WORKS = "There is no such works."


@dataclass(frozen=True)
class Asked:
    """A request that was let in: where it stands, and who asks."""

    at: access.At
    token: Token


View = Callable[..., HttpResponse]


def machine(scope: str, *methods: str) -> Callable[[View], View]:
    """Lets in a token of the works in the address that has ``scope`` ("": any token). The view gets Asked.

    401 without a token in use, 404 for another works' token (as for a works that isn't there), 403 without the scope,
    429 too often, 405 for other methods. A browser's sign-in counts for nothing here, so there is nothing to forge.
    """
    allowed = (*methods, "HEAD") if "GET" in methods else methods

    def wrap(view: View) -> View:
        @functools.wraps(view)
        def gate(request: HttpRequest, code: str, *args: Any, **kwargs: Any) -> HttpResponse:
            try:
                token = _token(request)
                if token.book.code != code:
                    raise Problem(404, NO_WORKS)
                if scope and scope not in token.scopes:
                    raise Problem(403, f"This token lacks the scope {scope}.", headers=_insufficient(scope), scope=scope)
                if request.method not in allowed:
                    raise Problem(405, f"This address takes {', '.join(allowed)}.", headers={"Allow": ", ".join(allowed)})
                return view(request, _asked(token), *args, **kwargs)
            except Problem as problem:
                return problem.answer()

        gate.scope = scope  # type: ignore[attr-defined]  # read by the walk over all addresses and by the document's test
        gate.methods = methods  # type: ignore[attr-defined]
        gate.permission = "token"  # type: ignore[attr-defined]
        return csrf_exempt(login_not_required(gate))

    return wrap


def _token(request: HttpRequest) -> Token:
    kind, _, secret = request.headers.get("Authorization", "").partition(" ")
    found = queries.of_secret(secret.strip()) if kind.lower() == "bearer" else None
    if found is None:
        raise Problem(401, "Send a token of this works: Authorization: Bearer …", headers={"WWW-Authenticate": NOBODY})
    try:
        actions.use(token=found, now=clock.now())
    except actions.TooMany as problem:
        words = f"Too many requests in a minute. The next one is taken in {problem.wait_s} s."
        raise Problem(429, words, headers={"Retry-After": str(problem.wait_s)}) from None
    return found


def _insufficient(scope: str) -> dict[str, str]:
    return {"WWW-Authenticate": f'{NOBODY}, error="insufficient_scope", scope="{scope}"'}


def _asked(token: Token) -> Asked:
    member = access.Member("", "device", frozenset())
    return Asked(access.At(token.book, works.stated(token.book), member, clock.now()), token)
