"""What machines ask and send."""

from __future__ import annotations

import datetime as dt
import re
from typing import Any

from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.urls import reverse

from plant.api import asking, batches, body, document, gate, queries, scopes, shown
from plant.api.problems import Problem
from plant.deviations import queries as deviations
from plant.dosing import queries as dosing
from plant.reports import queries as reports
from plant.reports.models import Report

BLOCK = dt.timedelta(days=31)
STATES = ("open", "all")


def _json(data: dict[str, Any], status: int = 200) -> JsonResponse:
    return JsonResponse(data, status=status, json_dumps_params={"ensure_ascii": False})


@gate.machine("", "GET")
def works(request: HttpRequest, asked: gate.Asked) -> HttpResponse:
    """Which works this is, what the token may do, and the codes that readings are sent under."""
    asking.only(request)
    at = asked.at
    described = at.stated.works(at.now)
    return _json(
        {
            "code": at.code,
            "name": described.name,
            "timezone": described.timezone,
            "operating_day_starts": described.operating_day_starts,
            "device": asked.token.name,
            "scopes": asked.token.scopes,
            "sites": shown.sites(at.stated, at.now),
            "parameters": shown.known_parameters(at.stated, at.now),
        }
    )


@gate.machine(scopes.READINGS_WRITE, "PUT")
def batch(request: HttpRequest, asked: gate.Asked, ident: str) -> HttpResponse:
    """Takes a batch of readings: 201 taken, 200 the same again."""
    asking.only(request)
    at = asked.at
    answer = batches.take(token=asked.token, stated=at.stated, ident=ident, received=body.read(request), now=at.now)
    entry = answer.entry
    return _json(
        {
            "entry": None if entry is None else entry.seq,
            "recorded_at": None if entry is None else shown.moment(entry.recorded_at),
            "repeated": not answer.created,
            "judged": answer.judged,
            "taken": answer.count(batches.TAKEN),
            "same": answer.count(batches.SAME),
            "refused": answer.count(batches.REFUSED),
            "rows": answer.rows,
        },
        201 if answer.created else 200,
    )


@gate.machine(scopes.COMPARISON_READ, "GET")
def comparison(request: HttpRequest, asked: gate.Asked) -> HttpResponse:
    """Doses used, designed and needed, one row an operating day and dosing point."""
    at = asked.at
    asked_for = asking.days(request, at.calendar.day_of(at.now))
    rows: list[Any] = []
    first = max(asked_for.first, asked_for.after[0]) if asked_for.after else asked_for.first
    # A month at a time, until the page is full: what isn't shown isn't reckoned.
    while first <= asked_for.last and len(rows) <= asked_for.limit:
        last = min(asked_for.last, first + BLOCK - dt.timedelta(days=1))
        found = sorted(dosing.comparison(at.book, first, last), key=_day_and_point)
        rows += [row for row in found if asked_for.after is None or _day_and_point(row) > asked_for.after]
        first = last + dt.timedelta(days=1)
    return _json(_page(request, asked_for, rows, _day_and_point, shown.dose))


def _day_and_point(row: Any) -> tuple[dt.date, str]:
    return row.day, row.dosing_point


@gate.machine(scopes.DEVIATIONS_READ, "GET")
def deviation_list(request: HttpRequest, asked: gate.Asked) -> HttpResponse:
    """Deviations raised for, or found again on, one of the days; with state=open only those that are open."""
    at = asked.at
    asked_for = asking.days(request, at.calendar.day_of(at.now), "state")
    state = asked_for.more.get("state", "all")
    if state not in STATES:
        raise Problem(422, f"state: expected {' or '.join(STATES)}.", parameter="state")
    found = deviations.between(at.book, asked_for.first, asked_for.last)
    rows = sorted((row for row in found if row.open or state == "all"), key=_day_and_ref)
    rows = [row for row in rows if asked_for.after is None or _day_and_ref(row) > asked_for.after]
    return _json(_page(request, asked_for, rows, _day_and_ref, shown.deviation))


def _day_and_ref(row: Any) -> tuple[dt.date, str]:
    return row.raised_for, row.ref


def _page(request: HttpRequest, asked_for: asking.Days, rows: list[Any], key: Any, written: Any) -> dict[str, Any]:
    page, rest = rows[: asked_for.limit], rows[asked_for.limit :]
    return {
        "first": asked_for.first.isoformat(),
        "last": asked_for.last.isoformat(),
        "rows": [written(row) for row in page],
        "next": asked_for.address_after(request.path, *key(page[-1])) if rest else None,
    }


@gate.machine(scopes.REPORTS_READ, "GET")
def report_list(request: HttpRequest, asked: gate.Asked) -> HttpResponse:
    """Every issue of every month's report, newest month first."""
    asking.only(request)
    rows = [shown.report(one, _address(asked, one)) for one in queries.issued(asked.at.book)]
    return _json({"rows": rows})


@gate.machine(scopes.REPORTS_READ, "GET")
def report(request: HttpRequest, asked: gate.Asked, month: str, revision: str) -> HttpResponse:
    """One issue: what it is, and its figures as printed."""
    asking.only(request)
    found = _issue(asked, month, revision)
    figures = list(shown.report_figures(reports.document(found)))
    return _json(shown.report(found, _address(asked, found)) | {"rows": figures})


@gate.machine(scopes.REPORTS_READ, "GET")
def report_pdf(request: HttpRequest, asked: gate.Asked, month: str, revision: str) -> HttpResponse:
    """One issue: the very bytes that were handed out."""
    asking.only(request)
    found = _issue(asked, month, revision)
    answer = HttpResponse(reports.pdf(found), content_type="application/pdf")
    answer["Content-Disposition"] = f'attachment; filename="{found.number}-revision-{found.revision}.pdf"'
    return answer


def _issue(asked: gate.Asked, month: str, revision: str) -> Report:
    fits = re.fullmatch(r"\d{4}-\d{2}", month, re.ASCII) and re.fullmatch(r"\d{1,4}", revision, re.ASCII)
    issues = reports.issues(asked.at.book, month) if fits else []
    found = next((one for one in issues if one.revision == int(revision)), None)
    if found is None:
        raise Problem(404, "There is no such issue.")
    return found


def _address(asked: gate.Asked, found: Report) -> str:
    return reverse("api:report", args=[asked.at.code, found.month, found.revision])


def described(request: HttpRequest) -> HttpResponse:
    """The OpenAPI document; it tells nothing of any works."""
    return _json(document.DOCUMENT)


described.permission = "public"  # type: ignore[attr-defined]
described = login_not_required(described)
