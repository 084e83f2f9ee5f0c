"""Shared tablets at the server: what the device's cookie opens and what not, PINs, claimed names, revoking."""

from __future__ import annotations

import datetime as dt
import json
import uuid

import pytest
from django.test import Client

from plant import clock
from plant.intake.models import TakeOver
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.readings.models import Reading
from plant.works.tablets import actions, gate, pins, queries
from plant.works.tablets.models import Confirmation, Device
from tests import people
from tests.tablet import walked

pytestmark = pytest.mark.django_db


@pytest.fixture
def book():
    return walked.book()


@pytest.fixture
def device(book):
    return walked.enrolled(book)


@pytest.fixture
def tablet(device):
    """A browser that has the device's cookie and nothing else."""
    client = Client()
    client.cookies[gate.COOKIE] = device[1]
    return client


def body(person: str, spell: str = "", **more) -> dict:
    at = clock.now().replace(second=0, microsecond=0).isoformat()
    line = {"key": "ENTRY:pH", "site": "ENTRY", "parameter": "pH", "value": "8.10", "unit": "", "taken_at": at}
    return {"kind": "line", "lines": [line], "person": person, "spell": spell} | more


def put(client, said: dict, ident: str = "", code: str = "TST", **headers):
    address = f"/w/{code}/entries/{ident or uuid.uuid4()}"
    return client.put(address, json.dumps(said), content_type="application/json", headers=headers)


def prove(client, spell: str, person: str, pin: str):
    said = json.dumps({"person": person, "pin": pin})
    return client.put(f"/w/TST/spells/{spell}", said, content_type="application/json")


def test_a_supervisor_enrols_the_browser_and_is_signed_out_on_it(book):
    client = people.signed_in("sam")
    assert client.get("/w/TST/tablets/").status_code == 200
    answer = client.post("/w/TST/tablets/", {"name": "Pump room"})
    assert answer.url == "/w/TST/round/"
    cookie = answer.cookies[gate.COOKIE]
    assert cookie["httponly"]
    assert cookie["path"] == "/w/TST/"
    assert Device.objects.get().token_hash == actions.digest(cookie.value) != cookie.value
    client.cookies[gate.COOKIE] = cookie.value
    page = client.get("/w/TST/round/")
    assert page.status_code == 200
    assert b"Pump room" in page.content
    assert client.get("/w/TST/tablets/").status_code == 302


def test_an_operator_enrols_nothing_and_gives_nobody_a_pin(book):
    client = people.signed_in("olga")
    assert client.post("/w/TST/tablets/", {"name": "Mine"}).status_code == 403
    assert client.post("/w/TST/tablets/pin/sam/").status_code == 403
    assert Device.objects.count() == 0


def test_a_name_is_claimed_until_the_pin_is_given_and_confirmed_then(book, device, tablet):
    walked.give_pin(book, "olga")
    spell = str(uuid.uuid4())
    assert put(tablet, body("olga", spell)).json()["attested"] == "claimed"
    entry = Entry.objects.get(kind="line")
    assert (entry.recorded_by.username, entry.device, entry.attested) == ("olga", "Filter hall", "claimed")
    assert queries.in_words(entry) == "name chosen at Filter hall, PIN owed"
    assert prove(tablet, spell, "olga", "29384").json() == {"attested": "pin", "confirmed": 1}
    assert Confirmation.objects.get().entries == [entry.seq]
    assert queries.in_words(entry) == "name chosen at Filter hall, confirmed by PIN afterwards"
    # Once is enough, and what comes now is by PIN from the start.
    assert prove(tablet, spell, "olga", "29384").json()["confirmed"] == 0
    said = body("olga", spell)
    said["lines"][0]["value"] = "8.20"
    assert put(tablet, said).json()["attested"] == "pin"
    assert list(verify.everything()) == []


def test_the_pin_of_one_person_confirms_nothing_of_another(book, tablet):
    walked.give_pin(book, "olga")
    spell = str(uuid.uuid4())
    assert put(tablet, body("sam", spell)).status_code == 201
    assert prove(tablet, spell, "olga", "29384").json()["confirmed"] == 0
    assert put(tablet, body("sam", spell)).json()["attested"] == "claimed"
    walked.give_pin(book, "sam", "73519")
    assert prove(tablet, spell, "sam", "73519").status_code == 422


