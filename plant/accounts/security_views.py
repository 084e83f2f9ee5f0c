"""The second half of signing in, and one's own second factor."""

from __future__ import annotations

from typing import Any

from django import forms
from django.contrib import auth, messages
from django.contrib.auth.decorators import login_not_required
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.utils.http import url_has_allowed_host_and_scheme
from django.views.decorators.cache import never_cache
from django.views.decorators.debug import sensitive_post_parameters

from plant import clock
from plant.accounts import security, security_sessions, totp
from plant.accounts.models import Person

PENDING = "second_factor_pending"
PENDING_FOR_S = 300
NEXT = "second_factor_next"


class CodeForm(forms.Form):
    """Six figures, or a recovery code."""

    code = forms.CharField(
        label="Code",
        max_length=20,
        widget=forms.TextInput(attrs={"autocomplete": "one-time-code", "autocapitalize": "none", "spellcheck": "false"}),
    )


class ConfirmedForm(CodeForm):
    """A code, and the password once more, so that an open screen is not enough."""

    password = forms.CharField(label="Password", widget=forms.PasswordInput(attrs={"autocomplete": "current-password"}))
    field_order = ("password", "code")


class PasswordOnlyForm(forms.Form):
    """The password once more."""

    password = forms.CharField(label="Password", widget=forms.PasswordInput(attrs={"autocomplete": "current-password"}))


def hold_back(request: HttpRequest, person: Any, next_page: str) -> HttpResponse:
    """The password was right; a code is asked for before anybody is signed in."""
    request.session.cycle_key()
    request.session[PENDING] = [person.pk, person.backend, clock.now().timestamp(), person.get_session_auth_hash()]
    request.session[NEXT] = next_page
    return redirect("accounts:code")


@login_not_required
@never_cache
@sensitive_post_parameters()
def code(request: HttpRequest) -> HttpResponse:
    """The code that a telephone shows now."""
    now = clock.now()
    person, backend = _pending(request, now.timestamp())
    if person is None:
        return redirect("accounts:sign_in")
    form = CodeForm(request.POST or None)
    status = 200
    if request.method == "POST" and form.is_valid():
        try:
            security.check_code(person=person, code=form.cleaned_data["code"], now=now, request=request)
        except security.Refused as problem:
            form.add_error("code", str(problem))
            status = 422
        else:
            following = request.session.pop(NEXT, "/")
            request.session.pop(PENDING, None)
            auth.login(request, person, backend=backend)
            security_sessions.begin(request, now)
            security.record(kind=security.Kind.SIGNED_IN, now=now, person=person, request=request)
            safe = url_has_allowed_host_and_scheme(
                following, allowed_hosts={request.get_host()}, require_https=request.is_secure()
            )
            return redirect(following if safe else "/")
    return render(request, "accounts/code.html", {"form": form}, status=status)


def _pending(request: HttpRequest, moment: float) -> tuple[Person | None, str]:
    key, backend, since, password_mark = request.session.get(PENDING, (None, "", 0, ""))
    if key is None or moment - since > PENDING_FOR_S:
        return None, ""
    person = Person.objects.filter(pk=key, is_active=True).first()
    # A password that was changed meanwhile ends what was begun with the old one.
    if person is None or person.get_session_auth_hash() != password_mark:
        return None, ""
    return person, backend


@never_cache
@sensitive_post_parameters()
def second_factor(request: HttpRequest) -> HttpResponse:
    """Takes a second factor into use, or removes it; both with the password."""
    person = request.user
    assert isinstance(person, Person)
    if security.has_second_factor(person):
        return _remove(request, person)
    secret = security.offered(person) or security.offer(person=person)
    form = ConfirmedForm(request.POST or None)
    if request.method == "POST" and form.is_valid() and _password_fits(request, form):
        try:
            recovery = security.confirm(person=person, code=form.cleaned_data["code"], now=clock.now(), request=request)
        except security.Refused as problem:
            form.add_error("code", str(problem))
        else:
            return render(request, "accounts/recovery.html", {"recovery": recovery})
    context = {"form": form, "key": totp.in_base32(secret), "address": totp.address(secret, person.username)}
    return render(request, "accounts/second_factor.html", context, status=422 if form.errors else 200)


def _remove(request: HttpRequest, person: Person) -> HttpResponse:
    form = PasswordOnlyForm(request.POST or None)
    if request.method == "POST" and form.is_valid() and _password_fits(request, form):
        security.remove(person=person, by=person, now=clock.now(), request=request)
        messages.success(request, "The second factor is removed. The password alone signs you in now.")
        return redirect("accounts:second_factor")
    return render(request, "accounts/second_factor.html", {"form": form, "in_use": True}, status=422 if form.errors else 200)


def _password_fits(request: HttpRequest, form: forms.Form) -> bool:
    # By way of authenticate, so that guessing here is braked like guessing at the sign-in.
    found = auth.authenticate(request, username=request.user.get_username(), password=form.cleaned_data["password"])
    if found is None:
        form.add_error("password", "This is not your password.")
    return found is not None


# Read by the walk over all addresses.
code.permission = "public"  # type: ignore[attr-defined]
second_factor.permission = "anyone"  # type: ignore[attr-defined]
