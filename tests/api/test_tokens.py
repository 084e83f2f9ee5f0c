"""Tokens: shown once, kept as a hash, for one works and its scopes, withdrawn at once, and not used too often."""

from __future__ import annotations

import datetime as dt
import io
import json

import pytest
from django.core.management import CommandError, call_command
from django.db import OperationalError

from plant.api import actions, views
from plant.api.models import Token
from plant.api.scopes import SCOPES
from plant.ledger import verify
from plant.ledger.models import Entry
from tests import people
from tests.api import machines
from tests.api.machines import Machine, batch, reading

WORKS = "/api/w/TST/"
ASKED = {
    "comparison.read": "/api/w/TST/comparison",
    "deviations.read": "/api/w/TST/deviations",
    "reports.read": "/api/w/TST/reports",
}


def test_a_token_is_shown_once_and_kept_as_a_hash(book):
    client = people.signed_in("adam")
    made = client.post("/w/TST/devices/", {"name": "laboratory", "scopes": ["readings.write"]})
    secret = made.context["secret"]
    assert secret in made.content.decode()
    assert made["Cache-Control"] == "no-store"
    kept = Token.objects.values().get()
    assert secret not in str(kept)
    assert secret not in client.get("/w/TST/devices/").content.decode()
    assert Machine(secret).get(WORKS).json()["device"] == "laboratory"


def test_a_token_is_withdrawn_by_the_page_at_once(book, machine):
    assert machine.get(WORKS).status_code == 200
    client = people.signed_in("adam")
    token = Token.objects.get()
    client.post(f"/w/TST/devices/{token.pk}/revoke/", {"reason": " "})
    assert machine.get(WORKS).status_code == 200, "a reason is asked for"
    client.post(f"/w/TST/devices/{token.pk}/revoke/", {"reason": "replaced"})
    answer = machine.get(WORKS)
    assert answer.status_code == 401
    assert answer["WWW-Authenticate"].startswith("Bearer")
    assert "replaced" in client.get("/w/TST/devices/").content.decode()


def test_who_let_a_device_in_and_who_withdrew_it_stands_in_the_book(book):
    client = people.signed_in("adam")
    secret = client.post("/w/TST/devices/", {"name": "laboratory", "scopes": ["reports.read"]}).context["secret"]
    for _ in range(2):
        client.post(f"/w/TST/devices/{Token.objects.get().pk}/revoke/", {"reason": "replaced"})
    made, withdrawn = Entry.objects.filter(book=book, kind="device").order_by("seq")
    assert json.loads(made.payload)["received"] == {"device": "laboratory", "is": "let in", "scopes": ["reports.read"]}
    assert json.loads(withdrawn.payload)["received"] == {"device": "laboratory", "is": "withdrawn", "why": "replaced"}
    assert {made.recorded_by.username, withdrawn.recorded_by.username} == {"adam"}
    assert secret not in made.payload
    assert not list(verify.everything())


@pytest.mark.parametrize(
    "given",
    [
        {"name": "", "scopes": ["readings.write"]},
        {"name": "x" * 41, "scopes": ["readings.write"]},
        {"name": "laboratory", "scopes": []},
        {"name": "laboratory", "scopes": ["everything"]},
        {"name": "control system", "scopes": ["readings.write"]},
    ],
)
def test_a_token_without_a_name_of_its_own_or_without_scopes_is_not_made(book, machine, given):
    assert people.signed_in("adam").post("/w/TST/devices/", given).status_code == 422
    assert Token.objects.count() == 1


@pytest.mark.parametrize("who", ["olga", "sam", "mira", "ira"])
def test_only_the_administrator_makes_tokens(book, who):
    assert people.signed_in(who).post("/w/TST/devices/", {"name": "x", "scopes": ["readings.write"]}).status_code == 403
    assert not Token.objects.exists()


def test_tokens_from_the_command_line(book):
    out, told = io.StringIO(), io.StringIO()
    call_command("api_token", "make", "laboratory", works="TST", scope=["readings.write"], stdout=out, stderr=told)
    machine = Machine(out.getvalue().strip())
    assert machine.get(WORKS).status_code == 200
    listed = io.StringIO()
    call_command("api_token", "list", works="TST", stdout=listed)
    assert "laboratory,readings.write" in listed.getvalue()
    assert out.getvalue().strip() not in listed.getvalue()
    with pytest.raises(CommandError, match="why"):
        call_command("api_token", "revoke", "laboratory", works="TST")
    call_command("api_token", "revoke", "laboratory", works="TST", why="gone", stdout=io.StringIO())
    assert machine.get(WORKS).status_code == 401
    with pytest.raises(CommandError, match="no token in use"):
        call_command("api_token", "revoke", "laboratory", works="TST", why="gone")


