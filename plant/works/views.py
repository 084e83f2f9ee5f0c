"""The settings pages: what holds, what will, what did; changes with a reason; people; works files."""

from __future__ import annotations

import base64
import binascii
from typing import Any

from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render

from plant import clock
from plant.works import access, actions, forms, kinds, load, pages, queries
from plant.works.access import At


def _kind(name: str) -> kinds.Kind:
    kind = kinds.KINDS.get(name)
    if kind is None or not kind.page:
        raise Http404("There is no such kind of setting.")
    return kind


@access.needs("see")
def settings(request: HttpRequest, at: At) -> HttpResponse:
    """All kinds, and what is about to change."""
    counts = [(kind, sum(1 for _ in at.stated.in_force(kind.name, at.now))) for kind in kinds.ALL if kind.page]
    coming = pages.Reader(at.book, at.stated, at.now).coming()
    return render(request, "works/settings.html", {"counts": counts, "coming": coming, "kinds": kinds.KINDS})


@access.needs("see")
def kind(request: HttpRequest, at: At, kind: str) -> HttpResponse:
    """All subjects of one kind."""
    table = _kind(kind)
    reader = pages.Reader(at.book, at.stated, at.now)
    subjects = reader.subjects(kind)
    context = {"kind": table, "subjects": subjects, "zone": reader.calendar.zone}
    return render(request, "works/kind.html", context)


@access.needs("see")
def subject(request: HttpRequest, at: At, kind: str, subject: str) -> HttpResponse:
    """One subject: now, later, before."""
    table = _kind(kind)
    found = pages.Reader(at.book, at.stated, at.now).subject(kind, subject)
    if found is None:
        raise Http404("Nothing was ever stated of this.")
    return render(request, "works/subject.html", {"kind": table, "subject": found})


@access.needs("settings.change")
def new(request: HttpRequest, at: At, kind: str) -> HttpResponse:
    """States something new of a kind."""
    table = _kind(kind)
    form = forms.ChangeForm(request.POST or None, kind=kind, stated=at.stated, now=at.now, new=True)
    return _change(request, at, table, form, None)


@access.needs("settings.change")
def change(request: HttpRequest, at: At, kind: str, subject: str) -> HttpResponse:
    """Restates a subject."""
    table = _kind(kind)
    found = pages.Reader(at.book, at.stated, at.now).subject(kind, subject)
    if found is None:
        raise Http404("Nothing was ever stated of this.")
    value = found.now.saying.value if found.now else None
    form = forms.ChangeForm(
        request.POST or None,
        kind=kind,
        stated=at.stated,
        now=at.now,
        value=value,
        initial={"seen": found.latest_ref},
    )
    form.subject = subject
    return _change(request, at, table, form, found)


@access.needs("settings.change")
def withdraw(request: HttpRequest, at: At, kind: str, subject: str) -> HttpResponse:
    """Withdraws a subject from a moment on."""
    table = _kind(kind)
    found = pages.Reader(at.book, at.stated, at.now).subject(kind, subject)
    if found is None or found.now is None or found.now.withdrawn or kind == "works":
        raise Http404("There is nothing in force to withdraw.")
    form = forms.WithdrawForm(request.POST or None, kind=kind, stated=at.stated, now=at.now, initial={"seen": found.latest_ref})
    form.subject = subject
    return _change(request, at, table, form, found, withdrawn=True)


def _change(
    request: HttpRequest,
    at: At,
    table: kinds.Kind,
    form: forms.ChangeForm,
    found: pages.Subject | None,
    withdrawn: bool = False,
) -> HttpResponse:
    """Looks first, then states: the first post shows what would be replaced, the second does it."""
    differences = None
    if request.method == "POST" and form.is_valid():
        when, reason = form.cleaned_data["effective_from"], form.cleaned_data["reason"]
        asked = actions.Change(table.name, form.subject, form.value, when, withdrawn, reason)
        try:
            clean = actions.checked(at.stated, [asked])[0]
            before = at.stated.value(table.name, form.subject, when)
            differences = pages.difference(before, None if withdrawn else clean.value)
            if request.POST.get("state") == "yes":
                actions.state(
                    book=at.book,
                    kind=table.name,
                    subject=form.subject,
                    value=form.value,
                    effective_from=when,
                    reason=reason,
                    by=request.user,
                    now=at.now,
                    withdrawn=withdrawn,
                    seen=form.cleaned_data["seen"],
                )
                done = "Withdrawn" if withdrawn else "Stated"
                messages.success(
                    request, f"{done}: {form.subject}, from {at.stated.calendar(at.now).local(when):%d %B %Y %H:%M}."
                )
                return redirect("works:subject", at.code, table.name, form.subject)
        except actions.Refused as problem:
            form.refuse(problem.messages)
        except actions.Overtaken as problem:
            form.add_error(None, str(problem))
    context = {"kind": table, "form": form, "subject": found, "withdrawn": withdrawn, "differences": differences}
    return render(request, "works/change.html", context)


