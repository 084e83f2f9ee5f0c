"""The round's page. With script each line answers at once and is kept on the device; without, it is one plain form."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import redirect, render
from django.template.loader import render_to_string
from django.views.decorators.http import require_http_methods

from plant.deviations import queries as deviations
from plant.intake import feeding, forms, rounds, rules, shifts, walk
from plant.intake.views import wall
from plant.ledger import actions as ledger
from plant.notices import queries as notices
from plant.works import access
from plant.works.tablets import gate
from plant.works.tablets import queries as tablets

IDLE_S = 600
"""After so long untouched a shared tablet locks itself (common practice, no source)."""
MOST_OPEN = 3
AT_THE_FIELD = frozenset({"bound", "held_below", "held_above", "rate_of_change", "stuck", "stock_loss", "suspicious_reading"})
"""Kinds of deviation that somebody on the round can look at; what was not read is listed by itself."""
LEVELS = ("regulatory", "action", "alert", "target")


@gate.tablet_too
@require_http_methods(["GET", "HEAD"])
def data(request: HttpRequest, at: access.At) -> JsonResponse:
    """The round as the device keeps it for the time without a network: its markup and its settings."""
    walked = walk.walk(at.book, at.stated, at.now)
    context = _context(request, at, walked, {}, uuid.uuid4().hex)
    html = render_to_string("intake/round_part.html", context, request)
    answer = JsonResponse({"html": html, "settings": context["settings"]})
    answer["Cache-Control"] = "no-store"
    return answer


@gate.tablet_too
@require_http_methods(["GET", "HEAD", "POST"])
def page(request: HttpRequest, at: access.At) -> HttpResponse:
    """Shows the round that is on; takes what the plain form sends."""
    if request.method == "POST" and not request.user.is_authenticated:
        raise PermissionDenied("Without script a round is sent after a full sign-in.")
    walked = walk.walk(at.book, at.stated, at.now)
    typed = forms.typed_lines(request.POST, walked) if request.method == "POST" else {}
    if request.method != "POST":
        return _show(request, at, walked, {}, uuid.uuid4().hex)
    client_id = request.POST.get("client_id", "")
    received: dict[str, Any] = {"kind": "round", "lines": list(typed.values()), "made_by": "form"}
    if "close" in request.POST:
        received["close"] = {
            "note": request.POST.get("note", ""),
            "starts_at": request.POST.get("starts_at", ""),
            "open": forms.still_open(walked, typed),
        }
    if request.POST.get("take_over"):
        received["take_over"] = {"starts_at": request.POST["take_over"]}
    answers = dict(zip(typed, rounds.answers(at.book, at.stated, received["lines"], at.now), strict=True))
    unsure = [key for key, found in answers.items() if found.asks and not typed[key].get("confirmed")]
    problems: dict[str, str] = {}
    general = ""
    if not unsure:
        try:
            sent = rounds.take(
                book=at.book, stated=at.stated, client_id=client_id, received=received, by=request.user, now=at.now
            )
        except rounds.Unreadable as problem:
            keys = list(typed)
            problems = {keys[place]: text for place, text in problem.problems.items()}
            general = problem.general
        except ledger.ContentDiffers:
            general = "This round has been sent before with other values. What you typed is below; send it again as a new one."
            client_id = uuid.uuid4().hex
        else:
            return _taken(request, at, sent, len(typed))
    else:
        general = f"{len(unsure)} of the values want a second look. Nothing has been sent yet."
    return _show(request, at, walked, typed, client_id, answers=answers, problems=problems, general=general, status=422)


def _for_the_round(at: access.At) -> list[deviations.DeviationView]:
    loud = ("regulatory", "action")
    return [
        view
        for view in deviations.open_ones(at.book)
        if view.kind != "missing" and (view.level in loud or view.kind in AT_THE_FIELD)
    ]


def _taken(request: HttpRequest, at: access.At, sent: rounds.Sent, count: int) -> HttpResponse:
    values = f"{count} value{'s' if count != 1 else ''}"
    messages.success(request, f"{values} in the book." if sent.taken.created else f"{values} had been sent already.")
    for found in sent.taken.findings:
        messages.warning(request, found.sentence or str(found))
    return redirect("intake:round", code=at.code)


def _show(
    request: HttpRequest,
    at: access.At,
    walked: walk.Round,
    typed: dict[str, dict[str, Any]],
    client_id: str,
    *,
    answers: dict[str, rules.Answer] | None = None,
    problems: dict[str, str] | None = None,
    general: str = "",
    status: int = 200,
) -> HttpResponse:
    context = _context(request, at, walked, typed, client_id, answers=answers, problems=problems, general=general)
    return render(request, "intake/round.html", context, status=status)


def _context(
    request: HttpRequest,
    at: access.At,
    walked: walk.Round,
    typed: dict[str, dict[str, Any]],
    client_id: str,
    *,
    answers: dict[str, rules.Answer] | None = None,
    problems: dict[str, str] | None = None,
    general: str = "",
) -> dict[str, Any]:
    rows = [
        forms.row(number, line, typed.get(line.key, {}), (answers or {}).get(line.key), (problems or {}).get(line.key, ""))
        for number, line in enumerate(walked.lines)
    ]
    calendar = at.stated.calendar(at.now)
    open_ones = sorted(_for_the_round(at), key=lambda view: (LEVELS.index(view.level), view.since))
    # A full sign-in on an enrolled tablet is a full sign-in; without one the tablet asks for a name.
    tablet = None if request.user.is_authenticated else request.tablet  # type: ignore[attr-defined]  # set by the gate
    return {
        "round": walked,
        "tablet": tablet,
        "rows": rows,
        "client_id": client_id,
        "general": general,
        "open_deviations": open_ones[:MOST_OPEN],
        "more_open": max(len(open_ones) - MOST_OPEN, 0),
        "note": request.POST.get("note", ""),
        "not_taken": forms.NOT_TAKEN,
        "shift_from": wall.at(calendar, walked.shift.start),
        "shift_to": wall.at(calendar, walked.shift.end),
        "closed_at": wall.at(calendar, walked.closed.closed_at) if walked.closed else None,
        "settings": {
            "works": at.code,
            "works_name": at.works_name,
            "zone": str(calendar.zone),
            "now_ms": int(at.now.timestamp() * 1000),
            "starts_at": walked.shift.start.isoformat(),
            "shift": f"{walked.shift.day.isoformat()} {walked.shift.name}",
            "person": request.user.get_username(),
            "name": getattr(request.user, "display_name", ""),
            "tablet": _of_tablet(at, tablet) if tablet is not None else None,
            "telephone": _telephone(at),
            "shifts": [_span(span, calendar) for span in shifts.ahead(at.stated, calendar, at.now)],
            "feeding": feeding.feeding(at.book, at.stated, at.now),
            "rules": {line.key: line.rules for line in walked.lines},
        },
    }


def _of_tablet(at: access.At, tablet: Any) -> dict[str, Any]:
    hands = tablets.hands(at.book, at.stated, at.now)
    return {
        "name": tablet.name,
        "idle_s": IDLE_S,
        "hands": [{"person": hand.username, "name": hand.name, "pin": hand.has_pin} for hand in hands],
    }


def _span(span: shifts.Span, calendar: Any) -> dict[str, Any]:
    start, end = wall.at(calendar, span.start), wall.at(calendar, span.end)
    return {
        "shift": f"{span.day.isoformat()} {span.name}",
        "starts_at": span.start.isoformat(),
        "start_ms": int(span.start.timestamp() * 1000),
        "end_ms": int(span.end.timestamp() * 1000),
        "words": f"{span.name.capitalize()} shift, {start.day} {start:%b %H:%M} to {end:%H:%M}",
    }


def _telephone(at: access.At) -> str:
    """The control room's number, and the call list in its order: what a device without a network has to know."""
    room = str((at.stated.value("works", at.code, at.now) or {}).get("telephone") or "")
    return "; ".join(part for part in (room, notices.telephones(at.stated, at.now)) if part)
