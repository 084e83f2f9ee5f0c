"""Whose turn it is: by minutes, level and hours, over midnight too; and what the board says of it."""

from __future__ import annotations

import datetime as dt

import pytest

from plant import clock
from plant.deviations import actions as deviations_actions
from plant.deviations import queries as deviations
from plant.notices import queries
from plant.notices.calls import Call, call, turns
from plant.works import actions as works_actions
from plant.works import queries as works
from tests import people
from tests.board import books

NOON = dt.time(12)
FIRST = Call("1", "Nora", "0555 1", minutes=0)
SECOND = Call("2", "Emil", "0555 2", minutes=15)
NIGHT = Call("3", "Paula", "0555 3", minutes=30, start=dt.time(19), end=dt.time(7))
MILD = Call("4", "Lea", level="alert", minutes=5)
LIST = (NIGHT, SECOND, FIRST, MILD)


def minutes(count: float) -> dt.timedelta:
    return dt.timedelta(minutes=count)


def names(found) -> tuple[list[str], str]:
    come, following = found
    return [one.name for one in come], following.name if following else ""


@pytest.mark.parametrize(
    ("waited", "come", "following"),
    [(0, ["Nora"], "Lea"), (5, ["Nora", "Lea"], "Emil"), (14.9, ["Nora", "Lea"], "Emil"), (15, ["Nora", "Lea", "Emil"], "")],
)
def test_each_has_a_turn_after_the_stated_minutes(waited, come, following):
    assert names(turns(LIST, "action", minutes(waited), NOON)) == (come, following)


def test_an_alert_goes_only_to_those_who_want_alerts():
    assert names(turns(LIST, "alert", minutes(60), NOON)) == (["Lea"], "")
    assert names(turns(LIST, "regulatory", minutes(60), NOON)) == (["Nora", "Lea", "Emil"], "")


@pytest.mark.parametrize(
    ("at", "there"), [("18:59", False), ("19:00", True), ("23:59", True), ("00:00", True), ("06:59", True), ("07:00", False)]
)
def test_hours_over_midnight(at, there):
    assert NIGHT.on_call(dt.time.fromisoformat(at)) is there


def test_a_name_as_stated():
    found = call("A", {"name": "Nora", "minutes": 20, "from": "07:00", "to": "19:00", "digest": True})
    assert (found.level, found.minutes, found.digest) == ("action", 20, True)
    assert found.on_call(dt.time(7))
    assert not found.on_call(dt.time(19))


@pytest.mark.django_db
class TestOnTheBoard:
    NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)

    @pytest.fixture
    def book(self, monkeypatch):
        monkeypatch.setattr(clock, "now", lambda: self.NOW)
        book = books.with_history(days=3, now=self.NOW)
        books.raise_one(book, now=self.NOW)
        for code, value in (
            ("1", {"name": "Nora", "telephone": "0555 1"}),
            ("2", {"name": "Emil", "telephone": "0555 2", "minutes": 20}),
        ):
            works_actions.state(
                book=book, kind="call", subject=code, value=value, effective_from=self.NOW - dt.timedelta(days=1),
                by=people.person("sam"), now=self.NOW, reason="the list",
            )  # fmt: skip
        return book

    def view(self, book):
        (found,) = (one for one in deviations.open_ones(book) if one.state == "raised")
        return found

    def test_says_whom_to_call_and_who_is_next(self, book):
        stated = works.stated(book)
        view = self.view(book)
        said = queries.words(stated, stated.calendar(self.NOW), view, view.raised_at)
        assert said.startswith("Call Nora, 0555 1. If nobody has taken it on by ")
        assert said.endswith(": Emil, 0555 2.")
        later = queries.words(stated, stated.calendar(self.NOW), view, view.raised_at + minutes(20))
        assert later == "Call Emil, 0555 2."
        page = people.signed_in("olga").get("/w/TST/").content.decode()
        assert "Call Nora, 0555 1." in page

    def test_ends_when_somebody_has_taken_it_on(self, book):
        view = self.view(book)
        deviations_actions.acknowledge(book=book, ref=view.ref, by=people.person("olga"), now=self.NOW)
        assert "Call Nora" not in people.signed_in("olga").get("/w/TST/").content.decode()

    def test_the_tablet_knows_the_numbers(self, book):
        assert queries.telephones(works.stated(book), self.NOW) == "Nora, 0555 1; Emil, 0555 2"
        assert "Nora, 0555 1; Emil, 0555 2" in people.signed_in("olga").get("/w/TST/round/").content.decode()
