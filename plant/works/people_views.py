"""The people of a works: who belongs, in which role, since when; for its administrator, changes of it."""

from __future__ import annotations

from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_POST

from plant.accounts import actions as accounts
from plant.accounts.models import Person
from plant.works import access, actions, forms, pages, people
from plant.works.access import At


@access.needs("see")
def everyone(request: HttpRequest, at: At) -> HttpResponse:
    """Who belongs to the works, and who did."""
    return render(request, "works/people.html", {"people": people.belonging(at.stated, at.now)})


@access.needs("people.change")
def add(request: HttpRequest, at: At) -> HttpResponse:
    """Somebody new. A password made for a new name is shown once."""
    form = forms.NewPersonForm(request.POST or None)
    if request.method == "POST" and form.is_valid():
        try:
            person, password = people.add(book=at.book, by=request.user, now=at.now, **form.cleaned_data)
        except (accounts.PersonRefused, actions.Refused) as problem:
            form.add_error(None, str(problem))
        else:
            if password is None:
                messages.success(request, f"{person.display_name} belongs to the works now.")
                return redirect("works:people", at.code)
            return render(request, "works/password.html", {"person": person, "password": password})
    return render(request, "works/person.html", {"form": form})


@access.needs("people.change")
def person(request: HttpRequest, at: At, username: str) -> HttpResponse:
    """One person's role: as it is, was, and a change of it."""
    found, who = _found(at, username)
    value = at.stated.value("membership", username, at.now) or {}
    form = forms.MemberForm(request.POST or None, initial=value)
    if request.method == "POST" and form.is_valid():
        data = form.cleaned_data
        if username == request.user.get_username() and data["role"] != "administrator":
            form.add_error("role", "You would lock yourself out: another administrator can change your role.")
        else:
            actions.set_membership(book=at.book, username=username, by=request.user, now=at.now, **data)
            messages.success(request, f"{found.full_name} is {data['role']} from now on.")
            return redirect("works:people", at.code)
    context = {
        "form": form,
        "person": found,
        "account": who,
        "may_replace_password": _only_here(at, who),
        "past": pages.Reader(at.book, at.stated, at.now).subject("membership", username),
    }
    return render(request, "works/person.html", context)


@require_POST
@access.needs("people.change")
def end(request: HttpRequest, at: At, username: str) -> HttpResponse:
    """Ends a membership. What the person has recorded stays."""
    found, _ = _found(at, username)
    reason = request.POST.get("reason", "").strip()
    if username == request.user.get_username():
        messages.error(request, "You can’t end your own membership: another administrator can.")
    elif not reason:
        messages.error(request, "Say why the membership ends.")
    elif found.member is not None:
        actions.end_membership(book=at.book, username=username, by=request.user, now=at.now, reason=reason)
        messages.success(request, f"{found.full_name} no longer belongs to the works.")
    return redirect("works:people", at.code)


@require_POST
@access.needs("people.change")
def new_password(request: HttpRequest, at: At, username: str) -> HttpResponse:
    """A new password for somebody who has forgotten it, shown once."""
    _, who = _found(at, username)
    if who is None or not _only_here(at, who):
        messages.error(request, "This person belongs to other works too: only the person can change the password.")
        return redirect("works:person", at.code, username)
    password = accounts.give_new_password(person=who, by=request.user)
    return render(request, "works/password.html", {"person": who, "password": password})


def _found(at: At, username: str) -> tuple[people.Belonging, Person | None]:
    found = next((item for item in people.belonging(at.stated, at.now) if item.username == username), None)
    if found is None:
        raise Http404("Nobody of this name belongs or belonged to the works.")
    return found, Person.objects.filter(username=username).first()


def _only_here(at: At, who: Any) -> bool:
    """An administrator of one works must not get hold of somebody's rights at another."""
    if who is None or who.is_superuser:
        return False
    return [book.pk for book in access.works_of(who.get_username(), at.now)] == [at.book.pk]
