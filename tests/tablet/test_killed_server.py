"""Shared tablets against real servers: one that is killed while they send, and a small one under thirty of them."""

from __future__ import annotations

import datetime as dt
import http.client
import json
import random
import re
import threading
import time
import uuid
from collections import Counter

import pytest

from tests import services
from tests.operations.site import Site, kill_all_of

pytestmark = [pytest.mark.service, pytest.mark.slow]

SUBMISSIONS = 200
KILLS = 5
TABLETS = 30
ROUNDS_EACH = 3
ENROL = """
import django; django.setup(); import json
from plant import clock
from plant.ledger import queries
from tests import people
from plant.works.tablets import actions
book = queries.book("TST")
print(json.dumps([actions.enrol(book=book, name=f"Tablet {n}", by=people.person("sam"), now=clock.now())[1] for n in range(30)]))
"""


@pytest.fixture(scope="module")
def site(request):
    address = ""
    if request.config.getoption("--database") == "postgres":
        address = request.getfixturevalue("postgres").url
    made = Site(database_url=address)
    yield made
    made.close()


@pytest.fixture(scope="module")
def tokens(site) -> list[str]:
    return json.loads(site.python(ENROL))


class Device:
    """An enrolled tablet, reduced to what it says to the server; its clock is off by ``off``."""

    def __init__(self, port: int, token: str, off: dt.timedelta = dt.timedelta()) -> None:
        self.port, self.token, self.off, self.csrf = port, token, off, ""

    def ask(self, verb: str, path: str, body: str | None = None) -> tuple[int, str]:
        link = http.client.HTTPConnection("127.0.0.1", self.port, timeout=60)
        sent = (dt.datetime.now(dt.UTC) + self.off).isoformat()
        headers = {"Cookie": f"weirbook_tablet={self.token}; csrftoken={self.csrf}", "X-Device-Sent-At": sent}
        if self.csrf:
            headers |= {"X-CSRFToken": self.csrf, "Content-Type": "application/json"}
        try:
            link.request(verb, path, body, headers)
            answer = link.getresponse()
            text = answer.read().decode()
            found = re.search(r"csrftoken=(\w+)", str(answer.headers))
            if found:
                self.csrf = found[1]
            return answer.status, text
        finally:
            link.close()

    def put(self, ident: str, body: str) -> int:
        """The status, or 0 when nobody answered."""
        try:
            if not self.csrf:
                self.ask("GET", "/w/TST/round/data/")
            return self.ask("PUT", f"/w/TST/entries/{ident}", body)[0]
        except (OSError, http.client.HTTPException):
            return 0


def body(number: int, started: dt.datetime, person: str) -> str:
    """One value with a minute of its own. Odd ones are as an older app wrote them, without a spell."""
    at = (started - dt.timedelta(minutes=number)).isoformat()
    line = {"key": "RAW:temperature", "site": "RAW", "parameter": "temperature", "value": f"{9 + number % 50 / 10:.1f}"}
    said = {"kind": "line", "lines": [line | {"unit": "°C", "taken_at": at}], "person": person}
    return json.dumps(said if number % 2 else said | {"spell": str(uuid.UUID(int=number)), "app": "later"})


