"""The gate of the two pages an enrolled tablet reaches: the round with its data, and the sending of entries.

A full sign-in passes as everywhere else. Otherwise the device's cookie does, for its own works and for nothing more.
"""

from __future__ import annotations

import functools
from typing import Any

from django.contrib.auth.decorators import login_not_required
from django.contrib.auth.views import redirect_to_login
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import render

from plant import clock
from plant.ledger.models import Book
from plant.works import access, queries
from plant.works.tablets import actions
from plant.works.tablets.models import Device

COOKIE = "weirbook_tablet"
A_YEAR_S = 365 * 24 * 3600
PERMISSION = "round.enter"
REVOKED = "This tablet has been withdrawn from the works. Nothing on it is lost: save what waits as a file."


def device_of(request: HttpRequest, code: str) -> Device | None:
    """The enrolled device that asks, revoked or not; None for a browser that is none of this works."""
    token = request.COOKIES.get(COOKIE, "")
    if not token:
        return None
    return Device.objects.filter(token_hash=actions.digest(token), book__code=code).select_related("book").first()


def tablet_too(view: access.View) -> access.View:
    """Lets in people who may enter readings, and enrolled tablets: ``request.tablet`` is the device, or None."""
    for_people = access.needs(PERMISSION)(view)

    @functools.wraps(view)
    def gate(request: HttpRequest, code: str, *args: Any, **kwargs: Any) -> HttpResponse:
        device = device_of(request, code)
        request.tablet = device if device is not None and device.revoked_at is None else None  # type: ignore[attr-defined]
        if request.user.is_authenticated:
            return for_people(request, code, *args, **kwargs)
        if device is None:
            return _sign_in_first(request)
        if device.revoked_at is not None:
            if request.method == "PUT":
                return JsonResponse({"general": REVOKED, "revoked": True}, status=403)
            return render(request, "works/withdrawn.html", status=403)
        book = Book.objects.get(pk=device.book_id)
        stated = queries.stated(book)
        member = access.Member("", "tablet", frozenset({PERMISSION}))
        at = access.At(book, stated, member, clock.now())
        request.at = at  # type: ignore[attr-defined]
        return view(request, at, *args, **kwargs)

    gate.permission = PERMISSION  # type: ignore[attr-defined]
    return login_not_required(gate)


def _sign_in_first(request: HttpRequest) -> HttpResponse:
    if request.method in ("PUT", "POST"):
        return JsonResponse({"general": "Sign in to send. What is kept on this device stays there."}, status=401)
    return redirect_to_login(request.get_full_path())
