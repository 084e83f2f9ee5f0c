"""One reading's page: its history, and the changes that leave the old one standing."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest

from plant import clock
from plant.intake import records
from plant.ledger import verify
from plant.readings import marks, queries
from plant.readings.models import Reading, Settlement
from tests import people

NOW = dt.datetime(2026, 3, 10, 8, 0, tzinfo=dt.UTC)


@pytest.fixture
def book(db, monkeypatch, sheet):
    book = people.small_works()
    monkeypatch.setattr(clock, "now", lambda: NOW)
    path = sheet(
        "ENTRY,2026-03-09T08:00,free_chlorine,0.55,mg/L",
        "ENTRY,2026-03-09T08:00,free_chlorine,5.5,mg/L",
        "ENTRY,2026-03-09T09:00,pH,73,",
        header="site,timestamp,parameter,value,unit",
    )
    records.bring_in(
        book=book, sheet=records.open_file(path), wanted=records.Wanted(), by=people.person("olga"), now=NOW, judge=False
    )
    return book


def of(text):
    return Reading.objects.get(typed=text)


def change(client, reading, **typed):
    return client.post(f"/w/TST/reading/{reading.ref}/", {"client_id": uuid.uuid4().hex} | typed)


CORRECTION = {
    "act": "correct",
    "value": "7.3",
    "unit": "",
    "timestamp": "2026-03-09T09:00",
    "note": "",
    "reason": "point forgotten",
}


class TestACorrection:
    def test_stands_beside_what_it_corrects(self, book):
        sam = people.signed_in("sam")
        answered = change(sam, of("73"), **CORRECTION)
        assert answered.status_code == 302
        old, new = of("73"), of("7.3")
        assert (new.supersedes_id, new.reason, new.marks) == (old.pk, "point forgotten", [])
        assert new.entry.recorded_by.username == "sam"
        page = sam.get(answered["Location"]).content.decode()
        assert "point forgotten" in page
        assert "73" in page
        book.refresh_from_db()
        assert list(verify.chain(book)) == []

    def test_needs_a_reason(self, book):
        answered = change(people.signed_in("sam"), of("73"), **CORRECTION | {"reason": " "})
        assert answered.status_code == 422
        assert "say why" in answered.content.decode()
        assert 'value="7.3"' in answered.content.decode()

    def test_that_cannot_be_read_is_refused_with_what_was_typed(self, book):
        answered = change(people.signed_in("sam"), of("73"), **CORRECTION | {"value": "7.3.3"})
        assert answered.status_code == 422
        assert 'value="7.3.3"' in answered.content.decode()

    def test_of_two_people_the_second_is_told_who_was_first_and_loses_nothing(self, book):
        reading = of("73")
        change(people.signed_in("sam"), reading, **CORRECTION)
        second = change(
            people.signed_in("olga"), reading, **CORRECTION | {"value": "7.35", "reason": "read it off the meter again"}
        )
        page = second.content.decode()
        assert second.status_code == 409
        assert "Sam" in page
        assert "point forgotten" in page
        assert "7.35" in page
        assert "read it off the meter again" in page
        assert Reading.objects.filter(supersedes=reading).count() == 1

    def test_sent_twice_by_a_double_tap_is_one(self, book):
        sam, typed = people.signed_in("sam"), CORRECTION | {"client_id": uuid.uuid4().hex}
        reading = of("73")
        change(sam, reading, **typed)
        assert change(sam, reading, **typed).status_code == 302
        assert Reading.objects.filter(supersedes=reading).count() == 1

    def test_of_one_s_own_is_for_operators_of_others_for_supervisors(self, book):
        assert change(people.signed_in("olga"), of("73"), **CORRECTION).status_code == 302
        sams = of("7.3")
        change(people.signed_in("sam"), sams, **CORRECTION | {"value": "7.4"})
        assert change(people.signed_in("olga"), of("7.4"), **CORRECTION | {"value": "7.5"}).status_code == 403

    @pytest.mark.parametrize("who", ["ira", "mira", "adam"])
    def test_is_not_for_those_who_only_look(self, book, who):
        assert people.signed_in(who).get(f"/w/TST/reading/{of('73').ref}/").status_code == 200
        assert change(people.signed_in(who), of("73"), **CORRECTION).status_code == 403

    def test_to_not_taken_keeps_the_reason(self, book):
        change(people.signed_in("sam"), of("73"), **CORRECTION | {"value": "", "note": "no sample was taken"})
        new = Reading.objects.get(state="not_taken")
        assert (new.value, new.note) == (None, "no sample was taken")


class TestAVoid:
    def test_takes_a_reading_out_but_not_away(self, book):
        reading = of("73")
        answered = change(people.signed_in("sam"), reading, act="void", reason="another works' sheet")
        assert answered.status_code == 302
        assert queries.points(book, start=NOW - dt.timedelta(days=3), end=NOW, parameters=["pH"]) == []
        assert Reading.objects.filter(pk=reading.pk).exists()

    def test_is_for_supervisors(self, book):
        assert change(people.signed_in("olga"), of("73"), act="void", reason="oops").status_code == 403


class TestADoubt:
    def points(self, book):
        found = queries.points(book, start=NOW - dt.timedelta(days=3), end=NOW)
        return {point.typed: point for point in found}

    def test_is_settled_as_standing(self, book):
        assert self.points(book)["73"].doubtful
        change(people.signed_in("sam"), of("73"), act="settle", decision="stands", reason="checked with the meter")
        assert self.points(book)["73"].usable

    def test_is_settled_as_set_aside_and_may_be_settled_anew(self, book):
        sam = people.signed_in("sam")
        change(sam, of("73"), act="settle", decision="set_aside", reason="can't be")
        assert self.points(book)["73"].settled == "set_aside"
        change(sam, of("73"), act="settle", decision="stands", reason="it was caustic")
        assert self.points(book)["73"].settled == "stands"
        assert Settlement.objects.count() == 2

    def test_between_two_records_leaves_one(self, book):
        assert of("5.5").marks == [marks.CONFLICT]
        change(people.signed_in("sam"), of("5.5"), act="settle", decision="stands", reason="the first was yesterday's")
        points = self.points(book)
        assert "0.55" not in points
        assert points["5.5"].usable
        assert Reading.objects.get(typed="0.55", voided=True).reason.endswith("the first was yesterday's")

    def test_that_is_not_there_cannot_be_settled(self, book):
        answered = change(people.signed_in("sam"), of("0.55"), act="settle", decision="stands", reason="why not")
        assert answered.status_code == 422

    def test_is_settled_by_supervisor_and_manager_only(self, book):
        assert change(people.signed_in("olga"), of("73"), act="settle", decision="stands", reason="fine").status_code == 403
        assert change(people.signed_in("mira"), of("73"), act="settle", decision="stands", reason="fine").status_code == 302


def test_times_are_shown_on_the_works_own_clock(book):
    page = people.signed_in("sam").get(f"/w/TST/reading/{of('73').ref}/").content.decode()
    assert "9 Mar 2026 09:00" in page


@pytest.mark.parametrize("ref", ["9.9", "x", "1", "1.1.1"])
def test_of_no_reading_there_is_no_page(book, ref):
    assert people.signed_in("sam").get(f"/w/TST/reading/{ref}/").status_code == 404
