"""One reading: what was typed, by whom and when, what became of it, and the forms that change it."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from chemistry import unit_tables, units
from plant import clock
from plant.files import queries as documents
from plant.intake import corrections
from plant.intake.views import wall
from plant.ledger import actions as ledger
from plant.readings import actions as readings
from plant.readings import marks, models, queries
from plant.works import access, parameters
from plant.works.tablets import queries as tablets


@access.needs("see")
@require_http_methods(["GET", "HEAD", "POST"])
def page(request: HttpRequest, at: access.At, ref: str) -> HttpResponse:
    """Shows a reading's history; corrects, voids or settles the version that was looked at."""
    found = queries.one(at.book, ref)
    if found is None:
        raise Http404("There is no such reading.")
    if request.method != "POST":
        return _show(request, at, found)
    act = request.POST.get("act", "")
    _may(at, found, request.user, act)
    try:
        newest = _do(request, at, found, act)
    except readings.AlreadyCorrected as problem:
        said = f"{problem}. What you typed is below; look at what holds now before you send it again."
        return _show(request, at, problem.newer, problem=said, typed=request.POST, status=409)
    except (
        corrections.NotReadable,
        readings.ReasonMissing,
        readings.NothingToSettle,
        ledger.ContentDiffers,
    ) as problem:
        return _show(request, at, found, problem=str(problem), typed=request.POST, status=422)
    messages.success(request, {"correct": "Corrected.", "void": "Voided.", "settle": "Settled."}[act])
    return redirect("intake:reading", code=at.code, ref=newest)


def _do(request: HttpRequest, at: access.At, found: models.Reading, act: str) -> str:
    posted = request.POST
    given: dict[str, Any] = {
        "book": at.book,
        "reading": found,
        "reason": posted.get("reason", ""),
        "by": request.user,
        "now": at.now,
        "client_id": posted.get("client_id") or uuid.uuid4().hex,
    }
    if act == "correct":
        typed = {name: posted.get(name, "").strip() for name in ("value", "unit", "timestamp", "note", "method")}
        taken = corrections.correct(stated=at.stated, typed=typed, **given)
    elif act == "void":
        taken = corrections.void(**given)
    else:
        taken = corrections.settle(decision=posted.get("decision", ""), **given)
    changed = [row for row in taken.rows if isinstance(row, models.Reading) and row.supersedes_id == found.pk]
    return changed[0].ref if changed else found.ref


def _may(at: access.At, found: models.Reading, person: Any, act: str) -> None:
    allowed = _allowed(at, found, person)
    if act not in allowed:
        raise PermissionDenied(f"This needs another right than your role ({at.member.role}) has here.")


def _allowed(at: access.At, found: models.Reading, person: Any) -> set[str]:
    """What this person may do to this reading."""
    out = set()
    own = found.entry.recorded_by_id == person.pk
    if at.member.may("record.correct"):
        out |= {"correct", "void"}
    elif own and at.member.may("record.correct_own"):
        out.add("correct")
    if at.member.may("record.settle"):
        out.add("settle")
    return out


def _show(
    request: HttpRequest,
    at: access.At,
    found: models.Reading,
    *,
    problem: str = "",
    typed: Any = None,
    status: int = 200,
) -> HttpResponse:
    calendar = at.stated.calendar(at.now)
    chain = queries.history(found)
    newest = chain[-1]
    known = parameters.known(at.stated, max(found.taken_at, at.now)).get(found.parameter)
    settled = {
        row.reading_id: row
        for row in models.Settlement.objects.filter(reading__in=chain)
        .as_known()
        .select_related("entry__recorded_by")
        .order_by("seq", "line")
    }
    local = calendar.local(newest.taken_at)
    allowed = _allowed(at, newest, request.user) if not newest.voided else set()
    context = {
        "found": found,
        "newest": newest,
        "is_newest": newest.pk == found.pk,
        "label": known.label if known else found.parameter,
        "steps": [
            {
                "row": row,
                "settled": settled.get(row.pk),
                "doubts": marks.in_words(row.marks),
                "taken_at": wall.at(calendar, row.taken_at),
                "recorded_at": wall.at(calendar, row.entry.recorded_at),
                "attested": tablets.in_words(row.entry),
                "clock_off": tablets.clock_in_words(row.entry),
            }
            for row in reversed(chain)
        ],
        "documents": _documents(at, chain, calendar),
        "rivals": queries.rivals(at.book, newest) if marks.CONFLICT in newest.marks else [],
        "allowed": allowed,
        "doubtful": bool(newest.marks) and newest.pk not in settled,
        "problem": problem,
        "unsent": typed if problem and typed and typed.get("act") not in allowed else None,
        "typed": typed
        or {
            "value": newest.typed,
            "unit": newest.typed_unit,
            "note": newest.note,
            "timestamp": f"{local:%Y-%m-%d}" if newest.date_only else f"{local:%Y-%m-%dT%H:%M}",
        },
        "units": _units(newest),
        "client_id": uuid.uuid4().hex,
        "zone": calendar.zone,
    }
    return render(request, "intake/reading.html", context, status=status)


def _documents(at: access.At, chain: list[models.Reading], calendar: clock.Calendar) -> list[dict[str, Any]]:
    """The photos of a reading, whichever of its versions they came with."""
    names = {name for row in chain for name in (row.entry.client_id, row.ref)}
    found = documents.about(at.book, names, site=chain[-1].site, parameter=chain[-1].parameter)
    return [{"row": one, "made_at": wall.at(calendar, one.made_at)} for one in found]


def _units(reading: models.Reading) -> list[str]:
    accepted = units.accepted_for(reading.parameter) if reading.parameter in unit_tables.PARAMETERS else (reading.unit,)
    return list(dict.fromkeys((reading.typed_unit, reading.unit, *accepted)))
