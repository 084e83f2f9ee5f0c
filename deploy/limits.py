"""Refuses what is too large before any of it is read."""

from collections.abc import Callable

from django.conf import settings
from django.http import HttpRequest, HttpResponse

from plant.api import problems


class RequestSize:
    """Middleware: 413 for a request that says it is larger than WEIRBOOK_LARGEST_REQUEST, and for one that doesn't say."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        length = request.META.get("CONTENT_LENGTH") or "0"
        too_large = not length.isdecimal() or int(length) > settings.WEIRBOOK_LARGEST_REQUEST
        # Sent in pieces of unknown number: no browser and no tablet does that, and no limit would hold.
        if too_large or "chunked" in request.META.get("HTTP_TRANSFER_ENCODING", "").lower():
            words = "Too large, or of no stated length."
            answer = HttpResponse(f"{words}\n", status=413, content_type="text/plain")
            if request.path.startswith("/api/"):
                answer = problems.Problem(413, f"{words} Send Content-Length.").answer()
            answer["Connection"] = "close"
            return answer
        return self.get_response(request)
