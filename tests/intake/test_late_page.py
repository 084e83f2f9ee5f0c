"""A value of an earlier shift: asks when it was read and why it comes late; the board says so."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest
from django.test import Client

from plant import clock
from plant.board import changed
from plant.ledger.models import Entry
from plant.readings.models import Reading
from plant.works import queries
from tests import people

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
PAGE = "/w/TST/round/late/"


@pytest.fixture
def book(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    return people.small_works()


@pytest.fixture
def line(book):
    first = queries.stated(book).round_lines(NOW)
    return next(f"{one.site}:{one.parameter}" for one in first if one.parameter == "pH")


@pytest.fixture
def olga(book):
    out = Client()
    out.force_login(people.person("olga"))
    return out


def typed(line, **more):
    return {
        "client_id": str(uuid.uuid4()), "line": line, "value": "7.9", "unit": "", "timestamp": "2026-03-08T21:30",
        "not_taken": "", "why": "written on paper, tablet flat",
    } | more  # fmt: skip


def on_the_board(book) -> list[changed.Change]:
    stated = queries.stated(book)
    return changed.changed(book, now=NOW, calendar=stated.calendar(NOW), names={}, labels={})


def test_asks_which_then_when_and_why(olga, line):
    assert "Why it comes late" not in olga.get(PAGE).content.decode()
    shown = olga.get(PAGE, {"line": line}).content.decode()
    assert "When was it read (Europe/Berlin)" in shown
    assert "Why it comes late" in shown


def test_is_taken_at_its_own_time_once_and_stands_on_the_board(book, olga, line):
    sent = typed(line)
    for _ in range(2):
        assert olga.post(PAGE, sent).status_code == 302
    kept = Reading.objects.get()
    assert kept.taken_at == dt.datetime(2026, 3, 8, 20, 30, tzinfo=dt.UTC)
    assert kept.note == "late: written on paper, tablet flat"
    assert Entry.objects.filter(kind="line").count() == 1
    (said,) = on_the_board(book)
    assert said.kind == "late"
    assert said.words.endswith("7.9, entered late by Olga Ottesen: written on paper, tablet flat")
    assert "Late and corrected in the last 24 hours: 1" in olga.get("/w/TST/").content.decode()


@pytest.mark.parametrize(
    ("more", "said"),
    [
        ({"timestamp": ""}, "Say when it was read"),
        ({"why": ""}, "Say why it comes late"),
        ({"timestamp": "2026-03-11T21:30"}, "is still to come"),
        ({"timestamp": "2026-03-29T02:30"}, "does not exist"),
        ({"timestamp": "half past nine"}, "half past nine"),
        ({"value": "many"}, "not a number"),
        ({"value": ""}, "neither a value nor a reason"),
        ({"not_taken": "no access"}, "keep one of them"),
        ({"value": "79"}, "second look"),
    ],
)
def test_what_is_wrong_is_said_and_kept_in_the_fields(olga, line, more, said):
    answer = olga.post(PAGE, typed(line, **more))
    assert answer.status_code == 422
    shown = answer.content.decode()
    assert said in shown
    assert "written on paper, tablet flat" in shown or "why" in more
    assert Reading.objects.count() == 0


def test_the_unlikely_is_taken_when_the_instrument_showed_it(olga, line):
    assert olga.post(PAGE, typed(line, value="9.9", confirmed="on")).status_code == 302
    assert "the instrument shows this" in Reading.objects.get().note


def test_not_taken_keeps_both_reasons(olga, line):
    assert olga.post(PAGE, typed(line, value="", not_taken="no access")).status_code == 302
    assert Reading.objects.get().note == "no access (late: written on paper, tablet flat)"


def test_is_for_those_who_may_enter(book):
    ira = Client()
    ira.force_login(people.person("ira"))
    assert ira.get(PAGE).status_code == 403


def test_a_correction_and_a_void_stand_on_the_board_a_file_of_old_readings_does_not(book, olga, line):
    olga.post(PAGE, typed(line, timestamp="2026-03-10T09:30"))
    kept = Reading.objects.get()
    sam = Client()
    sam.force_login(people.person("sam"))
    fix = {"client_id": "a", "act": "correct", "value": "8.0", "unit": "", "timestamp": "2026-03-10T09:30", "reason": "misread"}
    assert sam.post(f"/w/TST/reading/{kept.ref}/", fix).status_code == 302
    newer = Reading.objects.get(supersedes=kept)
    assert sam.post(f"/w/TST/reading/{newer.ref}/", {"client_id": "b", "act": "void", "reason": "twice"}).status_code == 302
    assert [one.kind for one in on_the_board(book)] == ["voided", "corrected", "late"]
    assert "7.9 → 8.0 by Sam" in on_the_board(book)[1].words
