"""A sign-in ends by itself: so long after it began, and so long after it was last used."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable

from django.conf import settings
from django.contrib import auth, messages
from django.http import HttpRequest, HttpResponse

from plant import clock
from plant.accounts import security

BEGAN, USED = "signed_in_at", "used_at"
NOTED_EVERY_S = 60.0
"""The session row is written at most this often, not with every page."""


def begin(request: HttpRequest, now: dt.datetime) -> None:
    """A person has just signed in: the limits are counted from here."""
    request.session[BEGAN] = request.session[USED] = now.timestamp()


class SessionLimits:
    """Middleware. What a page fetches by itself (the board, once a minute) is no use of the session."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        if request.user.is_authenticated:
            self._look(request, clock.now())
        return self.get_response(request)

    def _look(self, request: HttpRequest, now: dt.datetime) -> None:
        moment = now.timestamp()
        began = request.session.setdefault(BEGAN, moment)
        used = request.session.setdefault(USED, moment)
        began_h, used_h = (moment - began) / 3600, (moment - used) / 3600
        if began_h > settings.WEIRBOOK_SESSION_HOURS or used_h > settings.WEIRBOOK_SESSION_IDLE_HOURS:
            security.record(kind=security.Kind.SESSION_ENDED, now=now, person=request.user, request=request)
            auth.logout(request)
            messages.info(request, "Your sign-in had come to its end. Sign in again; nothing you have sent is lost.")
        elif moment - used > NOTED_EVERY_S and not _by_itself(request):
            request.session[USED] = moment


def _by_itself(request: HttpRequest) -> bool:
    return request.path.endswith("/now/")
