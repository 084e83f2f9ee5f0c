"""Every address, with every role and with a stranger: each view says what it needs, and the gate holds it."""

from __future__ import annotations

import re
from collections.abc import Iterator

import pytest
from django.test import Client
from django.urls import URLPattern, URLResolver, get_resolver

from plant.api.scopes import SCOPES
from plant.works import access
from tests import people
from tests.api import machines

PUBLIC = {"public"}
SIGNED_IN = {"anyone"}
# Addresses for machines: a token lets in, and no sign-in does.
BY_TOKEN = {"token"}
# Asked by machines that hold no account; they tell nothing of a works.
MACHINES = {"alive", "ready"}
TOKEN = re.compile(rb'name="csrfmiddlewaretoken" value="[^"]*"')
METHODS = ("get", "post", "put")
VALUES = {
    "slug": "x",
    "point": "HYPO-POST",
    "ref": "1.1",
    "client_id": "none",
    "month": "2026-01",
    "kind": "csv",
    "revision": 0,
    "ident": "00000000-0000-4000-8000-000000000000",
}


def patterns(resolver: URLResolver | None = None, prefix: str = "") -> Iterator[tuple[str, URLPattern]]:
    """All addresses of the site with their routes."""
    for one in (resolver or get_resolver()).url_patterns:
        route = prefix + str(one.pattern)
        if isinstance(one, URLResolver):
            yield from patterns(one, route)
        else:
            yield route, one


ALL = [(route, one) for route, one in patterns() if one.name not in MACHINES]
FOR_MACHINES = [(route, one) for route, one in ALL if getattr(one.callback, "permission", None) in BY_TOKEN]
OF_A_WORKS = [(route, one) for route, one in ALL if "code>" in route and (route, one) not in FOR_MACHINES]


def address(route: str, one: URLPattern) -> str:
    """The route with something in each of its places; "TST" for the works."""
    out = route
    for name, converter in one.pattern.converters.items():
        value = "TST" if name == "code" else VALUES.get(name, "x")
        if type(converter).__name__ == "IntConverter" and not str(value).isdigit():
            value = 1
        if type(converter).__name__ == "UUIDConverter":
            value = "00000000-0000-4000-8000-000000000000"
        kind = {
            "StringConverter": "str",
            "IntConverter": "int",
            "SlugConverter": "slug",
            "UUIDConverter": "uuid",
            "PathConverter": "path",
        }
        out = out.replace(f"<{kind[type(converter).__name__]}:{name}>", str(value)).replace(f"<{name}>", str(value))
    return "/" + out


def ids(found: list[tuple[str, URLPattern]]) -> list[str]:
    return [route or "/" for route, _ in found]


@pytest.fixture
def works(db):
    return people.small_works()


@pytest.mark.parametrize(("route", "one"), ALL, ids=ids(ALL))
def test_every_view_says_what_it_needs(route, one):
    permission = getattr(one.callback, "permission", None)
    assert permission in PUBLIC | SIGNED_IN | BY_TOKEN | access.PERMISSIONS, f"{route} declares {permission!r}"
    gated = permission in BY_TOKEN | access.PERMISSIONS
    assert ("code>" in route) == gated, "a page of a works passes its gate, others have none"
    if permission in BY_TOKEN:
        assert one.callback.scope in {"", *SCOPES}, f"{route} declares the scope {one.callback.scope!r}"


def walked(
    client: Client, routes: list[tuple[str, URLPattern]], methods: tuple[str, ...]
) -> Iterator[tuple[str, URLPattern, int, str]]:
    """Each address asked by each method: its route and method, the pattern, the status, and where it leads to."""
    client.raise_request_exception = False
    for route, one in routes:
        for method in methods:
            answer = getattr(client, method)(address(route, one))
            yield f"{method} {route}", one, answer.status_code, getattr(answer, "url", "").split("?")[0]


def test_whoever_is_not_signed_in_is_sent_to_sign_in(works):
    wrong = {}
    for name, one, status, leads_to in walked(Client(), ALL, METHODS):
        if one.callback.permission in PUBLIC:
            right = status in (200, 302, 405)
        else:
            right = status in (401, 403) or (status, leads_to) == (302, "/sign-in/")
        if not right:
            wrong[name] = status
    assert wrong == {}


