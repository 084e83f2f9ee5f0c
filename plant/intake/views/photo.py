"""PUT of one photo: what the tablet sends after the line it belongs to, once or as often as it must."""

from __future__ import annotations

import datetime as dt
import re
import uuid

from django.http import HttpRequest, JsonResponse
from django.views.decorators.http import require_http_methods

from plant.files import actions as files
from plant.files import kinds
from plant.files.models import Document
from plant.intake import actions
from plant.intake.views import entry
from plant.ledger import actions as ledger
from plant.works import access
from plant.works.tablets import gate

_ABOUT = re.compile(r"[-\w.]{1,64}")


@gate.tablet_too
@require_http_methods(["PUT"])
def put(request: HttpRequest, at: access.At, client_id: str) -> JsonResponse:
    """201 new, 200 the same again, 403 another's, 409 another content under this id, 413 too large, 422 not kept and why.

    The body is the picture; the address says about which entry (``about``: its client id), ``site``, ``parameter``,
    ``made_at`` (ISO 8601 with offset), ``name``, and on a shared tablet ``person`` and ``spell``.
    """
    if int(request.headers.get("Content-Length") or 0) > kinds.MOST_BYTES:
        return JsonResponse({"general": f"more than {kinds.MOST_BYTES // 1_000_000} MB"}, status=413)
    said = request.GET
    person, attested = entry.who(request, at, {"person": said.get("person", ""), "spell": said.get("spell", "")})
    if person is None:
        words = "Photos of somebody else are sent from an enrolled tablet, or after that person has signed in."
        return JsonResponse({"general": words}, status=403)
    about, site, parameter = said.get("about", ""), said.get("site", "")[:40], said.get("parameter", "")[:40]
    try:
        uuid.UUID(client_id)
        made_at = dt.datetime.fromisoformat(said.get("made_at", ""))
    except ValueError:
        return JsonResponse({"general": "the photo's id or time can't be read"}, status=422)
    if made_at.tzinfo is None or not _ABOUT.fullmatch(about):
        return JsonResponse({"general": "the photo does not say when it was made, or to what it belongs"}, status=422)
    try:
        kept = files.document(
            content=request.body,
            name=said.get("name", "photo.jpg"),
            about=about,
            made_at=made_at,
            site=site,
            parameter=parameter,
        )
    except kinds.NotKept as problem:
        return JsonResponse({"general": str(problem)}, status=422)
    try:
        taken = take(at=at, client_id=client_id, kept=kept, by=person, attested=attested, device=_device(request))
    except ledger.ContentDiffers:
        return JsonResponse({"general": "another photo has been sent under this id already"}, status=409)
    return JsonResponse({"seq": taken.entry.seq}, status=201 if taken.created else 200)


def take(*, at: access.At, client_id: str, kept: Document, by: object, attested: str, device: str) -> actions.Taken:
    """Appends a document as an entry of its own. Nothing is judged: a photo changes no figure."""
    received = {"about": kept.about, "site": kept.site, "parameter": kept.parameter, "name": kept.name, "sha256": kept.sha256}
    return actions.take(
        book=at.book, client_id=client_id, kind="document", received=received, rows=[kept], by=by, now=at.now, device=device,
        attested=attested, judge=False,
    )  # fmt: skip


def _device(request: HttpRequest) -> str:
    tablet = request.tablet  # type: ignore[attr-defined]  # set by the gate
    return tablet.name if tablet is not None else ""
