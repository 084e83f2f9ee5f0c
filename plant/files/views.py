"""A document, to whoever may see the works."""

from __future__ import annotations

from django.http import Http404, HttpRequest, HttpResponse
from django.utils.http import content_disposition_header
from django.views.decorators.http import require_safe

from plant.files import queries
from plant.works import access


@access.needs("see")
@require_safe
def document(request: HttpRequest, at: access.At, ref: str) -> HttpResponse:
    """Pictures are shown; anything else is downloaded. Nothing in it can run, whatever it is."""
    found = queries.one(at.book, ref)
    if found is None:
        raise Http404("There is no such document.")
    path = queries.path_of(found.sha256)
    if not path.is_file():
        raise Http404("The document's bytes are not in the folder of documents; verify_records says more.")
    answer = HttpResponse(path.read_bytes(), content_type=found.media_type)  # 5 MB at most
    answer["Content-Disposition"] = content_disposition_header(not found.is_picture, found.name) or "inline"
    answer["Content-Security-Policy"] = "default-src 'none'; sandbox"
    answer["X-Content-Type-Options"] = "nosniff"
    answer["Cache-Control"] = "private, max-age=31536000, immutable"
    return answer
