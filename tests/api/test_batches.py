"""Batches from machines: one entry each, an answer for every row, and never twice."""

from __future__ import annotations

import datetime as dt
import json
import time
import uuid
from decimal import Decimal

import pytest

from plant.api import batches
from plant.deviations.models import Deviation
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.readings.models import Reading
from tests import people
from tests.api.machines import batch, reading


def entries(book):
    return Entry.objects.filter(book=book, kind="api")


def test_a_batch_is_one_entry_through_the_one_door(book, machine):
    answer = machine.send(batch(reading(), reading(parameter="pH", value=8.1, unit="")))
    assert answer.status_code == 201, answer.content
    told = answer.json()
    entry = entries(book).get()
    assert (told["entry"], told["taken"], told["refused"], told["repeated"]) == (entry.seq, 2, 0, False)
    assert [row["ref"] for row in told["rows"]] == [f"{entry.seq}.1", f"{entry.seq}.2"]
    assert (entry.device, entry.attested, entry.recorded_by) == ("control system", "token", None)
    assert {row.by_name for row in Reading.objects.filter(entry=entry)} == {"control system"}
    assert not list(verify.everything())


def test_the_readings_page_names_the_device(book, machine):
    ref = machine.send(batch(reading())).json()["rows"][0]["ref"]
    page = people.signed_in("olga").get(f"/w/TST/reading/{ref}/").content.decode()
    assert "by the device control system" in page


def test_its_days_are_judged_as_a_rounds_are(book, machine):
    assert machine.send(batch(reading(value="0.05"))).json()["judged"] is True
    assert Deviation.objects.filter(book=book, subject="ENTRY", parameter="free_chlorine").exists()


def test_digits_are_kept_as_they_were_sent(book, machine):
    sent = b'{"readings": [{"site":"ENTRY","timestamp":"2026-03-10T08:00:00Z","parameter":"pH","value":8.10,"unit":""}]}'
    assert machine.send(sent).status_code == 201
    row = Reading.objects.get(book=book)
    assert (row.typed, row.value_text) == ("8.10", "8.10")


@pytest.mark.parametrize("value", ["1e-2", "1E-2", "0.01"])
def test_a_control_system_may_write_powers_of_ten(book, machine, value):
    sent = json.dumps(batch(reading())).replace('"0.52"', value).encode()
    assert machine.send(sent).status_code == 201
    assert Decimal(Reading.objects.get(book=book).value_text) == Decimal("0.01")


def test_sent_again_it_is_answered_the_same_and_adds_nothing(book, machine):
    ident = str(uuid.uuid4())
    sent = batch(reading(), reading(site="NOWHERE"), reading(), reading(parameter="pH", value=88, unit=""))
    first = machine.send(sent, ident)
    again = machine.send(sent, ident.upper())
    assert (first.status_code, again.status_code) == (201, 200)
    assert first.json()["rows"] == again.json()["rows"]
    assert [row["outcome"] for row in again.json()["rows"]] == ["taken", "refused", "same", "taken"]
    assert again.json()["rows"][3]["doubts"]
    assert again.json()["repeated"] is True
    assert again.json()["entry"] == first.json()["entry"]
    assert entries(book).count() == 1


def test_another_content_under_the_same_id_is_refused(book, machine):
    ident = str(uuid.uuid4())
    assert machine.send(batch(reading()), ident).status_code == 201
    answer = machine.send(batch(reading(value="0.6")), ident)
    assert answer.status_code == 409
    assert answer["Content-Type"] == "application/problem+json"
    assert Reading.objects.filter(book=book).count() == 1


def test_the_same_values_under_a_new_id_add_nothing(book, machine):
    assert machine.send(batch(reading())).status_code == 201
    answer = machine.send(batch(reading()))
    assert (answer.status_code, answer.json()["entry"], answer.json()["same"]) == (200, None, 1)
    assert entries(book).count() == 1


def test_another_value_is_a_conflict_that_a_person_settles(book, machine):
    machine.send(batch(reading()))
    row = machine.send(batch(reading(value="0.9"))).json()["rows"][0]
    assert row["outcome"] == "taken"
    assert "another value" in row["doubts"]


REFUSED = {
    "unknown site": (reading(site="NOWHERE"), "site"),
    "unknown parameter": (reading(parameter="mood"), "parameter"),
    "wrong unit": (reading(unit="h"), "unit"),
    "no number": (reading(value="0,5,2"), "value"),
    "too many digits": (reading(value="1e99"), "value"),
    "no time": (reading(timestamp="yesterday"), "timestamp"),
    "a time to come": (reading(timestamp="2026-03-10T13:00:00Z"), "timestamp"),
    "a day to come": (reading(timestamp="2026-03-12"), "timestamp"),
    "a number for a name": (reading(site=5), "site"),
    "a list": (reading(value=[1]), "value"),
    "true": (reading(value=True), "value"),
    "nothing for a name": (reading(note=None), "note"),
    "a field nobody knows": (reading(colour="red"), "colour"),
    "a correction": (reading(replaces="yes", note="typing error"), "replaces"),
    "a name too long": (reading(note="n" * 2001), "note"),
    "a NUL": (reading(note="a\x00b"), "note"),
    "a field missing": ({"site": "ENTRY"}, "timestamp"),
}