def test_a_lock_out_refuses_the_right_pin_for_a_while_and_never_stops_entry(book, device, tablet):
    walked.give_pin(book, "olga")
    spell = str(uuid.uuid4())
    answers = [prove(tablet, spell, "olga", "11112").status_code for _ in range(pins.TRIES)]
    assert answers == [403] * (pins.TRIES - 1) + [429]
    locked = prove(tablet, spell, "olga", "29384")
    assert (locked.status_code, locked.json()["owed"]) == (429, True)
    assert put(tablet, body("olga", spell)).json()["attested"] == "claimed"
    later = clock.now() + dt.timedelta(minutes=pins.LOCKED_MINUTES + 1)
    proof = actions.prove(device=device[0], stated=walked.stated(book), username="olga", spell=spell, pin="29384", now=later)
    assert (proof.right, proof.confirmed) == (True, 1)


def test_without_a_pin_the_name_is_taken_and_the_pin_owed(tablet):
    answer = prove(tablet, str(uuid.uuid4()), "olga", "29384")
    assert (answer.status_code, answer.json()["owed"]) == (403, True)


@pytest.mark.parametrize("pin", ["1234", "11111", "12345", "98765", "12a45", "123456789", "\u0661\u0662\u0665\u0663\u0664"])
def test_pins_that_are_guessed_first_are_refused(pin):
    with pytest.raises(pins.Unfit):
        pins.check(pin)


def test_a_pin_is_set_by_its_owner_or_by_a_supervisor_and_kept_as_a_hash(book):
    client = people.signed_in("olga")
    assert client.post("/w/TST/pin/", {"pin": "29384", "again": "29385"}).status_code == 200
    assert client.post("/w/TST/pin/", {"pin": "29384", "again": "29384"}).status_code == 302
    kept = walked.actions.Pin.objects.get(person__username="olga")
    assert "29384" not in kept.digest
    shown = people.signed_in("sam").post("/w/TST/tablets/pin/olga/")
    assert shown.status_code == 200
    assert walked.actions.Pin.objects.get(person__username="olga").digest != kept.digest


def test_a_pin_and_a_cookie_open_the_round_and_nothing_else(book, tablet):
    walked.give_pin(book, "sam")
    put(tablet, body("sam", spell := str(uuid.uuid4())))
    assert prove(tablet, spell, "sam", "29384").status_code == 200
    ref = Reading.objects.get().ref
    closed = [
        f"/w/TST/reading/{ref}/",
        "/w/TST/",
        "/w/TST/settings/",
        "/w/TST/settings/limit/new/",
        "/w/TST/reports/",
        "/w/TST/deviations/",
        "/w/TST/readings/",
        "/w/TST/import/",
        "/w/TST/delivery/",
        "/w/TST/tablets/",
        "/w/TST/pin/",
    ]
    for address in closed:
        for method in (tablet.get, tablet.post):
            answer = method(address, {"act": "correct", "value": "7", "reason": "because"} if method is tablet.post else {})
            assert (answer.status_code, answer.url.partition("?")[0]) == (302, "/sign-in/"), address
    assert tablet.post("/w/TST/round/", {"value-0": "7"}).status_code == 403
    assert tablet.get("/w/TST/round/data/").status_code == 200


def test_the_cookie_is_of_one_works(book, tablet):
    other = people.open_works(walked.toml().replace('code = "TST"', 'code = "OTH"', 1))
    assert tablet.get("/w/OTH/round/data/").status_code == 302
    assert put(tablet, body("olga"), code="OTH").status_code == 401
    assert not Entry.objects.filter(book=other, kind="line").exists()


def test_whoever_never_belonged_is_nobody_and_whoever_left_still_counts(book, tablet):
    from plant.works import actions as works

    assert put(tablet, body("stan")).status_code == 422
    assert put(tablet, body("ira")).status_code == 422
    works.end_membership(book=book, username="olga", by=None, now=clock.now(), reason="left")
    assert put(tablet, body("olga")).status_code == 201
    assert "olga" not in [hand["person"] for hand in tablet.get("/w/TST/round/data/").json()["settings"]["tablet"]["hands"]]


