"""Signing in and out, a new password, and day or night colours. None of it belongs to a works."""

from __future__ import annotations

from typing import Any

from django.contrib import messages
from django.contrib.auth import views as auth_views
from django.contrib.auth.decorators import login_not_required
from django.contrib.auth.forms import AuthenticationForm, PasswordChangeForm
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import reverse_lazy
from django.utils.http import url_has_allowed_host_and_scheme
from django.views.decorators.http import require_POST

from plant import clock
from plant.accounts import forms, security, security_sessions, security_views

THEMES = ("day", "night")
A_YEAR_S = 365 * 24 * 3600


class SignIn(auth_views.LoginView):
    """A page that also says why somebody was sent here."""

    template_name = "accounts/sign_in.html"
    authentication_form = forms.SignInForm
    redirect_authenticated_user = True

    def post(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        if security.address_must_wait(request, clock.now()):
            return render(request, "accounts/locked.html", {"address": True}, status=429)
        return super().post(request, *args, **kwargs)

    def form_valid(self, form: AuthenticationForm) -> HttpResponse:
        person = form.get_user()
        if security.has_second_factor(person):
            return security_views.hold_back(self.request, person, self.get_success_url())
        now, answer = clock.now(), super().form_valid(form)
        security_sessions.begin(self.request, now)
        security.record(kind=security.Kind.SIGNED_IN, now=now, person=person, request=self.request)
        return answer

    def form_invalid(self, form: AuthenticationForm) -> HttpResponse:
        security.refused(username=form.data.get("username", ""), request=self.request, now=clock.now())
        return super().form_invalid(form)


class SignOut(auth_views.LogoutView):
    """Ends the session, and says so in the record."""

    def post(self, request: HttpRequest, *args: Any, **kwargs: Any) -> HttpResponse:
        if request.user.is_authenticated:
            security.record(kind=security.Kind.SIGNED_OUT, now=clock.now(), person=request.user, request=request)
        return super().post(request, *args, **kwargs)


class Password(auth_views.PasswordChangeView):
    """The person stays signed in here; sessions elsewhere end."""

    template_name = "accounts/password.html"
    form_class = forms.PasswordForm
    success_url = reverse_lazy("accounts:password")

    def form_valid(self, form: PasswordChangeForm) -> HttpResponse:
        security.record(
            kind=security.Kind.PASSWORD_CHANGED, now=clock.now(), person=form.user, by=form.user, request=self.request
        )
        messages.success(self.request, "Your password is changed. Wherever else you were signed in, you no longer are.")
        return super().form_valid(form)


sign_in = SignIn.as_view()
sign_out = SignOut.as_view()
password = Password.as_view()


@login_not_required
@require_POST
def theme(request: HttpRequest) -> HttpResponse:
    """Keeps day, night or the device's own choice in a cookie, and goes back to the page."""
    back = request.POST.get("next", "/")
    if not url_has_allowed_host_and_scheme(back, allowed_hosts={request.get_host()}, require_https=request.is_secure()):
        back = "/"
    answer = redirect(back)
    chosen = request.POST.get("theme", "")
    if chosen in THEMES:
        answer.set_cookie("theme", chosen, max_age=A_YEAR_S, samesite="Lax", secure=request.is_secure(), httponly=True)
    else:
        answer.delete_cookie("theme", samesite="Lax")
    return answer


# Read by the walk over all addresses. "public" needs no sign-in, "anyone" needs one and nothing more.
sign_in.permission = "public"  # type: ignore[attr-defined]
theme.permission = "public"  # type: ignore[attr-defined]
sign_out.permission = "anyone"  # type: ignore[attr-defined]
password.permission = "anyone"  # type: ignore[attr-defined]
