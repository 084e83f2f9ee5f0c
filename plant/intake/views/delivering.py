"""Deliveries and transfers at the works, and taking one out of the reckoning again."""

from __future__ import annotations

import datetime as dt
import uuid
from typing import Any

from django.contrib import messages
from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods

from plant.files import actions as files
from plant.files import kinds
from plant.files import queries as documents
from plant.intake import advice, cells, corrections, filling, meeting, movement_forms, receiving, weighing
from plant.intake.views import wall
from plant.ledger import actions as ledger
from plant.stock import actions as stock_actions
from plant.stock import queries as stock
from plant.works import access

RECENT = dt.timedelta(days=35)
_TWICE = "This has been sent before with other values; nothing was added. Look at the list below."


@access.needs("delivery.enter")
@require_http_methods(["GET", "HEAD", "POST"])
def delivery(request: HttpRequest, at: access.At) -> HttpResponse:
    """The checks before connecting, the form, and the loads of the last weeks."""
    form = movement_forms.DeliveryForm(
        request.POST or None,
        request.FILES or None,
        stated=at.stated,
        at=at.now,
        initial={"timestamp": _local(at), "vessel": request.GET.get("vessel"), "order": request.GET.get("order")},
        orders=[(one.ref, str(one)) for one in stock.orders(at.book)],
        may_accept=at.member.may("record.correct"),
    )
    refused: list[str] = []
    if request.method == "POST":
        already_in = "already_in" in request.POST
        for name in ("checked", "others_locked", "second_person"):
            form.fields[name].required = not already_in
        if form.is_valid():
            given = form.cleaned_data
            try:
                received = receiving.deliver(
                    book=at.book,
                    stated=at.stated,
                    cells=form.cells(),
                    second_person=given["second_person"],
                    already_in=already_in,
                    by=request.user,
                    now=at.now,
                    client_id=_client_id(request),
                    levels=weighing.Levels(given["level_before"], given["level_after"]) if given["level_after"] else None,
                    papers=_papers(at, given["certificate"], _client_id(request)),
                    order=stock.order(at.book, given.get("order") or ""),
                    accepted_because=given.get("accepted_because", ""),
                    quarantine=given["quarantine"],
                )
            except cells.Unreadable as problem:
                form.refuse(problem.column, f"Read {problem.read}; expected {problem.expected}.")
            except receiving.NotToBeConnected as problem:
                refused = problem.problems
            except receiving.WantsAcceptance as problem:
                who = (
                    "State why it is accepted, below"
                    if "accepted_because" in form.fields
                    else "A supervisor may accept it, with a reason"
                )
                form.refuse("accepted_because", f"{problem} {who}; or send it back.")
            except kinds.NotKept as problem:
                form.refuse("certificate", f"Not kept: {problem}.")
            except ledger.ContentDiffers:
                form.refuse("", _TWICE)
            else:
                if received.rise:
                    (messages.warning if received.differs else messages.info)(request, received.rise)
                return _done(request, at, received.taken, "intake:delivery")
        if form.errors:
            refused = receiving.against(book=at.book, stated=at.stated, cells=form.typed(), now=at.now)
    context = {
        "form": form,
        "cautions": advice.DELIVERY,
        "refused": refused,
        "already": advice.ALREADY_UNLOADED,
        "room": _rooms(at),
        "recent": _recent(at, stock.deliveries(at.book, start=at.now - RECENT, end=at.now + dt.timedelta(days=1))),
        "client_id": _client_id(request),
    }
    return render(request, "intake/delivery.html", context, status=_status(form, refused))


@access.needs("delivery.enter")
@require_http_methods(["GET", "HEAD", "POST"])
def transfer(request: HttpRequest, at: access.At) -> HttpResponse:
    """The form for a transfer, and those of the last weeks."""
    form = movement_forms.TransferForm(request.POST or None, stated=at.stated, at=at.now, initial={"timestamp": _local(at)})
    refused: list[str] = []
    if request.method == "POST" and form.is_valid():
        try:
            taken = receiving.move(
                book=at.book, stated=at.stated, cells=form.cells(), already_in="already_in" in request.POST, by=request.user,
                now=at.now, client_id=_client_id(request),
            ).taken  # fmt: skip
        except receiving.NotToBeConnected as problem:
            refused = problem.problems
        except cells.Unreadable as problem:
            form.refuse(problem.column, f"Read {problem.read}; expected {problem.expected}.")
        except ledger.ContentDiffers:
            form.refuse("", _TWICE)
        else:
            return _done(request, at, taken, "intake:transfer")
    context = {
        "form": form,
        "refused": refused,
        "already": advice.ALREADY_UNLOADED,
        "recent": _recent(at, stock.transfers(at.book, start=at.now - RECENT, end=at.now + dt.timedelta(days=1))),
        "client_id": _client_id(request),
    }
    return render(request, "intake/transfer.html", context, status=_status(form, refused))