def test_a_withdrawn_tablet_is_refused_plainly(book, device, tablet):
    assert people.signed_in("sam").post(f"/w/TST/tablets/{device[0].pk}/revoke/", {"reason": "lost"}).status_code == 302
    assert tablet.get("/w/TST/round/").status_code == 403
    assert b"has been withdrawn" in tablet.get("/w/TST/round/").content
    answer = put(tablet, body("olga"))
    assert (answer.status_code, answer.json()["revoked"]) == (403, True)
    assert Reading.objects.count() == 0
    assert b"lost" in people.signed_in("sam").get("/w/TST/tablets/").content


def test_without_a_tablet_nobody_sends_for_somebody_else(book):
    answer = put(people.signed_in("olga"), body("sam"))
    assert answer.status_code == 403
    assert put(people.signed_in("olga"), body("olga")).json()["attested"] == "session"


def test_the_clock_of_the_device_is_noted_and_flagged_and_makes_no_repeat_another_content(book, tablet):
    ident, said = str(uuid.uuid4()), body("olga")
    fast = (clock.now() + dt.timedelta(hours=26)).isoformat()
    assert put(tablet, said, ident, **{"X-Device-Sent-At": fast}).status_code == 201
    assert put(tablet, said, ident, **{"X-Device-Sent-At": clock.now().isoformat()}).status_code == 200
    noted = json.loads(Entry.objects.get(kind="line").payload)["noted"]
    assert noted["clock_flagged"]
    assert 26 * 3600 - 60 < noted["clock_off_s"] < 26 * 3600 + 60
    assert Reading.objects.count() == 1
    assert list(verify.everything()) == []


def test_two_tablets_with_the_same_line_both_stand_and_the_supervisor_settles(book, tablet):
    second = Client()
    second.cookies[gate.COOKIE] = walked.enrolled(book, "Pump room")[1]
    one, two = body("olga"), body("sam")
    two["lines"][0]["value"] = "8.40"
    two["lines"][0]["taken_at"] = one["lines"][0]["taken_at"]
    assert put(tablet, one).status_code == put(second, two).status_code == 201
    rows = list(Reading.objects.order_by("seq"))
    assert [row.value_text for row in rows] == ["8.10", "8.40"]
    assert rows[1].marks == ["conflict"]
    settle = {"act": "settle", "decision": "stands", "reason": "read again", "client_id": uuid.uuid4().hex}
    assert second.post(f"/w/TST/reading/{rows[1].ref}/", settle).status_code == 302
    assert "conflict" in Reading.objects.as_known().get(pk=rows[1].pk).marks
    answer = people.signed_in("sam").post(f"/w/TST/reading/{rows[1].ref}/", settle)
    assert answer.status_code == 302
    assert [row.value_text for row in Reading.objects.as_known().exclude(state="not_taken") if not row.voided] == ["8.40"]


def test_the_next_shift_takes_over(book, tablet):
    started = tablet.get("/w/TST/round/").context["round"].before.start.isoformat()
    assert put(tablet, {"kind": "round", "lines": [], "person": "olga", "take_over": {"starts_at": started}}).status_code == 201
    assert TakeOver.objects.get().entry.recorded_by.username == "olga"
    assert b"Taken over by Olga Ottesen" in tablet.get("/w/TST/round/").content


def test_the_design_dose_says_what_the_feeder_needs(book, tablet):
    """1.10 g/m³ of chlorine at 125 g/L: 8.8 mL of product per m³."""
    feeding = tablet.get("/w/TST/round/data/").json()["settings"]["feeding"]
    assert feeding["points"]["HYPO-POST"]["l_per_m3"] == pytest.approx(1.10 / 125, rel=1e-6)


def test_the_files_for_the_time_without_a_network_hold_no_data(book):
    client = people.signed_in("olga")
    for address in ("/sw.js", "/round-shell/", "/app.webmanifest?works=TST"):
        text = client.get(address).content.decode()
        assert "Olga" not in text
        assert "Testing Ford" not in text
    assert client.get("/sw.js")["Cache-Control"] == "no-cache"
    assert client.get("/app.webmanifest?works=TST").json()["start_url"] == "/w/TST/round/"
    assert client.get("/app.webmanifest?works=//evil.example").json()["start_url"] == "/"