@access.needs("settings.change")
def file(request: HttpRequest, at: At) -> HttpResponse:
    """A works file: a preview of what it would change, then the change."""
    calendar = at.stated.calendar(at.now)
    if request.method == "POST" and "text" in request.POST:
        data = _unpacked(request.POST["text"])
        when = request.POST.get("from") or None
        form = forms.FileForm()
        return _load(request, at, form, data, when, request.POST.get("why", ""), confirmed=True)
    form = forms.FileForm(request.POST or None, request.FILES or None)
    if request.method == "POST" and form.is_valid():
        typed = form.cleaned_data["effective_from"]
        try:
            when = calendar.instant(typed.replace(tzinfo=None)).isoformat() if typed else None
        except clock.LocalTimeError as problem:
            form.add_error("effective_from", str(problem))
        else:
            data = form.cleaned_data["file"].read()
            return _load(request, at, form, data, when, form.cleaned_data["reason"], confirmed=False)
    return render(request, "works/file.html", {"form": form})


def _load(
    request: HttpRequest, at: At, form: forms.FileForm, data: bytes, when: str | None, why: str, *, confirmed: bool
) -> HttpResponse:
    context: dict[str, Any] = {"form": form}
    try:
        code, _ = load.whose(data)
        if code != at.code:
            raise load.FileRefused([f"the file describes the works {code}; these are the settings of {at.code}"])
        if confirmed:
            done = load.load(data=data, by=request.user, now=at.now, effective_from=when, reason=why, source="settings page")
            messages.success(request, f"{done.stated} settings stated, {done.unchanged} held already.")
            return redirect("works:settings", at.code)
        plan = load.plan(data=data, now=at.now, effective_from=when)
        context |= {
            "plan": plan,
            "changes": [
                (item, pages.difference(before, None if item.withdrawn else item.value))
                for item, before in zip(plan.changes, plan.before, strict=True)
            ],
            "text": base64.b64encode(data).decode(),
            "from": when or "",
            "why": why,
        }
    except load.FileRefused as problem:
        context["faults"] = problem.messages
    return render(request, "works/file.html", context)


def _unpacked(text: str) -> bytes:
    try:
        return base64.b64decode(text, validate=True)
    except binascii.Error:
        return b""


@access.anyone
def new_works(request: HttpRequest) -> HttpResponse:
    """The first file of a new works; for the installation's first administrators."""
    if not getattr(request.user, "is_superuser", False):
        raise PermissionDenied("A new works is opened by the administrator of this installation.")
    form = forms.FileForm(request.POST or None, request.FILES or None)
    context: dict[str, Any] = {"form": form}
    if request.method == "POST" and form.is_valid():
        data = form.cleaned_data["file"].read()
        try:
            code, calendar = load.whose(data)
            if queries.exists(code):
                raise load.FileRefused([f"there is a works {code} already: load the file under its own settings"])
            typed = form.cleaned_data["effective_from"]
            when = calendar.instant(typed.replace(tzinfo=None)) if typed else None
            done = load.load(
                data=data,
                by=request.user,
                now=clock.now(),
                effective_from=when,
                reason=form.cleaned_data["reason"],
                source=form.cleaned_data["file"].name[:80],
            )
            messages.success(request, f"{done.book.code} is open: {done.stated} settings stated.")
            return redirect("works:settings", done.book.code)
        except load.FileRefused as problem:
            context["faults"] = problem.messages
        except clock.LocalTimeError as problem:
            form.add_error("effective_from", str(problem))
    return render(request, "works/new_works.html", context)
