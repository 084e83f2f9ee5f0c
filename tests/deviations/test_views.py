"""The pages: the list, one deviation with its steps, a draft limit."""

from __future__ import annotations

import datetime as dt
import re

import pytest
from django.test import Client

from plant import clock
from plant.deviations import actions, guidance, queries, words
from plant.deviations.findings import CAUSES
from plant.deviations.judging import RULES
from plant.ledger.models import Book
from plant.works import kinds
from tests import people
from tests.deviations import world
from tests.deviations.test_life import TELL
from tests.deviations.world import FIRST

pytestmark = pytest.mark.django_db
LIST = "/w/DEV/deviations/"


@pytest.fixture
def book(monkeypatch: pytest.MonkeyPatch) -> Book:
    made = world.open_works(TELL)
    world.chlorine(made, [("2026-02-02T10:00", "0.12")])
    actions.judge(book=made, days=[FIRST], now=world.local("2026-02-02T20:00"))
    monkeypatch.setattr(clock, "now", lambda: world.local("2026-02-03T09:00"))
    return made


def page_of(client: Client) -> str:
    found = re.search(r"/w/DEV/deviations/\d+\.\d+/", client.get(LIST).content.decode())
    assert found
    return found.group()


def fields(page: str, name: str, **rest: str) -> dict[str, str]:
    client_id = re.search(rf'name="{name}-client_id" value="(\w+)"', page)
    assert client_id, f"the page offers no step {name}"
    return {f"{name}-client_id": client_id.group(1)} | {f"{name}-{key}": value for key, value in rest.items()}


def test_the_list_and_the_page_say_what_is_wrong_and_what_to_do(book: Book) -> None:
    client = people.signed_in("sam")
    text = client.get(LIST).content.decode()
    assert "1 open, worst first." in text
    assert "Free chlorine, Works outlet: outside its limit" in text
    assert "somebody must be told" in text
    page = client.get(page_of(client)).content.decode()
    assert "0.12 mg/L" in page
    assert "Drinking water desk must be told" in page
    assert "Never let an acid" in page
    assert "local regulator’s rules govern" in page


def test_a_whole_life_by_its_forms(book: Book) -> None:
    olga, sam = people.signed_in("olga"), people.signed_in("sam")
    path = page_of(sam)

    def take(client: Client, name: str, expected: int = 302, **rest: str) -> str:
        page = client.get(path).content.decode()
        answer = client.post(f"{path}{name}/", fields(page, name, **rest))
        assert answer.status_code == expected, answer.content.decode()[:2000]
        return answer.content.decode()

    take(olga, "acknowledge")
    take(olga, "act", cause="feeder_drift", action="flushed")
    assert "no reading has been taken" in take(olga, "verify", 409)
    world.chlorine(book, [("2026-02-03T08:30", "0.45")])
    take(olga, "verify")
    assert "somebody must still be told" in take(sam, "close", 409)
    take(sam, "tell", who="Drinking water desk", how="telephone", at="2026-02-03 08:45")
    take(sam, "close")
    (view,) = queries.between(book, FIRST, FIRST)
    assert view.state == "closed"
    told = next(event for event in view.events if event.kind == "told")
    assert told.at == world.local("2026-02-03T08:45")
    assert "Nothing is open." in sam.get(LIST).content.decode()
    take(olga, "comment", words="seen again in the log")


def test_a_form_sent_twice_is_one_step(book: Book) -> None:
    client = people.signed_in("sam")
    path = page_of(client)
    data = fields(client.get(path).content.decode(), "comment", words="once")
    for _ in range(2):
        assert client.post(f"{path}comment/", data).status_code == 302
    (view,) = queries.open_ones(book)
    assert [event.kind for event in view.events].count("comment") == 1


def test_what_was_typed_is_kept_when_it_is_refused(book: Book) -> None:
    client = people.signed_in("sam")
    path = page_of(client)
    data = fields(client.get(path).content.decode(), "tell", who="The desk", how="telephone", at="half past")
    answer = client.post(f"{path}tell/", data)
    assert answer.status_code == 422
    assert "The desk" in answer.content.decode()
    assert "is no time of the works" in answer.content.decode()


