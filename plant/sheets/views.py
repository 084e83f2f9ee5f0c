"""The index, a sheet, and what the chemistry was checked against."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render

from chemistry import checks, errors, sources
from plant.readings import queries as readings
from plant.sheets import book, forms
from plant.sheets.sheet import Answer, Line, Sheet
from plant.works import access

HOW_FAR_BACK = dt.timedelta(days=60)


@access.needs("see")
def index(request: HttpRequest, at: access.At) -> HttpResponse:
    """All sheets, by group."""
    return render(request, "sheets/index.html", {"at": at, "groups": book.groups()})


@access.needs("see")
def sheet(request: HttpRequest, at: access.At, slug: str) -> HttpResponse:
    """One sheet. The values stand in the address, so that a sheet can be kept, shared and printed."""
    found = book.named(slug)
    if found is None:
        raise Http404("There is no such sheet.")
    points = at.stated.sample_points(at.now)
    asked = request.GET.copy()
    site = asked.get("site", "")
    told: dict[str, str] = {}
    if not any(field.name in asked for field in found.fields):
        for field in found.fields:
            asked[field.name] = "" if field.start is None else str(field.start)
        if site in {point.code for point in points}:
            told = _fill(found, asked, at, site)
    form = forms.form_for(found, asked, told)
    answer, refused = _work(found, form)
    context = {
        "at": at, "sheet": found, "form": form, "answer": answer, "refused": refused, "points": points, "site": site,
        "takes_readings": any(field.parameter for field in found.fields),
        "lines": [(line, _cited(line)) for line in answer.lines] if answer else [],
    }  # fmt: skip
    return render(request, "sheets/sheet.html", context)


def _fill(found: Sheet, asked: Any, at: access.At, site: str) -> dict[str, str]:
    """The newest readings at a sample point, and in words which they are."""
    told = {}
    calendar = at.stated.calendar(at.now)
    for field in found.fields:
        if not field.parameter:
            continue
        point = readings.latest(at.book, site, field.parameter, before=at.now)
        if point is None or point.value is None or at.now - point.at > HOW_FAR_BACK:
            told[field.name] = "no reading in the last 60 days: an example value stands here"
            continue
        asked[field.name] = f"{point.value:.6g}"
        told[field.name] = f"read {calendar.local(point.at):%d %b %H:%M}"
    return told


def _work(found: Sheet, form: Any) -> tuple[Answer | None, str]:
    if not form.is_valid():
        return None, ""
    values = {name: (0.0 if value is None else value) for name, value in form.cleaned_data.items()}
    try:
        return found.work(values), ""
    except errors.ChemistryError as problem:
        return None, str(problem)


def _cited(line: Line) -> str:
    return sources.SOURCES.get(line.source, line.source)


@access.needs("see")
def checked(request: HttpRequest, at: access.At) -> HttpResponse:
    """Function, source, checked against, worst difference, values still from memory."""
    rows = [  # a name may be broken after its dots and strokes, else its column takes the width of the others
        (
            row.functions.replace(".", ".\u200b").replace("_", "_\u200b"),
            row,
            "; ".join(sources.SOURCES.get(key.strip(), key.strip()) for key in row.source.split(",")),
        )
        for row in checks.checks()
    ]
    return render(request, "sheets/checked.html", {"at": at, "rows": rows})
