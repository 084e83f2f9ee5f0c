"""The page of a works' tablets, one's own PIN, and the tablet's question whether a PIN is right."""

from __future__ import annotations

import json

from django.contrib import messages
from django.contrib.auth import logout
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.views.decorators.http import require_http_methods, require_POST

from plant.accounts.models import Person
from plant.works import access
from plant.works.tablets import actions, gate, pins, queries
from plant.works.tablets.models import Device


@access.needs("settings.change")
@require_http_methods(["GET", "HEAD", "POST"])
def tablets(request: HttpRequest, at: access.At) -> HttpResponse:
    """Enrols this very browser as a shared tablet; lists tablets and who has a PIN."""
    if request.method == "POST":
        try:
            device, token = actions.enrol(book=at.book, name=request.POST.get("name", ""), by=request.user, now=at.now)
        except actions.Refused as problem:
            messages.error(request, str(problem))
            return redirect("works:tablets", at.code)
        # From here on it is everybody's: the supervisor must not stay signed in on it.
        logout(request)
        messages.success(request, f"This is the tablet {device.name} now. You are signed out on it.")
        answer = redirect("intake:round", at.code)
        answer.set_cookie(
            gate.COOKIE,
            token,
            max_age=gate.A_YEAR_S,
            path=f"/w/{at.code}/",
            secure=request.is_secure(),
            httponly=True,
            samesite="Strict",
        )
        return answer
    context = {"devices": queries.devices(at.book), "hands": queries.hands(at.book, at.stated, at.now)}
    return render(request, "works/tablets.html", context)


@require_POST
@access.needs("settings.change")
def revoke(request: HttpRequest, at: access.At, device: int) -> HttpResponse:
    """A tablet that is lost or given away is refused from now on."""
    found = get_object_or_404(Device, pk=device, book=at.book)
    try:
        actions.revoke(device=found, why=request.POST.get("reason", ""), by=request.user, now=at.now)
    except actions.Refused as problem:
        messages.error(request, str(problem))
    else:
        messages.success(request, f"{found.name} is refused from now on. What it had not sent can be saved as a file on it.")
    return redirect("works:tablets", at.code)


@require_POST
@access.needs("settings.change")
def new_pin(request: HttpRequest, at: access.At, username: str) -> HttpResponse:
    """A PIN for somebody, shown once."""
    hand = next((one for one in queries.hands(at.book, at.stated, at.now) if one.username == username), None)
    person = get_object_or_404(Person, username=hand.username if hand else "")
    pin = pins.new()
    actions.set_pin(book=at.book, person=person, pin=pin, by=request.user, now=at.now)
    return render(request, "works/new_pin.html", {"person": person, "pin": pin})


@access.needs("round.enter")
@require_http_methods(["GET", "HEAD", "POST"])
def own_pin(request: HttpRequest, at: access.At) -> HttpResponse:
    """One's own PIN, set while fully signed in."""
    problem = ""
    if request.method == "POST":
        pin = request.POST.get("pin", "").strip()
        if pin != request.POST.get("again", "").strip():
            problem = "The two are not the same. Nothing is changed."
        else:
            try:
                actions.set_pin(book=at.book, person=request.user, pin=pin, by=request.user, now=at.now)
            except pins.Unfit as unfit:
                problem = str(unfit)
            else:
                messages.success(request, "Your PIN is set. It works at the shared tablets of this works and nowhere else.")
                return redirect("works:own_pin", at.code)
    return render(request, "works/own_pin.html", {"problem": problem, "shortest": pins.SHORTEST, "longest": pins.LONGEST})


@gate.tablet_too
@require_http_methods(["PUT"])
def spell(request: HttpRequest, at: access.At, ident: str) -> JsonResponse:
    """Begins, or confirms, somebody's spell at this tablet by PIN. 200 right, 403 wrong, 429 a pause after wrong tries."""
    tablet = request.tablet  # type: ignore[attr-defined]
    if tablet is None:
        return JsonResponse({"general": "This browser is not an enrolled tablet."}, status=422)
    try:
        said = json.loads(request.body)
        username, pin = str(said["person"]), str(said["pin"])
    except (ValueError, KeyError, TypeError):
        return JsonResponse({"general": "expected person and pin"}, status=400)
    try:
        proof = actions.prove(device=tablet, stated=at.stated, username=username, spell=ident, pin=pin, now=at.now)
    except actions.Refused as problem:
        return JsonResponse({"general": str(problem)}, status=422)
    if proof.right:
        return JsonResponse({"attested": "pin", "confirmed": proof.confirmed})
    if proof.no_pin:
        words = "You have no PIN here yet. Go on with your name only, and ask a supervisor for a PIN."
        return JsonResponse({"general": words, "owed": True}, status=403)
    if proof.locked_until is not None:
        until = f"{at.calendar.local(proof.locked_until):%H:%M}"
        words = f"Too many wrong PINs: the next try is possible at {until}. Entry goes on with your name only."
        return JsonResponse({"general": words, "owed": True}, status=429)
    return JsonResponse({"general": "The PIN is not right. Try again, or go on by name only."}, status=403)
