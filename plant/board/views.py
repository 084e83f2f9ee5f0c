"""The first page: one's works."""

from __future__ import annotations

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from plant import clock
from plant.works import access


@access.anyone
def works(request: HttpRequest) -> HttpResponse:
    """The works of the person who asks."""
    now = clock.now()
    return render(request, "board/works.html", {"books": access.works_of(request.user.get_username(), now), "now": now})