@access.needs("delivery.enter")
@require_http_methods(["GET", "HEAD", "POST"])
def reverse(request: HttpRequest, at: access.At, kind: str, ref: str) -> HttpResponse:
    """Takes a delivery or transfer out of the reckoning; operators their own, supervisors any."""
    find = {"delivery": stock.delivery, "transfer": stock.transfer}.get(kind)
    found: Any = find(at.book, ref) if find is not None else None
    if found is None:
        raise Http404("There is no such delivery or transfer.")
    if not at.member.may("record.correct") and found.entry.recorded_by_id != request.user.pk:
        raise PermissionDenied("This needs the right “record.correct”: somebody else has entered it.")
    problem = ""
    if request.method == "POST":
        try:
            corrections.reverse(
                book=at.book,
                movement=found,
                reason=request.POST.get("reason", ""),
                by=request.user,
                now=at.now,
                client_id=_client_id(request),
            )
        except (stock_actions.AlreadyReversed, stock_actions.ReasonMissing, ledger.ContentDiffers) as refusal:
            problem = str(refusal)
        else:
            messages.success(request, "Reversed. Enter it again where it belongs.")
            return redirect(f"intake:{kind}", code=at.code)
    context = {
        "found": found,
        "kind": kind,
        "problem": problem,
        "reason": request.POST.get("reason", ""),
        "taken_at": wall.at(at.stated.calendar(at.now), found.taken_at),
        "client_id": _client_id(request),
    }
    return render(request, "intake/reverse.html", context, status=422 if problem else 200)


def _done(request: HttpRequest, at: access.At, taken: Any, where: str) -> HttpResponse:
    if not taken.created:
        messages.info(request, "This had been sent already; nothing was added.")
    else:
        messages.success(request, "In the book.")
    for found in taken.findings:
        messages.warning(request, found.sentence or str(found))
    return redirect(where, code=at.code)


def _status(form: movement_forms.DeliveryForm | movement_forms.TransferForm, refused: list[str]) -> int:
    return 422 if refused or (form.is_bound and form.errors) else 200


def _client_id(request: HttpRequest) -> str:
    return request.POST.get("client_id") or uuid.uuid4().hex


def _local(at: access.At) -> str:
    return f"{at.stated.calendar(at.now).local(at.now):%Y-%m-%dT%H:%M}"


def _papers(at: access.At, upload: Any, client_id: str) -> list[Any]:
    """The certificate as a document of this delivery. Raises kinds.NotKept."""
    if not upload:
        return []
    if upload.size > kinds.MOST_BYTES:
        raise kinds.NotKept(f"the file has {upload.size / 1e6:.1f} MB; at most {kinds.MOST_BYTES / 1e6:.0f} MB are kept")
    return [files.document(content=upload.read(), name=upload.name, about=client_id, made_at=at.now)]


def _rooms(at: access.At) -> list[dict[str, Any]]:
    calendar = at.stated.calendar(at.now)
    out = []
    for vessel in at.stated.vessels(at.now):
        space = filling.room(at.book, at.stated, vessel, at.now)
        beside = meeting.neighbours(at.stated, vessel, vessel.product, at.now)
        dip_at = wall.at(calendar, space.dip_at) if space.dip_at else None
        out.append({"vessel": vessel, "room": space, "dip_at": dip_at, "beside": [one.words for one in beside]})
    return out


def _recent(at: access.At, rows: Any) -> list[dict[str, Any]]:
    calendar = at.stated.calendar(at.now)
    papers: dict[str, list[Any]] = {}
    for paper in documents.about(at.book, [row.entry.client_id for row in rows]):
        papers.setdefault(paper.about, []).append(paper)
    return [
        {"row": row, "at": wall.at(calendar, row.taken_at), "papers": papers.get(row.entry.client_id, [])}
        for row in reversed(rows)
    ]