def test_two_hundred_submissions_while_the_server_is_killed(site, tokens, figure):
    """kill -9 at random moments; requests doubled, reordered, and from two versions of the app; a clock 26 h fast."""
    chance = random.Random(20260401)
    started = dt.datetime.now(dt.UTC).replace(second=0, microsecond=0)
    idents = [str(uuid.uuid4()) for _ in range(SUBMISSIONS)]
    bodies = [body(number, started, ("olga", "sam")[number % 3 == 0]) for number in range(SUBMISSIONS)]
    outstanding = [*range(SUBMISSIONS), *chance.sample(range(SUBMISSIONS), 60)]
    chance.shuffle(outstanding)
    lock, answers, sent = threading.Lock(), Counter[int](), Counter[int]()
    port = services.free_port()
    web = site.web(port, threads=4)

    def tablet(place: int) -> None:
        device = Device(port, tokens[place], dt.timedelta(hours=26) if place == 0 else dt.timedelta())
        while True:
            with lock:
                if not outstanding:
                    return
                number = outstanding.pop()
            end = time.monotonic() + 60
            while True:
                status = device.put(idents[number], bodies[number])
                with lock:
                    answers[status] += 1
                if status in (200, 201):
                    sent[number] += 1
                    break
                assert status in (0, 500, 502, 503), status
                assert time.monotonic() < end
                time.sleep(0.1)

    threads = [threading.Thread(target=tablet, args=(place,), daemon=True) for place in range(4)]
    for thread in threads:
        thread.start()
    kills = 0
    while any(thread.is_alive() for thread in threads):
        time.sleep(chance.uniform(0.2, 1.2))
        if kills < KILLS and outstanding:
            kill_all_of(web)
            kills += 1
            web = site.web(port, threads=4)
    assert not outstanding
    assert len(sent) == SUBMISSIONS
    found = site.ask("list(Entry.objects.filter(kind='line').values_list('client_id', flat=True))")
    values = site.ask("[[r.taken_at.isoformat(), r.value_text] for r in Reading.objects.filter(entry__kind='line')]")
    flagged = site.ask("Entry.objects.filter(kind='line', payload__contains='clock_flagged\":true').count()")
    kill_all_of(web)
    figure(
        f"{SUBMISSIONS} submissions, {sum(answers.values())} requests, server killed {kills} times, "
        f"{answers[0]} unanswered, {answers[200]} repeats recognised, {flagged} flagged for a clock 26 h fast: "
        f"{SUBMISSIONS - len(set(found) & set(idents))} lost, {len(values) - SUBMISSIONS} doubled"
    )
    assert sorted(found) == sorted(idents)
    assert len(values) == len({at for at, _ in values}) == SUBMISSIONS
    assert kills >= 3
    assert answers[200] >= 60 - kills * 4
    assert flagged > 0
    site.manage("verify_records")


def test_thirty_tablets_at_once_against_one_small_server(site, tokens, figure):
    """Each opens the round and sends three rounds of seven values, all at the same moment."""
    port = services.free_port()
    web = site.web(port, threads=8)
    start = threading.Barrier(TABLETS)
    seconds: list[float] = []
    statuses = Counter[int]()
    idents: list[str] = []
    began_day = dt.datetime.now(dt.UTC) - dt.timedelta(days=2)
    sites = (("RAW", "temperature", "11.0", "°C"), ("ENTRY", "free_chlorine", "0.55", "mg/L"), ("ENTRY", "pH", "8.10", ""))
    more = (("HYPO-BULK", "level", "1.500", "m"), ("NAOH-BULK", "level", "1.400", "m"), ("PEROX-IBC", "weight", "700.0", "kg"))

    def tablet(place: int) -> None:
        device = Device(port, tokens[place])
        start.wait(30)
        for turn in range(ROUNDS_EACH):
            at = (began_day + dt.timedelta(minutes=place * ROUNDS_EACH + turn)).isoformat()
            lines = [
                {"key": f"{where}:{what}", "site": where, "parameter": what, "value": value, "unit": unit, "taken_at": at}
                for where, what, value, unit in (*sites, *more)
            ]
            ident = str(uuid.uuid4())
            idents.append(ident)
            began = time.monotonic()
            status = device.put(ident, json.dumps({"kind": "round", "lines": lines, "person": "olga"}))
            seconds.append(time.monotonic() - began)
            statuses[status] += 1

    threads = [threading.Thread(target=tablet, args=(place,), daemon=True) for place in range(TABLETS)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(120)
    found = site.ask("list(Entry.objects.filter(kind='round').values_list('client_id', flat=True))")
    count = site.ask("Reading.objects.filter(entry__kind='round').count()")
    kill_all_of(web)
    ordered = sorted(seconds)
    figure(
        f"{TABLETS} tablets at once, one server process of 8 threads, {len(idents)} rounds: answers {dict(statuses)}, "
        f"half within {ordered[len(ordered) // 2]:.2f} s, slowest {ordered[-1]:.2f} s"
    )
    assert statuses == {201: TABLETS * ROUNDS_EACH}
    assert sorted(found) == sorted(idents)
    assert count == TABLETS * ROUNDS_EACH * 6
    assert ordered[-1] < 30
