"""The round: what is due, what a tablet sends, and the same without script."""

from __future__ import annotations

import datetime as dt
import json
import uuid

import pytest
from django.utils.html import escape

from plant import clock
from plant.intake import models, rounds, shifts, walk
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.readings.models import Reading
from plant.works import actions as works_actions
from plant.works import queries as works
from tests import people

MORNING = dt.datetime(2026, 3, 10, 8, 0, tzinfo=dt.UTC)
"""09:00 in Berlin: the day shift is on."""


@pytest.fixture
def book(db):
    book = people.small_works()
    lines = [
        ("ENTRY:free_chlorine", "shift"),
        ("ENTRY:pH", "shift"),
        ("FT-TREATED:totaliser", "day"),
        ("HYPO-BULK:level", "day"),
    ]
    changes = [
        works_actions.Change(
            "round_line",
            key,
            {"site": key.split(":")[0], "parameter": key.split(":")[1], "due": due, "order": place},
            dt.datetime(2026, 1, 1, tzinfo=dt.UTC),
        )
        for place, (key, due) in enumerate(lines)
    ]
    own = {key for key, _ in lines}
    changes += [
        works_actions.Change("round_line", item.code, {}, dt.datetime(2026, 1, 1, tzinfo=dt.UTC), withdrawn=True)
        for item in works.stated(book).round_lines(MORNING)
        if item.code not in own
    ]
    works_actions.state_many(book=book, changes=changes, by=None, now=dt.datetime(2026, 1, 2, tzinfo=dt.UTC), reason="test")
    return book


@pytest.fixture
def morning(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: MORNING)
    return MORNING


@pytest.fixture
def olga(book, morning):
    return people.signed_in("olga")


def put(client, body, client_id=None):
    address = f"/w/TST/entries/{client_id or uuid.uuid4()}"
    return client.put(address, json.dumps(body), content_type="application/json")


def line(key="ENTRY:free_chlorine", value="0.55", unit="mg/L", **more):
    site, parameter = key.split(":")
    return {
        "key": key,
        "site": site,
        "parameter": parameter,
        "value": value,
        "unit": unit,
        "taken_at": "2026-03-10T07:40:00Z",
    } | more


def a_round(*lines, **more):
    return {"kind": "round", "lines": list(lines)} | more


class TestWhatIsDue:
    def test_is_what_the_round_states_in_walking_order(self, book):
        walked = walk.walk(book, works.stated(book), MORNING)
        assert [item.key for item in walked.lines] == [
            "ENTRY:free_chlorine",
            "ENTRY:pH",
            "FT-TREATED:totaliser",
            "HYPO-BULK:level",
        ]
        assert walked.shift.name == "day"

    def test_of_a_day_is_done_once_it_is_read(self, olga, book):
        put(olga, a_round(line("FT-TREATED:totaliser", "5000", "m3")))
        walked = walk.walk(book, works.stated(book), MORNING + dt.timedelta(hours=12))
        assert walked.shift.name == "night"
        answered = {item.key: item.answered for item in walked.lines}
        assert answered["FT-TREATED:totaliser"]
        assert not answered["ENTRY:free_chlorine"]

    def test_without_a_stated_round_is_levels_weights_and_totalisers_once_a_day(self, db):
        book = people.small_works()
        stated = works.stated(book)
        expected = shifts.expected(stated, MORNING)
        if not stated.round_lines(MORNING):
            assert {line.due for line in expected} == {"day"}
            assert {line.parameter for line in expected} <= {"level", "weight", "totaliser"}

    def test_leaves_out_what_is_not_in_service(self, book):
        works_actions.state(
            book=book,
            kind="state",
            subject="vessel:HYPO-BULK",
            value={"is": "standby"},
            effective_from=MORNING - dt.timedelta(hours=1),
            reason="test",
            by=None,
            now=MORNING,
        )
        walked = walk.walk(book, works.stated(book), MORNING)
        assert "HYPO-BULK:level" not in [item.key for item in walked.lines]

    def test_says_what_the_last_shift_left_open(self, olga, book):
        put(olga, a_round(line(), line("ENTRY:pH", "7.4", "")))
        later = walk.walk(book, works.stated(book), MORNING + dt.timedelta(hours=24))
        assert any("pH" in name for name in later.left_open)