def test_a_scope_allows_its_own_and_nothing_else(book):
    for number, scope in enumerate(SCOPES):
        machine = machines.machine(book, scope, name=f"device {number}")
        assert machine.get(WORKS).json()["scopes"] == [scope]
        for needed, address in ASKED.items():
            assert machine.get(address).status_code == (200 if needed == scope else 403), (scope, address)
        status = machine.send(batch(reading(timestamp="2026-01-05T08:00:00Z"))).status_code
        assert status == (201 if scope == "readings.write" else 403)


@pytest.mark.parametrize(
    "header", ["", "Bearer", "Bearer ", "Bearer wb_wrong", "Basic b2xnYTp4", "Bearer " + "x" * 5000, "Bearer wb_\xff"]
)
def test_without_a_token_in_use_nobody_is_let_in(book, header):
    client = people.signed_in("mira")
    answer = client.get(WORKS, headers={"Authorization": header})
    assert answer.status_code == 401
    assert answer["Content-Type"] == "application/problem+json"


def test_a_token_of_another_works_finds_nothing(book):
    toml = people.SMALL.read_text().replace('code = "TST"', 'code = "OTH"', 1)
    stranger = machines.machine(people.open_works(toml), name="stranger")
    assert stranger.get("/api/w/OTH/").status_code == 200
    of_others, nowhere = stranger.get(WORKS), stranger.get("/api/w/NONE/")
    assert (of_others.status_code, of_others.content) == (404, nowhere.content)
    head = book.head_seq
    assert stranger.send(batch(reading())).status_code == 404
    book.refresh_from_db()
    assert book.head_seq == head


def test_too_often_in_a_minute_has_to_wait(book, machine, clock_stands, settings):
    settings.WEIRBOOK_API_PER_MINUTE = 3
    clock_stands.shift(1)
    assert [machine.get(WORKS).status_code for _ in range(4)] == [200, 200, 200, 429]
    answer = machine.get(WORKS)
    assert answer["Content-Type"] == "application/problem+json"
    assert 1 <= int(answer["Retry-After"]) <= 61
    clock_stands.shift(int(answer["Retry-After"]))
    assert machine.get(WORKS).status_code == 200


def test_when_it_was_last_used_is_known(book, machine, clock_stands):
    assert Token.objects.get().last_used_at is None
    machine.get(WORKS)
    clock_stands.shift(dt.timedelta(hours=1))
    machine.get(WORKS)
    assert Token.objects.get().last_used_at == dt.datetime(2026, 3, 10, 13, 0, tzinfo=dt.UTC)


def test_a_browsers_sign_in_is_no_token(book):
    assert people.signed_in("adam").get(WORKS).status_code == 401


def test_other_methods_and_addresses_are_problems_in_words(book, machine):
    answer = machine.delete(WORKS)
    assert (answer.status_code, answer["Allow"]) == (405, "GET, HEAD")
    for method in ("get", "put", "post", "delete"):
        for address in ("/api/w/TST/anything/else", "/api/w/%0AX/", "/api/w/a%2Fb/reports", "/api/x"):
            answer = getattr(machine, method)(address)
            assert (answer.status_code, answer["Content-Type"]) == (404, "application/problem+json"), address


@pytest.mark.parametrize(("error", "status"), [(OperationalError, 503), (ZeroDivisionError, 500)])
def test_a_database_that_is_away_or_a_fault_is_a_problem_in_words(book, machine, monkeypatch, error, status):
    def broken(book):
        raise error

    monkeypatch.setattr(views.queries, "issued", broken)
    machine.raise_request_exception = False
    answer = machine.get("/api/w/TST/reports")
    assert (answer.status_code, answer["Content-Type"]) == (status, "application/problem+json")
    assert answer.json()["detail"]
    assert ("Retry-After" in answer) == (status == 503)


def test_secrets_are_long_and_all_different(book):
    secrets = {
        actions.make(book=book, name=f"d {n}", scopes=["reports.read"], by=None, now=people.OPENED)[1] for n in range(20)
    }
    assert len(secrets) == 20
    assert min(map(len, secrets)) >= 46
