"""The months, one month with its signatures, its files, and the check of a file."""

from __future__ import annotations

import datetime as dt
from typing import Any

from django.contrib import messages
from django.contrib.auth import authenticate
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from plant.reports import actions, checklist, content, drafts, facts, forms, queries, shown, workbook, yearly
from plant.reports.month import Month, NoSuchMonth, gather
from plant.reports.pdf.document import Document
from plant.works import access

KINDS = {
    "pdf": "application/pdf",
    "csv": "text/csv; charset=utf-8",
    "xlsx": "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet",
}
NOT_SIGNED = "That is not your password. Nothing was signed; what you wrote is still here."


@require_safe
@access.needs("see")
def months(request: HttpRequest, at: access.At) -> HttpResponse:
    """All months with anything on record, newest first, each with its state."""
    form = at.stated.value("report", "form", at.now) or {}
    calendar = at.stated.calendar(at.now)
    found = queries.months(at.book, calendar, at.now, due_day=form.get("due_day"))
    today = calendar.local(at.now).date()
    years = sorted({one.code[:4] for one in found if one.issued}, reverse=True)
    return render(request, "reports/months.html", {"at": at, "months": found, "today": today, "years": years})


@require_safe
@access.needs("see")
def month(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """What hinders at the left, the report as it will print at the right; or an issue, as it was printed."""
    year, number = _parsed(month)
    gathered = _gathered(at, year, number)
    issues = queries.issues(at.book, month)
    wanted = request.GET.get("revision", "")
    report = next((one for one in issues if str(one.revision) == wanted), None)
    if report is None and issues and "draft" not in request.GET:
        report = issues[0]
    return render(request, "reports/month.html", _context(at, gathered, issues, report, draft=report is None))


def _context(at: access.At, gathered: Month, issues: list[Any], report: Any, *, draft: bool, **more: Any) -> dict[str, Any]:
    newest = issues[0] if issues else None
    sections = content.sections(gathered) if draft or newest is not None else None
    since = queries.changed_since_issue(newest, gathered, sections) if newest is not None else None
    open_items = checklist.of(gathered)
    prepared = queries.preparation(at.book, gathered.code)
    working = newest is None or (since is not None and since.anything)
    must = [item for item in open_items if item.must]
    if draft:
        made: Document = content.whole(
            gathered, sections or (), revision=0, issued_at=gathered.now, signed=content.NOBODY, draft=True
        )
    else:
        made = queries.document(report)
    changed_since_prepared = prepared is not None and bool(
        queries.changes.since(at.book, gathered.start, gathered.end, after=prepared.known_seq)
    )
    return {
        "at": at,
        "month": gathered,
        "issues": [(one, gathered.local(one.issued_at)) for one in issues],
        "prepared_at": gathered.local(prepared.prepared_at) if prepared else "",
        "report": report,
        "newest": newest,
        "since": since,
        "open_items": open_items,
        "must": must,
        "prepared": prepared,
        "working": working,
        "document": made,
        "sections": shown.sections(made, at.code),
        "changed_since_prepared": changed_since_prepared,
        "draft": draft,
        **_draft_context(at, gathered.code),
        "code": gathered.code,
        "notice": content.document.NOTICE,
        "may_prepare": at.member.may(actions.PREPARED),
        "may_certify": at.member.may(actions.CERTIFIED),
        "prepare_form": more.get("prepare_form") or forms.PrepareForm([item for item in open_items if not item.must]),
        "certify_form": more.get("certify_form") or forms.CertifyForm(revision=newest is not None),
    }


@require_POST
@access.needs("report.sign_prepared")
def prepare(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """Signs a month as prepared."""
    year, number = _parsed(month)
    gathered = _gathered(at, year, number)
    form = forms.PrepareForm([item for item in checklist.of(gathered) if not item.must], request.POST)
    if form.is_valid():
        try:
            _password_counts(request, form.cleaned_data["password"])
            actions.prepare(
                book=at.book,
                year=year,
                month=number,
                by=request.user,
                password=form.cleaned_data["password"],
                explanations=form.explanations,
                now=at.now,
            )
        except actions.WrongPassword:
            form.add_error("password", NOT_SIGNED)
        except (actions.NotReady, actions.MayNotSign) as problem:
            form.add_error(None, f"Not prepared. Still to mend or explain: {problem}")
        else:
            messages.success(request, f"{gathered.words} is prepared and waits to be certified.")
            return redirect("reports:month", code=at.code, month=month)
    return _again(request, at, gathered, prepare_form=form)


@require_POST
@access.needs("report.sign_certified")
def certify(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """Certifies and issues what was prepared."""
    year, number = _parsed(month)
    gathered = _gathered(at, year, number)
    form = forms.CertifyForm(request.POST, revision=queries.latest(at.book, month) is not None)
    if form.is_valid():
        try:
            _password_counts(request, form.cleaned_data["password"])
            done = actions.certify_and_issue(
                book=at.book,
                year=year,
                month=number,
                by=request.user,
                password=form.cleaned_data["password"],
                now=at.now,
                reason=form.cleaned_data.get("reason", ""),
            )
        except actions.WrongPassword:
            form.add_error("password", NOT_SIGNED)
        except (actions.NotPrepared, actions.ReasonMissing, actions.MayNotSign) as problem:
            form.add_error(None, f"Not issued. {problem}")
        else:
            words = "is issued" if done.created else "had been issued before; this is that report"
            messages.success(request, f"{done.report.number}, revision {done.report.revision}, {words}.")
            return redirect("reports:month", code=at.code, month=month)
    return _again(request, at, gathered, certify_form=form)


def _again(request: HttpRequest, at: access.At, gathered: Month, **form: Any) -> HttpResponse:
    issues = queries.issues(at.book, gathered.code)
    return render(request, "reports/month.html", _context(at, gathered, issues, None, draft=True, **form), status=422)


def _password_counts(request: HttpRequest, password: str) -> None:
    """A wrong password at signing counts as a wrong sign-in, so that guessing is slowed in the same way."""
    if authenticate(request, username=request.user.get_username(), password=password) is None:
        raise actions.WrongPassword(NOT_SIGNED)


@require_safe
@access.needs("see")
def draft_file(request: HttpRequest, at: access.At, month: str, kind: str) -> HttpResponse:
    """The draft as a file."""
    year, number = _parsed(month)
    return _file(content.draft(_gathered(at, year, number)), f"{at.code}-{month}-draft", kind)


@require_safe
@access.needs("see")
def draft_state(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """How far the draft is, for the page that is open to fetch again."""
    _parsed(month)
    return render(request, "reports/draft.html", {"at": at, "code": month, **_draft_context(at, month)})


@require_POST
@access.needs("report.sign_prepared")
def ask_draft(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """Asks for a new draft. Asking twice is asking once."""
    _parsed(month)
    drafts.ask(book=at.book, month=month, now=at.now)
    return redirect("reports:month", code=at.code, month=month)


def _draft_context(at: access.At, month: str) -> dict[str, Any]:
    calendar = at.stated.calendar(at.now)
    found = drafts.state(at.book, month, calendar=calendar, now=at.now)
    made_at = calendar.local(found.kept.made_at).replace(tzinfo=None) if found.kept else None
    may_ask = at.member.may(actions.PREPARED) and queries.preparation(at.book, month) is None
    return {"making": found, "made_at": made_at, "may_ask_draft": may_ask}


@require_safe
@access.needs("see")
def year_file(request: HttpRequest, at: access.At, year: int, kind: str) -> HttpResponse:
    """The yearly summary as a file."""
    try:
        made = yearly.summary(at.book, year, now=at.now)
    except yearly.NothingIssued as problem:
        raise Http404(str(problem)) from None
    return _file(made, f"{at.code}-{year}-summary", kind)


@require_safe
@access.needs("see")
def kept_draft(request: HttpRequest, at: access.At, month: str) -> HttpResponse:
    """The draft that a worker has made."""
    kept = drafts.of(at.book, month)
    if kept is None:
        raise Http404("No draft of this month has been made.")
    return _attached(bytes(kept.pdf), f"{at.code}-{month}-draft", "pdf")


@require_safe
@access.needs("see")
def issued_file(request: HttpRequest, at: access.At, month: str, revision: int, kind: str) -> HttpResponse:
    """An issue as a file: the very bytes, or the figures of its stored content."""
    report = next((one for one in queries.issues(at.book, month) if one.revision == revision), None)
    if report is None:
        raise Http404("There is no such issue of this month.")
    name = f"{report.number}-revision-{report.revision}"
    if kind == "pdf":
        return _attached(queries.pdf(report), name, kind)
    return _file(queries.document(report), name, kind)


def _file(made: Document, name: str, kind: str) -> HttpResponse:
    if kind == "pdf":
        return _attached(content.render(made), name, kind)
    if kind == "csv":
        return _attached(facts.to_csv(made).encode(), name, kind)
    if kind == "xlsx":
        return _attached(workbook.to_xlsx(made), name, kind)
    raise Http404("A report comes as pdf, csv or xlsx.")


def _attached(data: bytes, name: str, kind: str) -> HttpResponse:
    answer = HttpResponse(data, content_type=KINDS[kind])
    answer["Content-Disposition"] = f'attachment; filename="{name}.{kind}"'
    return answer


@require_http_methods(["GET", "HEAD", "POST"])
@access.needs("see")
def check(request: HttpRequest, at: access.At) -> HttpResponse:
    """Whether a dropped PDF is an issued report of this works, unaltered. The file is not kept."""
    form = forms.CheckForm(request.POST, request.FILES) if request.method == "POST" else forms.CheckForm()
    found = None
    if form.is_bound and form.is_valid():
        found = queries.check_file(at.book, form.cleaned_data["file"].read())
    return render(request, "reports/check.html", {"at": at, "form": form, "found": found})


def _parsed(month: str) -> tuple[int, int]:
    try:
        found = dt.date.fromisoformat(f"{month}-01")
    except ValueError:
        raise Http404("A month is written YYYY-MM.") from None
    return found.year, found.month


def _gathered(at: access.At, year: int, number: int) -> Month:
    try:
        return gather(at.book, year, number, now=at.now)
    except NoSuchMonth as problem:
        raise Http404(str(problem)) from None
