"""The list of deviations, one deviation with its life, and a draft limit tried on past days."""

from __future__ import annotations

import datetime as dt
import uuid
from collections.abc import Callable
from typing import Any

from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse
from django.views.decorators.http import require_POST

from plant.deviations import actions, forms, guidance, queries, tables, words
from plant.deviations.queries import DeviationView
from plant.works import access, described, parameters
from plant.works.access import At
from plant.works.stated import NotStated

ROWS = 50
DAYS = 31


def _names(at: At) -> tuple[dict[str, str], dict[str, str]]:
    """Names of places, labels of parameters."""
    names = {
        code: str(value.get("name") or code)
        for kind in ("sample_point", "meter", "vessel", "dosing_point")
        for code, value in at.stated.in_force(kind, at.now)
    }
    return names, {name: item.label for name, item in parameters.known(at.stated, at.now).items()}


def _local(at: At, moment: dt.datetime) -> str:
    return f"{at.stated.calendar(at.now).local(moment):%-d %b %Y %H:%M}"


@access.needs("see")
def everything(request: HttpRequest, at: At) -> HttpResponse:
    """The list, with filters."""
    form = forms.FilterForm(request.GET or None)
    asked: dict[str, Any] = form.cleaned_data if form.is_bound and form.is_valid() else {}
    try:
        today = at.stated.calendar(at.now).day_of(at.now)
    except NotStated:
        return render(request, "deviations/list.html", {"form": form, "table": None})
    which = asked.get("which") or "open"
    if which == "days":
        last = asked.get("last") or today
        first = asked.get("first") or last - dt.timedelta(days=DAYS)
        views = queries.raised_for(at.book, first, last)
    else:
        views = queries.awaiting_approval(at.book) if which == "approval" else queries.open_ones(at.book)
    if asked.get("level"):
        views = [view for view in views if view.level == asked["level"]]
    if asked.get("kind"):
        views = [view for view in views if view.kind == asked["kind"]]
    names, labels = _names(at)
    rows = [
        tables.row(
            view,
            title=words.title(view.kind, view.subject, view.parameter, names, labels),
            path=reverse("deviations:one", args=[at.code, view.ref]),
            since=_local(at, view.since),
            causes=at.member.role != "operator",
        )
        for view in views
    ]
    table = tables.DeviationTable(rows, order_by=request.GET.get("sort", ""))
    table.paginate(page=_page(request, len(rows)), per_page=ROWS)
    return render(request, "deviations/list.html", {"form": form, "table": table, "count": len(rows), "which": which})