class TestAnEntry:
    def test_is_taken_once_however_often_it_is_sent(self, olga, book):
        client_id = str(uuid.uuid4())
        body = a_round(line(), line("ENTRY:pH", "7.42", ""))
        first = put(olga, body, client_id)
        assert first.status_code == 201
        assert len(first.json()["refs"]) == 2
        assert [put(olga, body, client_id).status_code for _ in range(3)] == [200, 200, 200]
        assert Reading.objects.count() == 2
        assert Entry.objects.filter(kind="round").count() == 1
        book.refresh_from_db()
        assert list(verify.chain(book)) == []

    def test_under_a_known_id_with_another_content_is_refused(self, olga):
        client_id = str(uuid.uuid4())
        put(olga, a_round(line()), client_id)
        other = put(olga, a_round(line(value="0.56")), client_id)
        assert other.status_code == 409
        assert Reading.objects.count() == 1

    def test_names_who_when_and_what_was_typed(self, olga):
        put(olga, a_round(line(value="0,55", note="after flushing")))
        reading = Reading.objects.get()
        assert (reading.typed, reading.value_text, reading.note) == ("0,55", "0.55", "after flushing")
        assert reading.entry.recorded_by.username == "olga"
        assert reading.taken_at == dt.datetime(2026, 3, 10, 7, 40, tzinfo=dt.UTC)
        assert "Olga" in reading.by_name

    def test_with_a_line_that_cannot_be_read_is_answered_by_line_and_keeps_nothing(self, olga):
        answered = put(olga, a_round(line(), line("ENTRY:pH", "7..4", ""), line("GONE:pH", "7", "")))
        assert answered.status_code == 422
        assert set(answered.json()["lines"]) == {"1", "2"}
        assert "not a number" in answered.json()["lines"]["1"]
        assert Reading.objects.count() == 0

    @pytest.mark.parametrize(
        "body",
        [
            [],
            {},
            {"kind": "round"},
            {"kind": "party", "lines": []},
            {"kind": "round", "lines": [1]},
            {"kind": "round", "lines": [{}] * 201},
            {"kind": "round", "lines": [{"value": 5}]},
            {"kind": "line", "lines": [], "close": 3},
        ],
    )
    def test_of_another_shape_is_refused_in_words(self, olga, body):
        answered = put(olga, body)
        assert answered.status_code == 422
        assert answered.json()["general"] or answered.json()["lines"]

    def test_needs_an_id_that_is_a_uuid(self, olga):
        assert put(olga, a_round(line()), "1234").status_code == 422

    def test_from_the_future_is_refused(self, olga):
        answered = put(olga, a_round(line(taken_at="2026-03-10T09:30:00Z")))
        assert "still to come" in answered.json()["lines"]["0"]

    def test_not_taken_keeps_its_reason(self, olga):
        put(olga, a_round(line(value="", not_taken="no reagent")))
        reading = Reading.objects.get()
        assert (reading.state, reading.note, reading.value) == ("not_taken", "no reagent", None)

    def test_confirmed_at_a_second_look_says_so(self, olga):
        put(olga, a_round(line("ENTRY:pH", "13.2", "", confirmed=True)))
        assert rounds.CONFIRMED in Reading.objects.get().note

    def test_unlikely_and_unconfirmed_is_still_taken(self, olga):
        assert put(olga, a_round(line("ENTRY:pH", "73", ""))).status_code == 201
        assert Reading.objects.get().marks == ["impossible"]

    def test_of_two_tablets_both_stand(self, olga, book):
        put(olga, a_round(line(value="0.55")))
        put(people.signed_in("sam"), a_round(line(value="0.75")))
        assert [reading.marks for reading in Reading.objects.order_by("seq")] == [[], ["conflict"]]

    def test_answers_with_what_was_found(self, olga):
        answered = put(olga, a_round(line(value="0.05"))).json()
        assert answered["judged"]
        assert isinstance(answered["findings"], list)

    def test_is_not_for_those_without_the_right(self, book, morning):
        assert put(people.signed_in("ira"), a_round(line())).status_code == 403
        assert put(people.signed_in("stan"), a_round(line())).status_code == 404


