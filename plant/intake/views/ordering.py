"""Orders placed: what is on its way, and ending an order that will not come."""

from __future__ import annotations

import uuid
from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_http_methods, require_POST, require_safe

from plant.intake import actions, movement_forms
from plant.ledger import actions as ledger
from plant.stock import actions as stock_actions
from plant.stock import queries as stock
from plant.stock.models import Order
from plant.works import access


@access.needs("see")
@require_safe
def orders(request: HttpRequest, at: access.At) -> HttpResponse:
    """What is on order, the first expected first, and the form for those who place orders."""
    today = at.stated.calendar(at.now).local(at.now).date()
    form = movement_forms.OrderForm(
        stated=at.stated, at=at.now, initial={"ordered_on": today, "product": request.GET.get("product")}
    )
    return _show(request, at, form)


@access.needs("order.place")
@require_http_methods(["POST"])
def place(request: HttpRequest, at: access.At) -> HttpResponse:
    """Records an order."""
    form = movement_forms.OrderForm(request.POST, stated=at.stated, at=at.now)
    if form.is_valid():
        row = Order(**form.cleaned_data)
        received = {key: str(value) for key, value in form.cleaned_data.items()}
        try:
            taken = _take(request, at, received, [row])
        except ledger.ContentDiffers:
            form.add_error(None, "This has been sent before with other values; nothing was added. Look at the list.")
        else:
            messages.success(request, "Recorded." if taken.created else "This had been recorded already.")
            return redirect("intake:orders", code=at.code)
    return _show(request, at, form, status=422)


@access.needs("order.place")
@require_POST
def cancel(request: HttpRequest, at: access.At, ref: str) -> HttpResponse:
    """Ends an order that will not come."""
    found = stock.order(at.book, ref)
    if found is None:
        raise Http404("There is no such open order.")
    why = request.POST.get("reason", "")
    try:
        rows = stock_actions.reversal(old=found, reason=f"cancelled: {why.strip()}" if len(why.strip()) > 2 else "")
    except stock_actions.ReasonMissing as problem:
        messages.error(request, f"Not cancelled: {problem}.")
    else:
        _take(request, at, {"cancel": ref, "reason": why}, rows)
        messages.success(request, "Cancelled.")
    return redirect("intake:orders", code=at.code)


def _take(request: HttpRequest, at: access.At, received: dict[str, Any], rows: list[Any]) -> actions.Taken:
    return actions.take(
        book=at.book, client_id=request.POST.get("client_id") or uuid.uuid4().hex, kind="order", received=received, rows=rows,
        by=request.user, now=at.now, judge=False,
    )  # fmt: skip


def _show(request: HttpRequest, at: access.At, form: movement_forms.OrderForm, status: int = 200) -> HttpResponse:
    today = at.stated.calendar(at.now).local(at.now).date()
    found = [{"row": one, "late": one.expected_on < today} for one in stock.orders(at.book)]
    context = {
        "form": form, "orders": found, "client_id": request.POST.get("client_id") or uuid.uuid4().hex,
        "may_place": at.member.may("order.place"), "may_receive": at.member.may("delivery.enter"),
    }  # fmt: skip
    return render(request, "intake/orders.html", context, status=status)
