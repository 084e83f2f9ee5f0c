"""PUT of one entry: what the tablet sends, once or as often as it must."""

from __future__ import annotations

import datetime as dt
import json
from typing import Any

from django.http import HttpRequest, JsonResponse
from django.views.decorators.http import require_http_methods

from plant.accounts.models import Person
from plant.intake import rounds
from plant.ledger import actions as ledger
from plant.readings import marks
from plant.readings.models import Reading
from plant.works import access
from plant.works.stated import Stated
from plant.works.tablets import gate
from plant.works.tablets import queries as tablets

MOST_BYTES = 1_000_000
CLOCK_OFF_S = 600
"""A device's clock further off than this is flagged (common practice, no source)."""


@gate.tablet_too
@require_http_methods(["PUT"])
def put(request: HttpRequest, at: access.At, client_id: str) -> JsonResponse:
    """201 new, 200 the same again, 403 another's entry, 409 another content under this id, 422 not readable (line by line)."""
    if int(request.headers.get("Content-Length") or 0) > MOST_BYTES:
        return JsonResponse({"general": "more than a megabyte; send it as a file"}, status=413)
    try:
        received = json.loads(request.body)
        # Half of a surrogate pair can be written as an escape and is no text that could be kept.
        json.dumps(received, ensure_ascii=False).encode()
    except (ValueError, RecursionError):
        return JsonResponse({"general": "not JSON"}, status=400)
    tablet = request.tablet  # type: ignore[attr-defined]  # set by the gate
    said = received if isinstance(received, dict) else {}
    person, attested = who(request, at, said)
    if person is None:
        if tablet is None:
            words = "Entries of somebody else are sent from an enrolled tablet, or after that person has signed in."
            return JsonResponse({"general": words}, status=403)
        return JsonResponse({"general": "Nobody of this name has ever entered readings here.", "lines": {}}, status=422)
    try:
        sent = rounds.take(
            book=at.book,
            stated=at.stated,
            client_id=client_id,
            received=received,
            by=person,
            now=at.now,
            attested=attested,
            device=tablet.name if tablet is not None else "",
            noted=_clock(request.headers.get("X-Device-Sent-At", ""), at.now),
        )
    except rounds.Unreadable as problem:
        problems = {str(place): text for place, text in problem.problems.items()}
        return JsonResponse({"general": problem.general, "lines": problems}, status=422)
    except ledger.ContentDiffers:
        return JsonResponse(
            {"general": "another content has been sent under this id already; what is here is kept on this device"}, status=409
        )
    answered = answer(sent) | {"now_ms": int(at.now.timestamp() * 1000)}
    return JsonResponse(answered, status=201 if sent.taken.created else 200)


def who(request: HttpRequest, at: access.At, said: dict[str, Any]) -> tuple[Any, str]:
    """Whose entry it is and how that is attested. (None, "") for one that this sender may not send."""
    claimed = said.get("person") or ""
    if request.user.is_authenticated and claimed in ("", request.user.get_username()):
        return request.user, "session"
    tablet = request.tablet  # type: ignore[attr-defined]
    if tablet is None or not isinstance(claimed, str):
        return None, ""
    person = Person.objects.filter(username=claimed).first() if _ever_entered(at.stated, claimed) else None
    return (person, tablets.attested(tablet, person, str(said.get("spell", "")))) if person else (None, "")


def _ever_entered(stated: Stated, username: str) -> bool:
    """Somebody who has left since may still have entries waiting on a tablet."""
    sayings = stated.history("membership", username)
    members = (access.member_from(username, saying.value) for saying in sayings if not saying.withdrawn)
    return any(one is not None and one.may("round.enter") for one in members)


def _clock(sent: str, now: dt.datetime) -> dict[str, Any] | None:
    """How far the device's clock was off as it sent; None where it did not say."""
    try:
        at = dt.datetime.fromisoformat(sent)
    except ValueError:
        return None
    if at.tzinfo is None:
        return None
    off_s = round((at - now).total_seconds())
    return {"device_sent_at": at.isoformat(), "clock_off_s": off_s, "clock_flagged": abs(off_s) > CLOCK_OFF_S}


def answer(sent: rounds.Sent) -> dict[str, Any]:
    """What the tablet is told of an entry that is in the book."""
    doubts = {row.ref: marks.in_words(row.marks) for row in sent.taken.rows if isinstance(row, Reading) and row.marks}
    return {
        "seq": sent.taken.entry.seq,
        "recorded_at": sent.taken.entry.recorded_at.isoformat(),
        "attested": sent.taken.entry.attested,
        "refs": list(sent.refs),
        "doubts": doubts,
        "judged": sent.taken.judged,
        "findings": [
            {"level": found.level, "subject": found.subject, "sentence": found.sentence or str(found)}
            for found in sent.taken.findings
        ],
    }
