"""What people are told when a page breaks."""

import sys

from django.db import InterfaceError, OperationalError
from django.http import HttpRequest, HttpResponse
from django.template import loader
from django.views import defaults

from plant.api import problems


def broken(request: HttpRequest) -> HttpResponse:
    """503 and what to do while the database is away, for a moment as a rule; 500 for everything else."""
    # Django calls this while the exception is being handled.
    away = isinstance(sys.exception(), OperationalError | InterfaceError)
    if request.path.startswith("/api/"):
        return problems.away() if away else problems.broken()
    if not away:
        return defaults.server_error(request)
    answer = HttpResponse(loader.render_to_string("503.html"), status=503)
    answer["Retry-After"] = "5"
    return answer