@pytest.mark.parametrize("what", REFUSED)
def test_a_row_that_cannot_be_understood_is_refused_and_the_others_are_taken(book, machine, what):
    wrong, field = REFUSED[what]
    answer = machine.send(batch(wrong, reading(parameter="pH", value="8.1", unit="")))
    assert answer.status_code == 201, answer.content
    refused, taken = answer.json()["rows"]
    assert (refused["outcome"], refused["field"], taken["outcome"]) == ("refused", field, "taken")
    assert refused["read"]
    assert refused["expected"]
    assert Reading.objects.filter(book=book).count() == 1


def test_where_no_row_can_be_taken_nothing_is_kept_and_the_id_is_free(book, machine):
    ident = str(uuid.uuid4())
    answer = machine.send(batch(reading(site="NOWHERE")), ident)
    assert (answer.status_code, answer.json()["refused"]) == (422, 1)
    assert not entries(book).exists()
    assert machine.send(batch(reading()), ident).status_code == 201


NOT_A_BATCH = {
    "not JSON": (b"{", 400),
    "no number": (b'{"readings": [{"value": NaN}]}', 400),
    "half a letter": (b'{"readings": ["\\ud800"]}', 400),
    "not UTF-8": (b'{"readings": ["\xff"]}', 400),
    "nested a hundred thousand deep": (b"[" * 100_000, 400),
    "a list": (b"[]", 422),
    "nothing in it": (b'{"readings": []}', 422),
    "something else in it": (b'{"readings": [1], "more": 1}', 422),
    "a row too many": (b'{"readings": [' + b"0," * 10_000 + b"0]}", 422),
    "a number of a million digits": (b'{"readings": ' + b"9" * 1_000_000 + b"}", 422),
}


@pytest.mark.parametrize("what", NOT_A_BATCH)
def test_what_is_no_batch_is_a_problem_in_words(book, machine, what):
    sent, status = NOT_A_BATCH[what]
    answer = machine.send(sent)
    assert answer.status_code == status, answer.content[:300]
    assert answer["Content-Type"] == "application/problem+json"
    assert answer.json()["status"] == status
    assert answer.json()["detail"]
    assert not entries(book).exists()


def test_too_large_is_refused_before_it_is_read(book, machine):
    answer = machine.send(b'{"readings": [' + b" " * 8_000_000 + b"]}")
    assert answer.status_code == 413
    assert answer["Content-Type"] == "application/problem+json"


def test_a_body_of_no_stated_length_is_refused_in_words(book, machine):
    answer = machine.put(f"/api/w/TST/batches/{uuid.uuid4()}", b"{}", headers={"Transfer-Encoding": "chunked"})
    assert (answer.status_code, answer["Content-Type"]) == (413, "application/problem+json")
    assert "Content-Length" in answer.json()["detail"]


def test_only_json_is_read_and_only_a_uuid_is_an_id(book, machine):
    assert machine.put(f"/api/w/TST/batches/{uuid.uuid4()}", b"a=1", content_type="text/plain").status_code == 415
    for ident in ("1", "{" + str(uuid.uuid4())[1:-1] + "}", "urn:uuid:1", uuid.uuid4().hex):
        assert machine.send(batch(reading()), ident).status_code == 422


def test_not_taken_is_kept_with_its_reason(book, machine):
    assert machine.send(batch(reading(value=None, note="analyser out of service"))).status_code == 201
    row = Reading.objects.get(book=book)
    assert (row.state, row.note) == (Reading.State.NOT_TAKEN, "analyser out of service")


def test_ten_thousand_readings_are_one_entry(book, machine, figure):
    """A quarter of a day of one value a second and more: everything is taken, and the days are left to the worker or judged."""
    start = dt.datetime(2026, 3, 10, 0, 0, tzinfo=dt.UTC)
    rows = [
        reading(
            site=("ENTRY", "FILTERED", "RAW")[number % 3],
            timestamp=(start + dt.timedelta(seconds=4 * number)).isoformat(),
            value=f"{0.4 + number % 20 / 100:.2f}",
            method="online analyser",
            sample=f"S{number}",
        )
        for number in range(batches.MOST_ROWS)
    ]
    sent = json.dumps(batch(*rows)).encode()
    began = time.perf_counter()
    answer = machine.send(sent)
    took = time.perf_counter() - began
    assert answer.status_code == 201
    assert (answer.json()["taken"], answer.json()["refused"]) == (10_000, 0)
    assert entries(book).count() == 1
    assert Reading.objects.filter(entry=entries(book).get()).count() == 10_000
    figure(
        f"10,000 readings in one request: {len(sent) / 1e6:.1f} MB, answered in {took:.1f} s, judged {answer.json()['judged']}"
    )
