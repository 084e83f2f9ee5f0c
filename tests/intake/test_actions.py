"""The one door: safe first, judged after, and no rule can refuse a fact."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest
from django.core.exceptions import ValidationError

from plant.deviations import actions as deviations
from plant.deviations.models import Deviation
from plant.intake import actions, judging, records
from plant.jobs import running
from plant.jobs.models import Job
from plant.ledger import actions as ledger
from plant.readings.models import Reading
from plant.works import queries as works
from tests import people

NOW = dt.datetime(2026, 3, 10, 12, 0, tzinfo=dt.UTC)


@pytest.fixture
def book(db):
    return people.small_works()


def reading(hour=8, value="0.55"):
    return Reading(
        site="ENTRY",
        parameter="free_chlorine",
        taken_at=dt.datetime(2026, 3, 10, hour, tzinfo=dt.UTC),
        typed=value,
        typed_unit="mg/L",
        value=float(value),
        value_text=value,
        unit="mg/L",
        marks=[],
    )


def take(book, *rows, client_id=None, received="x", **more):
    return actions.take(
        book=book,
        client_id=client_id or uuid.uuid4().hex,
        kind="api",
        received=received,
        rows=list(rows),
        by=people.person("olga"),
        now=NOW,
        **more,
    )


def test_a_fact_is_safe_and_its_day_judged(book):
    taken = take(book, reading(value="0.05"))
    assert taken.judged
    assert any(found.subject == "ENTRY" for found in taken.findings)
    assert Deviation.objects.filter(subject="ENTRY", parameter="free_chlorine").exists()
    assert Job.objects.get(kind=judging.JOB).state == Job.State.DONE


def test_the_same_again_adds_nothing_and_judges_nothing(book, monkeypatch):
    first = take(book, reading(), client_id="a")
    monkeypatch.setattr(deviations, "judge", lambda **asked: pytest.fail("judged again"))
    again = take(book, reading(), client_id="a")
    assert (again.created, again.entry.pk) == (False, first.entry.pk)
    assert Reading.objects.count() == 1


def test_other_content_under_the_same_id_is_refused(book):
    take(book, reading(), client_id="a")
    with pytest.raises(ledger.ContentDiffers):
        take(book, reading(), client_id="a", received="y")


def test_a_rule_that_breaks_refuses_nothing_and_leaves_the_note_for_the_worker(book, monkeypatch):
    judge = deviations.judge

    def broken(**asked):
        raise ZeroDivisionError

    monkeypatch.setattr(deviations, "judge", broken)
    taken = take(book, reading(value="0.05"))
    assert (taken.created, taken.judged, taken.findings) == (True, False, ())
    assert Reading.objects.count() == 1
    assert Job.objects.get(kind=judging.JOB).state == Job.State.QUEUED
    monkeypatch.setattr(deviations, "judge", judge)
    running.run_due(owner="test", now=NOW + dt.timedelta(minutes=2))
    assert Job.objects.get(kind=judging.JOB).state == Job.State.DONE
    assert Deviation.objects.filter(subject="ENTRY").exists()


def test_an_entry_that_fails_leaves_neither_rows_nor_note(book):
    with pytest.raises(ValidationError):
        take(book, reading(), Reading(site="ENTRY", parameter="pH", taken_at="not a time"))
    assert Reading.objects.count() == 0
    assert not Job.objects.filter(kind=judging.JOB).exists()


def test_a_late_entry_touches_its_own_day_and_both_neighbours(book):
    calendar = works.stated(book).calendar(NOW)
    late = reading()
    late.taken_at = dt.datetime(2026, 3, 1, 8, tzinfo=dt.UTC)
    assert judging.touched([late], calendar, NOW) == [dt.date(2026, 2, 28), dt.date(2026, 3, 1), dt.date(2026, 3, 2)]


def test_today_has_no_tomorrow_to_touch(book):
    calendar = works.stated(book).calendar(NOW)
    assert judging.touched([reading()], calendar, NOW) == [dt.date(2026, 3, 9), dt.date(2026, 3, 10)]


def test_a_file_of_many_days_is_noted_a_month_at_a_time_and_judged_at_the_end(book, sheet):
    start = dt.date(2026, 1, 1)
    path = sheet(
        *[f"ENTRY,{start + dt.timedelta(days=day)}T08:00,pH,8.{day % 10}," for day in range(65)],
        header="site,timestamp,parameter,value,unit",
    )
    wanted = records.Wanted()
    records.bring_in(book=book, sheet=records.open_file(path), wanted=wanted, by=None, now=NOW, judge=False)
    assert Job.objects.filter(kind=judging.JOB, state=Job.State.QUEUED).count() == 3
    other = sheet("ENTRY,2026-02-01T20:00,pH,8.1,", header="site,timestamp,parameter,value,unit")
    counted = records.bring_in(book=book, sheet=records.open_file(other), wanted=wanted, by=None, now=NOW)
    assert counted.judged
    assert Job.objects.filter(kind=judging.JOB, state=Job.State.QUEUED).count() == 3
