"""Who may do what at a works, and the gate every page of a works passes.

Roles are stated per works (statement kind ``membership``: role, may_prepare, may_certify, licence). A
stranger to a works is told that there is no such page, never that there is one he may not see.
"""

from __future__ import annotations

import datetime as dt
import functools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse

from plant import clock
from plant.ledger.models import Book
from plant.works import models, queries
from plant.works.stated import NotStated, Stated

ROLES: dict[str, frozenset[str]] = {
    "operator": frozenset(
        {
            "see",
            "round.enter",
            "record.correct_own",
            "deviation.acknowledge",
            "deviation.act",
            "delivery.enter",
        }
    ),
    "supervisor": frozenset(
        {
            "see",
            "round.enter",
            "record.correct_own",
            "record.correct",
            "record.settle",
            "deviation.acknowledge",
            "deviation.act",
            "deviation.close",
            "delivery.enter",
            "order.place",
            "settings.change",
            "import",
            "report.prepare",
            "jobs.see",
        }
    ),
    "manager": frozenset(
        {
            "see",
            "record.settle",
            "deviation.acknowledge",
            "deviation.act",
            "deviation.close",
            "order.place",
            "settings.change",
            "import",
            "report.prepare",
            "report.issue",
            "jobs.see",
        }
    ),
    "inspector": frozenset({"see"}),
    "administrator": frozenset({"see", "settings.change", "people.change", "import", "jobs.see"}),
}
SIGNING = {"may_prepare": "report.sign_prepared", "may_certify": "report.sign_certified"}
PERMISSIONS = frozenset().union(*ROLES.values()) | frozenset(SIGNING.values())


@dataclass(frozen=True)
class Member:
    """A person at one works, as stated now."""

    username: str
    role: str
    permissions: frozenset[str]
    licence_number: str = ""
    licence_class: str = ""

    def may(self, permission: str) -> bool:
        return permission in self.permissions


@dataclass(frozen=True)
class At:
    """Where a request stands: the works, what is stated of it, who asks, and the moment."""

    book: Book
    stated: Stated
    member: Member
    now: dt.datetime

    @property
    def code(self) -> str:
        return self.book.code

    @property
    def calendar(self) -> clock.Calendar:
        """Its reckoning of days."""
        return self.stated.calendar(self.now)

    @property
    def zone(self) -> dt.tzinfo:
        """The zone its pages show times in: ``{% timezone request.at.zone %}``."""
        return self.calendar.zone

    @property
    def works_name(self) -> str:
        """Its name as stated; the code before anything is stated."""
        try:
            return self.stated.works(self.now).name
        except NotStated:
            return self.book.code


def member_from(username: str, value: dict[str, Any] | None) -> Member | None:
    """The member a ``membership`` statement describes; None when there is none."""
    if value is None:
        return None
    permissions = set(ROLES.get(value["role"], frozenset()))
    permissions |= {permission for key, permission in SIGNING.items() if value.get(key)}
    return Member(
        username,
        value["role"],
        frozenset(permissions),
        str(value.get("licence_number", "")),
        str(value.get("licence_class", "")),
    )


def member(stated: Stated, username: str, now: dt.datetime) -> Member | None:
    """The person's membership in force at a works."""
    return member_from(username, stated.value("membership", username, now))


def works_of(username: str, now: dt.datetime) -> list[Book]:
    """The works a person belongs to, by code."""
    ids = models.Statement.objects.filter(kind="membership", subject=username).values("book").distinct()
    books = Book.objects.filter(pk__in=ids).order_by("code")
    return [book for book in books if member(queries.stated(book), username, now) is not None]


View = Callable[..., HttpResponse]


def needs(permission: str) -> Callable[[View], View]:
    """The gate of a works' page: the view receives ``at`` (book, statements, member, now) instead of the code
    in its URL.
    """
    if permission not in PERMISSIONS:
        raise ValueError(f"unknown permission {permission!r}")

    def wrap(view: View) -> View:
        @functools.wraps(view)
        def gate(request: HttpRequest, code: str, *args: Any, **kwargs: Any) -> HttpResponse:
            book = Book.objects.filter(code=code).first()
            if book is None:
                raise Http404("There is no such works.")
            now = clock.now()
            stated = queries.stated(book)
            who = member(stated, request.user.get_username(), now)
            if who is None:
                raise Http404("There is no such works.")
            if not who.may(permission):
                raise PermissionDenied(f"This needs the right “{permission}”, which your role ({who.role}) does not have here.")
            at = At(book, stated, who, now)
            request.at = at  # type: ignore[attr-defined]  # templates show the works and the role from it
            return view(request, at, *args, **kwargs)

        gate.permission = permission  # type: ignore[attr-defined]  # read by the walk over all URLs
        return gate

    return wrap


def anyone(view: View) -> View:
    """Marks a page that needs no works (sign-in, list of one's works, help)."""
    view.permission = "anyone"  # type: ignore[attr-defined]
    return view