def test_a_stranger_is_told_that_there_is_no_such_page(works):
    stranger = people.signed_in("stan")
    wrong = {name: status for name, _, status, _ in walked(stranger, OF_A_WORKS, METHODS) if status not in (404, 405)}
    assert wrong == {}


def test_nothing_tells_a_works_of_others_from_one_that_is_not_there(works):
    stranger = people.signed_in("stan")
    for route, one in OF_A_WORKS:
        of_others, nowhere = (stranger.get(address(route, one).replace("TST", code)) for code in ("TST", "NONE"))
        assert of_others.status_code == nowhere.status_code
        if of_others.status_code == 404:
            assert TOKEN.sub(b"", of_others.content.replace(b"TST", b"NONE")) == TOKEN.sub(b"", nowhere.content)


@pytest.mark.parametrize("username", sorted(people.ROLES))
def test_a_role_reaches_what_it_may_and_nothing_else(username, works):
    granted = set(access.ROLES[people.ROLES[username][0]])
    granted |= {"report.sign_prepared"} if username in ("sam", "mira") else set()
    granted |= {"report.sign_certified"} if username == "mira" else set()
    wrong = {}
    refused: dict[str, set[int]] = {}
    for name, one, status, _ in walked(people.signed_in(username), OF_A_WORKS, METHODS):
        if one.callback.permission in granted:
            # What this small works has none of is not found, and empty forms are refused in words.
            right = status in (200, 302, 400, 404, 405, 409, 413, 415, 422)
        else:
            right = status in (403, 405)
            refused.setdefault(name.partition(" ")[2], set()).add(status)
        if not right:
            wrong[name] = status
    assert wrong == {}
    # A page that takes only posts must refuse those, not only say that it takes no others.
    assert {route: found for route, found in refused.items() if 403 not in found} == {}


def test_an_inspector_changes_nothing(works):
    """Whatever an inspector sends, wherever to: the book stays as it was."""
    before = (works.head_seq, works.head_hash)
    client = people.signed_in("ira")
    for route, one in OF_A_WORKS:
        client.post(address(route, one), {"reason": "because"})
        client.put(address(route, one), b"{}", content_type="application/json")
    works.refresh_from_db()
    assert (works.head_seq, works.head_hash) == before


def test_former_members_are_strangers(works):
    from plant.works import actions

    actions.end_membership(book=works, username="olga", by=None, now=people.OPENED, reason="left")
    assert people.signed_in("olga").get("/w/TST/").status_code == 404


# Machines.


def test_no_sign_in_opens_an_address_for_machines(works):
    for username in (*people.ROLES, "stan"):
        wrong = {
            name: status for name, _, status, _ in walked(people.signed_in(username), FOR_MACHINES, METHODS) if status != 401
        }
        assert wrong == {}, username


def test_no_token_opens_a_page_for_people(works):
    machine = machines.machine(works)
    for name, one, status, leads_to in walked(machine, OF_A_WORKS, METHODS):
        # The two pages that an enrolled tablet reaches answer those who only send with a plain refusal.
        assert status in (401, 403, 405) or (status, leads_to) == (302, "/sign-in/"), (name, one)


def test_the_token_of_another_works_is_told_that_there_is_no_such_thing(works):
    other = people.open_works(people.SMALL.read_text().replace('code = "TST"', 'code = "OTH"', 1))
    stranger = machines.machine(other)
    wrong = {name: status for name, _, status, _ in walked(stranger, FOR_MACHINES, METHODS) if status != 404}
    assert wrong == {}
    for route, one in FOR_MACHINES:
        of_others, nowhere = (stranger.get(address(route, one).replace("TST", code)) for code in ("TST", "NONE"))
        assert of_others.content == nowhere.content


@pytest.mark.parametrize("scope", SCOPES)
def test_a_token_reaches_what_its_scope_names_and_nothing_else(scope, works):
    machine = machines.machine(works, scope)
    wrong = {}
    for name, one, status, _ in walked(machine, FOR_MACHINES, METHODS):
        inside = one.callback.scope in ("", scope)
        right = status in (200, 404, 405, 415, 422) if inside else status == 403
        if not right:
            wrong[name] = status
    assert wrong == {}
