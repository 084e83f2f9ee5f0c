"""Bringing in a file from the page: looked at first, then confirmed."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest
from django.conf import settings
from django.core.files.uploadedfile import SimpleUploadedFile

from plant import clock
from plant.intake import incoming
from plant.jobs import running
from plant.jobs.models import Job
from plant.readings.models import Reading
from plant.stock.models import Delivery
from tests import people

NOW = dt.datetime(2026, 4, 2, 8, 0, tzinfo=dt.UTC)
FILE = "site,timestamp,parameter,value,unit\nENTRY,2026-03-28T07:00,pH,7.3,\nGONE,2026-03-28T07:00,pH,7.3,\nTAP-1,2026-03-28T07:00,iron,<0.02 ,mg/L\n"


@pytest.fixture
def sam(db, monkeypatch):
    people.small_works()
    monkeypatch.setattr(clock, "now", lambda: NOW)
    return people.signed_in("sam")


def send(client, text=FILE, **options):
    content = text if isinstance(text, bytes) else text.encode()
    return client.post("/w/TST/import/", {"file": SimpleUploadedFile("march.csv", content)} | options)


def confirm(client, page, **options):
    hidden = {
        name: page.partition(f'name="{name}" value="')[2].partition('"')[0]
        for name in ("token", "name", "kind", "decimal", "ambiguous")
    }
    return client.post("/w/TST/import/", hidden | {"confirm": "yes"} | options)


def test_looking_writes_nothing_and_says_what_would_be_refused(sam):
    page = send(sam).content.decode()
    assert "1 added" in page
    assert "march.csv:3: read site &#x27;GONE&#x27;" in page
    assert "Take 1 line" in page
    assert Reading.objects.count() == 0


def test_confirming_takes_it_and_leaves_the_days_to_the_worker(sam):
    page = send(sam, add_sites="on").content.decode()
    assert "2 sample points added" in page
    assert confirm(sam, page, add_sites="on").status_code == 302
    assert Reading.objects.count() == 3
    assert Reading.objects.first().entry.recorded_by.username == "sam"
    waiting = Job.objects.filter(kind="judge", state=Job.State.QUEUED)
    assert waiting.count() == 1
    later = NOW + dt.timedelta(minutes=5)
    assert running.run_due(owner="test", now=later) >= 1
    assert Job.objects.get(pk=waiting.model.objects.get(kind="judge").pk).state == Job.State.DONE
    assert not list((Path(settings.WEIRBOOK_FILES) / "incoming").glob("*.csv"))


def test_the_same_file_again_has_nothing_new(sam):
    confirm(sam, send(sam).content.decode())
    page = send(sam).content.decode()
    assert "There is nothing new in it." in page


def test_all_or_nothing_says_beforehand_that_nothing_would_be_kept(sam):
    page = send(sam, all_or_nothing="on").content.decode()
    assert "nothing would be kept" in page
    assert "Take 1 line" not in page


def test_other_spellings_are_typed_line_by_line(sam):
    text = 'site,timestamp,parameter,value,unit\nOUT,2026-03-28T07:00,temperature,"7,5",DEG C\n'
    page = send(sam, text, units="DEG C = °C", sites="OUT = ENTRY", decimal="comma").content.decode()
    assert "Take 1 line" in page
    refused = send(sam, text, units="DEG C", decimal="comma")
    assert refused.status_code == 422


def test_deliveries_come_the_same_way(sam):
    text = "timestamp,vessel,product,quantity,unit\n2026-03-28T10:00,NAOH-BULK,NAOH,500,kg\n"
    page = send(sam, text, kind="deliveries").content.decode()
    assert confirm(sam, page).status_code == 302
    assert Delivery.objects.count() == 1


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"", "is empty"),
        (b"\xff\xfes\x00i\x00", "UTF-16"),
        ("site,timestamp,parameter,value,unit\nENTRY,2026-03-28,temperature,7,°C\n".encode("latin-1"), "is not UTF-8"),
        (b"a,b,c\n1,2,3\n", "lacks site"),
    ],
)
def test_what_is_not_a_sheet_is_told_in_a_sentence(sam, content, said):
    answered = send(sam, content)
    page = answered.content.decode()
    assert answered.status_code in (200, 422)
    assert said in page or "submitted file is empty" in page or "Choose a file" in page
    assert Reading.objects.count() == 0


def test_too_many_lines_are_sent_to_the_shell(sam, monkeypatch):
    monkeypatch.setattr(incoming, "MOST_LINES", 2)
    assert "manage.py import_records" in send(sam).content.decode()


def test_a_token_of_nobody_s_is_refused(sam):
    answered = sam.post("/w/TST/import/", {"token": "../../etc/passwd", "name": "x", "confirm": "yes"})
    assert answered.status_code == 422
    assert "no longer here" in answered.content.decode()


@pytest.mark.parametrize(("who", "status"), [("olga", 403), ("ira", 403), ("mira", 200), ("adam", 200), ("stan", 404)])
def test_is_for_those_who_may_import(sam, who, status):
    assert people.signed_in(who).get("/w/TST/import/").status_code == status


def test_a_million_lines_are_refused_at_once_with_the_way_to_take_them(sam):
    head = b"site,timestamp,parameter,value,unit\n"
    content = head + b"ENTRY,2026-03-28,pH,7,\n" * 1_000_000
    answered = send(sam, content)
    assert answered.status_code == 422
    assert "here at most" in answered.content.decode()
    assert "manage.py import_records" in answered.content.decode()
    assert Reading.objects.count() == 0
