"""A value of an earlier shift, entered afterwards: which, when it was read, and why it comes late."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from plant.intake import forms, rounds, rules, walk
from plant.ledger import actions as ledger
from plant.works import access, parameters


@access.needs("round.enter")
@require_http_methods(["GET", "HEAD", "POST"])
def page(request: HttpRequest, at: access.At) -> HttpResponse:
    """First which value, then the value with its time and the reason."""
    asked = request.POST if request.method == "POST" else request.GET
    site, _, parameter = asked.get("line", "").partition(":")
    definition = walk.rules_of(at.book, at.stated, at.now, site, parameter) if parameter else None
    context: dict[str, Any] = {
        "choices": _choices(at), "line": asked.get("line", "") if definition else "", "rules": definition, "typed": asked,
        "client_id": asked.get("client_id") or str(uuid.uuid4()), "not_taken": forms.NOT_TAKEN,
        "zone": at.stated.calendar(at.now).zone,
    }  # fmt: skip
    if request.method != "POST" or definition is None:
        return render(request, "intake/late.html", context)
    problem, answer = _problem(at, request.POST, definition, parameter)
    if problem:
        context |= {"problem": problem, "doubt": definition["texts"][answer.doubt] if answer else ""}
        return render(request, "intake/late.html", context, status=422)
    try:
        sent = rounds.take(
            book=at.book, stated=at.stated, client_id=context["client_id"], by=request.user, now=at.now,
            received={"kind": "line", "lines": [_line(at, request.POST, site, parameter)], "made_by": "late form"},
        )  # fmt: skip
    except (rounds.Unreadable, ledger.ContentDiffers) as refused:
        words = [*getattr(refused, "problems", {}).values(), getattr(refused, "general", "")]
        context["problem"] = next(filter(None, words), "this was sent before with another value: open the page anew")
        context["client_id"] = str(uuid.uuid4())
        return render(request, "intake/late.html", context, status=422)
    messages.success(request, "In the book, marked as late.")
    for found in sent.taken.findings:
        messages.warning(request, found.sentence or str(found))
    return redirect(f"{request.path}?line={site}:{parameter}")


def _problem(at: access.At, typed: Any, definition: dict[str, Any], parameter: str) -> tuple[str, rules.Answer | None]:
    """Why it can't be sent as it stands, and the answer to look at where it only wants a second look."""
    if not typed.get("timestamp", "").strip():
        return "Say when it was read.", None
    if len(typed.get("why", "").strip()) < 3:
        return "Say why it comes late.", None
    value = typed.get("value", "").strip()
    if not value:
        return "", None
    answer = rules.answer(definition, value, typed.get("unit", definition["unit"]), int(at.now.timestamp()))
    if answer.asks and "confirmed" not in typed:
        return "This value wants a second look.", answer
    return "", None


def _line(at: access.At, typed: Any, site: str, parameter: str) -> dict[str, Any]:
    unit = typed.get("unit", "")
    line: dict[str, Any] = {
        "site": site,
        "parameter": rounds.site_sent(parameter, unit),
        "value": typed.get("value", "").strip(),
        "unit": unit,
        "taken_at": typed.get("timestamp", "").strip(),
        "not_taken": typed.get("not_taken", ""),
        "note": f"late: {typed.get('why', '').strip()}",
    }
    if line["not_taken"]:
        line["not_taken"] = f"{line['not_taken']} ({line['note']})"
    if "confirmed" in typed:
        line["confirmed"] = True
    return line


def _choices(at: access.At) -> list[tuple[str, str]]:
    known, names = parameters.known(at.stated, at.now), walk.names(at.stated, at.now)
    return [
        (f"{line.site}:{line.parameter}", f"{names.get(line.site, line.site)}: {known[line.parameter].label}")
        for line in at.stated.round_lines(at.now)
        if line.parameter in known
    ]