class TestClosing:
    def test_writes_the_hand_over_into_the_same_entry(self, olga, book):
        answered = put(olga, a_round(line(), close={"note": "pump 2 hums", "open": ["ENTRY:pH", "HYPO-BULK:level"]}))
        assert answered.status_code == 201
        closed = models.HandOver.objects.get()
        assert (closed.note, closed.shift, closed.lines_due, closed.lines_answered) == ("pump 2 hums", "day", 4, 2)
        night = walk.walk(book, works.stated(book), MORNING + dt.timedelta(hours=12))
        assert night.said.note == "pump 2 hums"

    def test_closes_the_shift_it_was_opened_in(self, olga, book, monkeypatch):
        monkeypatch.setattr(clock, "now", lambda: MORNING + dt.timedelta(hours=10, minutes=5))
        put(
            olga,
            {"kind": "round", "lines": [], "close": {"note": "late", "open": [], "starts_at": "2026-03-10T06:00:00+00:00"}},
        )
        assert models.HandOver.objects.get().shift == "day"

    @pytest.mark.parametrize("starts_at", ["2020-01-01T06:00:00+00:00", "2026-03-10T06:00:00", "2027-01-01T06:00:00+00:00"])
    def test_takes_no_start_that_cannot_be(self, olga, starts_at):
        put(olga, {"kind": "round", "lines": [], "close": {"starts_at": starts_at}})
        assert models.HandOver.objects.get().starts_at == dt.datetime(2026, 3, 10, 6, 0, tzinfo=dt.UTC)

    def test_with_a_start_that_is_no_time_is_refused(self, olga):
        assert put(olga, {"kind": "round", "lines": [], "close": {"starts_at": "soon"}}).status_code == 422


class TestThePageWithoutScript:
    def page(self, client):
        return client.get("/w/TST/round/").content.decode()

    def fields(self, client, **typed):
        page = self.page(client)
        client_id = page.partition('name="client_id" value="')[2].partition('"')[0]
        return {"client_id": client_id} | typed

    def test_shows_each_line_with_its_last_value(self, olga):
        put(olga, a_round(line("ENTRY:pH", "7.42", "")))
        page = self.page(olga)
        assert "Free chlorine" in page
        assert "7.42" in page
        assert "1 of 4" in page

    def test_takes_a_round(self, olga):
        answered = olga.post(
            "/w/TST/round/", self.fields(olga, **{"value-0": "0.55", "unit-0": "mg/L", "clock-0": "07:15", "value-1": "7.4"})
        )
        assert answered.status_code == 302
        at = Reading.objects.get(parameter="free_chlorine").taken_at
        assert at == dt.datetime(2026, 3, 10, 6, 15, tzinfo=dt.UTC)
        assert Reading.objects.get(parameter="pH").taken_at == MORNING

    def test_sent_twice_by_a_double_tap_is_taken_once(self, olga):
        fields = self.fields(olga, **{"value-0": "0.55", "unit-0": "mg/L"})
        olga.post("/w/TST/round/", fields)
        olga.post("/w/TST/round/", fields)
        assert Reading.objects.count() == 1

    def test_stops_what_is_not_a_number_and_keeps_what_was_typed(self, olga):
        answered = olga.post("/w/TST/round/", self.fields(olga, **{"value-0": "0..5", "unit-0": "mg/L", "value-1": "7.4"}))
        page = answered.content.decode()
        assert answered.status_code == 422
        assert "not a number" in page
        assert 'value="0..5"' in page
        assert 'value="7.4"' in page
        assert Reading.objects.count() == 0

    def test_asks_once_about_what_is_unlikely_and_then_takes_it(self, olga):
        fields = self.fields(olga, **{"value-1": "12.9"})
        first = olga.post("/w/TST/round/", fields)
        assert first.status_code == 422
        assert "The instrument shows this" in first.content.decode()
        assert olga.post("/w/TST/round/", fields | {"confirmed-1": "on"}).status_code == 302
        assert Reading.objects.get().value_text == "12.9"

    def test_hands_over(self, olga):
        olga.post(
            "/w/TST/round/",
            self.fields(olga, **{"value-0": "0.55", "unit-0": "mg/L", "note": escape("pump 2 hums"), "close": "yes"}),
        )
        assert models.HandOver.objects.get().lines_open == ["ENTRY:pH", "FT-TREATED:totaliser", "HYPO-BULK:level"]

    def test_is_for_those_who_enter_rounds(self, book, morning):
        assert people.signed_in("ira").get("/w/TST/round/").status_code == 403
        assert people.signed_in("stan").get("/w/TST/round/").status_code == 404