def _page(request: HttpRequest, rows: int) -> int:
    """The page asked for, or the nearest there is."""
    text = request.GET.get("page", "1")
    return min(max(int(text) if text.isdecimal() else 1, 1), max(-(-rows // ROWS), 1))


@access.needs("see")
def one(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    """One deviation with its life."""
    return _page_of(request, at, _found(at, ref))


def _found(at: At, ref: str) -> DeviationView:
    view = queries.one(at.book, ref)
    if view is None:
        raise Http404("There is no such deviation.")
    return view


def _page_of(request: HttpRequest, at: At, view: DeviationView, bound: Any = None, status: int = 200) -> HttpResponse:
    names, labels = _names(at)
    direction = guidance.direction(view.kind, view.value, view.limit)
    member = at.member
    context = {
        "view": view,
        "title": words.title(view.kind, view.subject, view.parameter, names, labels),
        "state": words.STATES.get(view.state, view.state),
        "since": _local(at, view.since),
        "raised_at": _local(at, view.raised_at),
        "life": [_told(at, event) for event in view.events],
        "owed": [(item, _local(at, item.due), item.due < at.now) for item in view.tellings_owed],
        "causes": [(words.CAUSES.get(cause.name, cause.name), cause) for cause in view.causes]
        if member.role != "operator"
        else [],
        "guidance": guidance.guidance(view.kind, view.parameter, direction),
        "governs": guidance.GOVERNS,
        "forms": _forms(at, view, bound),
        "readings": view.refs[:20],
        "statement": _statement(at, view),
    }
    return render(request, "deviations/one.html", context, status=status)


def _statement(at: At, view: DeviationView) -> str:
    """Where the limit is stated; empty for a default of the program."""
    return reverse("works:subject", args=[at.code, "limit", view.code]) if view.statement else ""


def _told(at: At, event: queries.EventView) -> dict[str, Any]:
    """One step of the life in words."""
    said = event.fields
    lines = {
        "raised": said.get("sentence", ""),
        "finding": f"{said.get('value', '')}: {said.get('sentence', '')}",
        "acknowledged": said.get("note", ""),
        "told": ", ".join(str(said[key]) for key in ("who", "how", "reference") if said.get(key)),
        "cause": ", ".join(
            part for part in (words.CAUSES.get(str(said.get("cause", "")), ""), str(said.get("words", ""))) if part
        ),
        "action": said.get("words", ""),
        "verified": ", ".join(str(said[key]) for key in ("words", "note") if said.get(key)),
        "closed": said.get("note", ""),
        "comment": said.get("words", ""),
        "approved": said.get("note", ""),
        "corrected_away": "nothing of it is left" if said.get("whole") else f"it was {said.get('was', '')}",
    }
    title = words.EVENTS.get(event.kind, event.kind)
    if said.get("awaiting"):
        title += ", awaiting approval by somebody else"
    if said.get("after_closing"):
        title += ", after closing"
    return {
        "title": title,
        "words": lines.get(event.kind, ""),
        "day": event.day,
        "at": _local(at, event.at),
        "recorded": _local(at, event.recorded_at),
        "by": event.by,
        "reading": said.get("reading", ""),
    }


Step = tuple[str, str, Any, str]


def _forms(at: At, view: DeviationView, bound: tuple[str, Any] | None) -> list[Step]:
    """The steps that may be taken now by this person: (name, title, form, button)."""
    calendar = at.stated.calendar(at.now)
    fresh = {"client_id": uuid.uuid4().hex}
    made: list[tuple[str, str, str, bool, Callable[[], Any], str]] = [
        ("acknowledge", "Take it on", "deviation.acknowledge", view.state == "raised",
         lambda: forms.NoteForm(initial=fresh, prefix="acknowledge"), "Acknowledge"),
        ("tell", "Somebody was told", "deviation.act", bool(view.open or view.tellings_owed),
         lambda: forms.TellForm(initial=fresh | {"who": _first_owed(view)}, prefix="tell", calendar=calendar), "Write it down"),
        ("act", "Cause and what was done", "deviation.act", view.open,
         lambda: forms.ActForm(initial=fresh, prefix="act", calendar=calendar), "Write it down"),
        ("verify", "Is it back inside?", "deviation.act", view.open and view.state != "verified",
         lambda: forms.NoteForm(initial=fresh, prefix="verify"), "Look, and write it down"),
        ("approve", "Approve the correction", "deviation.close", view.awaiting_approval,
         lambda: forms.NoteForm(initial=fresh, prefix="approve"), "Approve"),
        ("close", "Close it", "deviation.close", view.open,
         lambda: forms.NoteForm(initial=fresh, prefix="close"), "Close"),
        ("comment", "Comment", "deviation.acknowledge", True,
         lambda: forms.CommentForm(initial=fresh, prefix="comment"), "Add"),
    ]  # fmt: skip
    out = []
    for name, title, right, fits, make, button in made:
        if at.member.may(right) and (fits or (bound is not None and bound[0] == name)):
            form = bound[1] if bound is not None and bound[0] == name else make()
            out.append((name, title, form, button))
    return out


def _first_owed(view: DeviationView) -> str:
    return view.tellings_owed[0].who if view.tellings_owed else ""


def _step(
    request: HttpRequest, at: At, ref: str, name: str, form: Any, take: Callable[..., DeviationView], done: str
) -> HttpResponse:
    """Takes one step, or shows the page again with what was typed and why it was not taken."""
    view = _found(at, ref)
    if not form.is_valid():
        return _page_of(request, at, view, (name, form), 422)
    try:
        take(book=at.book, ref=ref, by=request.user, now=at.now, **form.cleaned_data)
    except actions.NotAllowed as problem:
        raise PermissionDenied(str(problem)) from None
    except actions.NotPossible as problem:
        form.add_error(None, f"Not done: {problem}.")
        return _page_of(request, at, _found(at, ref), (name, form), 409)
    messages.success(request, done)
    return redirect("deviations:one", at.code, ref)


@require_POST
@access.needs("deviation.acknowledge")
def acknowledge(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.NoteForm(request.POST, prefix="acknowledge")
    return _step(request, at, ref, "acknowledge", form, actions.acknowledge, "You have it.")


@require_POST
@access.needs("deviation.act")
def tell(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.TellForm(request.POST, prefix="tell", calendar=at.stated.calendar(at.now))
    return _step(request, at, ref, "tell", form, actions.tell, "Written down who was told.")


@require_POST
@access.needs("deviation.act")
def act(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.ActForm(request.POST, prefix="act", calendar=at.stated.calendar(at.now))
    return _step(request, at, ref, "act", form, actions.act, "Written down.")


@require_POST
@access.needs("deviation.act")
def verify(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.NoteForm(request.POST, prefix="verify")
    return _step(request, at, ref, "verify", form, actions.verify, "Back inside.")


@require_POST
@access.needs("deviation.close")
def approve(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.NoteForm(request.POST, prefix="approve")
    return _step(request, at, ref, "approve", form, actions.approve, "The correction counts from now on.")


@require_POST
@access.needs("deviation.close")
def close(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.NoteForm(request.POST, prefix="close")
    return _step(request, at, ref, "close", form, actions.close, "Closed.")


@require_POST
@access.needs("deviation.acknowledge")
def comment(request: HttpRequest, at: At, ref: str) -> HttpResponse:
    form = forms.CommentForm(request.POST, prefix="comment")
    return _step(request, at, ref, "comment", form, actions.comment, "Added.")


@access.needs("settings.change")
def trial(request: HttpRequest, at: At) -> HttpResponse:
    """A draft limit on past days: when it would have fired. Nothing is written."""
    form = forms.DraftForm(request.GET or None, stated=at.stated, now=at.now)
    found, span = None, ""
    if form.is_bound and form.is_valid():
        calendar = at.stated.calendar(at.now)
        last = calendar.day_of(at.now) - dt.timedelta(days=1)
        first = last - dt.timedelta(days=form.cleaned_data["days"] - 1)
        limit = described.limit("draft", form.cleaned_data["value"])
        found = actions.try_limit(book=at.book, limit=limit, first=first, last=last, now=at.now)
        span = f"{first:%-d %b %Y} to {last:%-d %b %Y}"
    return render(request, "deviations/trial.html", {"form": form, "found": found, "span": span})
