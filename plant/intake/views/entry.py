"""PUT of one entry: what the tablet sends, once or as often as it must."""

from __future__ import annotations

import json
from typing import Any

from django.http import HttpRequest, JsonResponse
from django.views.decorators.http import require_http_methods

from plant.intake import rounds
from plant.ledger import actions as ledger
from plant.readings import marks
from plant.readings.models import Reading
from plant.works import access

MOST_BYTES = 1_000_000


@access.needs("round.enter")
@require_http_methods(["PUT"])
def put(request: HttpRequest, at: access.At, client_id: str) -> JsonResponse:
    """201 new, 200 the same again, 409 another content under this id, 422 not readable (line by line)."""
    if int(request.headers.get("Content-Length") or 0) > MOST_BYTES:
        return JsonResponse({"general": "more than a megabyte; send it as a file"}, status=413)
    try:
        received = json.loads(request.body)
    except ValueError:
        return JsonResponse({"general": "not JSON"}, status=400)
    try:
        sent = rounds.take(book=at.book, stated=at.stated, client_id=client_id, received=received, by=request.user, now=at.now)
    except rounds.Unreadable as problem:
        problems = {str(place): text for place, text in problem.problems.items()}
        return JsonResponse({"general": problem.general, "lines": problems}, status=422)
    except ledger.ContentDiffers:
        return JsonResponse(
            {"general": "another content has been sent under this id already; what is here is kept on this device"}, status=409
        )
    return JsonResponse(answer(sent), status=201 if sent.taken.created else 200)


def answer(sent: rounds.Sent) -> dict[str, Any]:
    """What the tablet is told of an entry that is in the book."""
    doubts = {row.ref: marks.in_words(row.marks) for row in sent.taken.rows if isinstance(row, Reading) and row.marks}
    return {
        "seq": sent.taken.entry.seq,
        "recorded_at": sent.taken.entry.recorded_at.isoformat(),
        "refs": list(sent.refs),
        "doubts": doubts,
        "judged": sent.taken.judged,
        "findings": [
            {"level": found.level, "subject": found.subject, "sentence": found.sentence or str(found)}
            for found in sent.taken.findings
        ],
    }