def test_rights_of_the_pages(book: Book) -> None:
    path = page_of(people.signed_in("sam"))
    inspector = people.signed_in("ira")
    assert inspector.get(path).status_code == 200
    assert "What comes next" not in inspector.get(path).content.decode()
    assert inspector.post(f"{path}acknowledge/", {}).status_code == 403
    assert people.signed_in("olga").post(f"{path}close/", {}).status_code == 403
    assert people.signed_in("olga").get(f"{LIST}try/").status_code == 403
    assert people.signed_in("stan").get(LIST).status_code == 404
    assert Client().get(LIST).status_code == 302
    assert people.signed_in("sam").get(f"{LIST}9.9/").status_code == 404
    assert people.signed_in("sam").get(f"{path}close/").status_code == 405


def test_operators_are_shown_no_likelihoods(book: Book) -> None:
    path = page_of(people.signed_in("sam"))
    assert "most likely lies behind" in people.signed_in("sam").get(path).content.decode()
    assert "most likely lies behind" not in people.signed_in("olga").get(path).content.decode()


def test_filters(book: Book) -> None:
    client = people.signed_in("sam")
    assert "Works outlet" not in client.get(LIST, {"level": "alert"}).content.decode()
    assert "Works outlet" in client.get(LIST, {"level": "regulatory", "kind": "bound"}).content.decode()
    days = {"which": "days", "first": "2026-02-01", "last": "2026-02-03"}
    assert "1 raised for these days." in client.get(LIST, days).content.decode()
    assert "0 with a correction" in client.get(LIST, {"which": "approval"}).content.decode()
    assert client.get(LIST, {"page": "99", "sort": "-since"}).status_code == 200
    assert client.get(LIST, {"which": "days", "first": "nonsense"}).status_code == 200


def test_a_draft_limit_on_past_days(book: Book) -> None:
    client = people.signed_in("sam")
    asked = {"kind": "bound", "subject": "sample_point:ENTRY", "parameter": "free_chlorine", "low": "0.15", "days": "31"}
    answer = client.get(f"{LIST}try/", asked).content.decode()
    assert "1 episode, 3 Jan 2026 to 2 Feb 2026" in answer
    assert "0.12 mg/L" in answer
    assert "expected low, high or both" in client.get(f"{LIST}try/", asked | {"low": ""}).content.decode().lower()
    assert "It would not have fired once." in client.get(f"{LIST}try/", asked | {"low": "0.1"}).content.decode()


def test_an_empty_works_has_an_empty_page() -> None:
    book = Book.objects.create(code="NEW", opened_at=dt.datetime(2026, 1, 1, tzinfo=dt.UTC))
    people.join(book, "sam", now=dt.datetime(2026, 1, 1, tzinfo=dt.UTC))
    assert "Nothing is stated" in people.signed_in("sam").get("/w/NEW/deviations/").content.decode()


def test_every_kind_of_limit_has_its_rule_its_words_and_its_guidance() -> None:
    assert set(RULES) == set(kinds.LIMIT_KINDS)
    assert set(words.KINDS) == set(RULES) | {"suspicious_reading"}
    assert set(words.CAUSES) == set(CAUSES)
    for kind in words.KINDS:
        for direction in ("low", "high", ""):
            found = guidance.guidance(kind, "free_chlorine", direction)
            assert found.check


@pytest.mark.parametrize(
    ("kind", "value", "limit", "way"),
    [
        ("bound", "0.1", "≥ 0.3", "low"),
        ("bound", "9", "≤ 8", "high"),
        ("held_below", "5 h", "≤ 4 h below 0.2", "low"),
        ("drift", "-12.0 % since", "no lasting change", "low"),
        ("dose_vs_design", "12 mg/L (+20.5 %)", "10 mg/L ± 20 %", "high"),
        ("missing", "1 of 2 missing", "due each shift", ""),
    ],
)
def test_which_way_it_is_off(kind: str, value: str, limit: str, way: str) -> None:
    assert guidance.direction(kind, value, limit) == way
