"""Days reckoned ahead by a worker: once a day, again after a new way of reckoning; what is asked for afterwards is there."""

from __future__ import annotations

import datetime as dt

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from plant.dosing import queries as dosing
from plant.dosing import states, tasks
from plant.jobs import running
from plant.jobs.actions import claim
from plant.jobs.models import Job
from plant.ledger.models import Book
from tests.dosing.test_book_against_dip import run

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 18, 6, 30, tzinfo=dt.UTC)
FIRST, LAST = dt.date(2026, 3, 2), dt.date(2026, 3, 16)


def waiting() -> int:
    return Job.objects.filter(kind=tasks.KEEP, state=Job.State.QUEUED).count()


def work() -> None:
    while (job := claim(owner="test", now=NOW)) is not None:
        assert running.run(job=job, now=NOW)


def test_what_was_reckoned_ahead_is_read_and_is_the_same():
    book = run()
    plain = dosing.comparison(book, FIRST, LAST)
    states.DayState.objects.all().delete()
    with CaptureQueriesContext(connection) as anew:
        dosing.comparison(book, FIRST, LAST)
    states.DayState.objects.all().delete()
    tasks.ask(now=NOW)
    work()
    with CaptureQueriesContext(connection) as kept:
        again = dosing.comparison(book, FIRST, LAST)
    assert again == plain
    assert len(kept) < len(anew)


def test_is_asked_for_once_a_day_and_once_for_each_way_of_reckoning(monkeypatch):
    run()
    for _ in range(3):
        tasks.ask(now=NOW)
    assert waiting() == 1
    work()
    tasks.ask(now=NOW + dt.timedelta(hours=2))
    assert waiting() == 0
    monkeypatch.setattr(states, "CODE_VERSION", states.CODE_VERSION + 1)
    tasks.ask(now=NOW + dt.timedelta(hours=2))
    assert waiting() == 1
    tasks.ask(now=NOW + dt.timedelta(days=1))
    assert waiting() == 2


def test_a_works_of_which_nothing_is_stated_stops_no_other():
    run()
    Book.objects.create(code="BLANK", opened_at=NOW, head_seq=1)
    tasks.ask(now=NOW)
    assert waiting() == 1
