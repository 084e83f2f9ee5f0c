"""Bringing in a file from the page: send it, see what would be taken and what not, then confirm."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from plant.intake import incoming, moments, numbers, records, sheets
from plant.intake.views import wall
from plant.ledger.models import Entry
from plant.works import access

SHOWN = 100
RECENT = 20


@access.needs("import")
@require_http_methods(["GET", "HEAD", "POST"])
def page(request: HttpRequest, at: access.At) -> HttpResponse:
    """The form; its preview; and what came in lately."""
    wish = _wish(request)
    context: dict[str, Any] = {"wish": wish, "hidden": asdict(wish), "recent": _recent(at)}
    if request.method != "POST":
        return render(request, "intake/import.html", context)
    token, name = request.POST.get("token", ""), request.POST.get("name", "")
    try:
        sent = request.FILES.get("file")
        if sent is not None:
            token, name = incoming.keep(sent, now=at.now), sent.name or "file.csv"
        elif not token:
            raise incoming.Refused("Choose a file first.")
        if "confirm" in request.POST:
            counted = incoming.bring_in(book=at.book, token=token, name=name, wish=wish, by=request.user, now=at.now)
            messages.success(request, " ".join(line.strip() + "." for line in counted.summary()))
            if counted.days:
                messages.info(request, f"{len(counted.days)} days are being judged; the board shows what comes of it.")
            return redirect("intake:import", code=at.code)
        counted = incoming.look(book=at.book, token=token, name=name, wish=wish, now=at.now)
    except (incoming.Refused, sheets.NotASheet) as problem:
        return render(request, "intake/import.html", context | {"problem": str(problem)}, status=422)
    except records.NothingKept as problem:
        return render(request, "intake/import.html", context | {"problem": str(problem)}, status=422)
    said = counted.refusal_lines()
    context |= {
        "token": token,
        "name": name,
        "counted": counted,
        "summary": [line.strip() for line in counted.summary()],
        "refused": said[:SHOWN],
        "more_refused": max(len(said) - SHOWN, 0),
        "would_keep_nothing": wish.all_or_nothing and counted.refused > 0,
    }
    return render(request, "intake/import.html", context)


def _wish(request: HttpRequest) -> incoming.Wish:
    posted = request.POST
    kind = posted.get("kind", "records")
    decimal = posted.get("decimal", numbers.POINT)
    ambiguous = posted.get("ambiguous", moments.REFUSE)
    return incoming.Wish(
        kind=kind if kind in incoming.KINDS else "records",
        decimal=decimal if decimal in (numbers.POINT, numbers.COMMA) else numbers.POINT,
        ambiguous=ambiguous if ambiguous in ("first", "second") else moments.REFUSE,
        units=posted.get("units", "")[:5000],
        sites=posted.get("sites", "")[:20000],
        add_sites=bool(posted.get("add_sites")),
        all_or_nothing=bool(posted.get("all_or_nothing")),
    )


def _recent(at: access.At) -> list[dict[str, Any]]:
    calendar = at.stated.calendar(at.now)
    entries = Entry.objects.filter(book=at.book, kind="file").select_related("recorded_by").order_by("-seq")
    return [
        {"entry": entry, "at": wall.at(calendar, entry.recorded_at), "who": entry.recorded_by or "at the shell"}
        for entry in entries.defer("payload")[:RECENT]
    ]
