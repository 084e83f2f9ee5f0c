"""What people, and machines, are told when a page breaks or isn't there."""

import sys

from django.db import InterfaceError, OperationalError
from django.http import HttpRequest, HttpResponse
from django.template import loader
from django.views import defaults

from plant.api import problems


def missing(request: HttpRequest, exception: Exception) -> HttpResponse:
    """404: in words for a person, as problem details for a machine."""
    return problems.nowhere() if request.path.startswith("/api/") else defaults.page_not_found(request, exception)


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
