"""From the shell, and by the clock."""

from __future__ import annotations

import csv
import datetime as dt
import io

import pytest
from django.core.management import CommandError, call_command

from plant.deviations import actions, queries, tasks
from plant.jobs.models import Job
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.works import described
from tests.deviations import world
from tests.deviations.world import FIRST, LOW, on_entry

pytestmark = pytest.mark.django_db


def listed(*args: str) -> list[dict[str, str]]:
    out = io.StringIO()
    call_command("deviations", "--works", "DEV", *args, stdout=out)
    return list(csv.DictReader(io.StringIO(out.getvalue())))


def test_review_then_list() -> None:
    book = world.open_works(LOW)
    world.chlorine(book, [("2026-02-02T08:00", "0.12")])
    span = ("--from", "2026-02-01", "--to", "2026-02-02")
    said = io.StringIO()
    call_command("review", "--works", "DEV", *span, "--now", "2026-02-03T08:30", stderr=said)
    assert "2 days of DEV reviewed, 1 deviations raised" in said.getvalue()
    (row,) = listed(*span)
    assert list(row) == [
        "raised_for", "since", "raised_at", "kind", "level", "subject", "parameter", "value", "limit", "likely_causes", "state",
    ]  # fmt: skip
    assert row["raised_for"] == "2026-02-02"
    assert row["since"] == "2026-02-02T07:00:00Z"
    assert row["raised_at"] == "2026-02-03T07:30:00Z"
    assert (row["kind"], row["level"], row["subject"], row["parameter"]) == ("bound", "action", "ENTRY", "free_chlorine")
    assert row["state"] == "raised"
    entries = Entry.objects.count()
    call_command("review", "--works", "DEV", *span, "--now", "2026-02-03T08:30", stderr=io.StringIO())
    assert Entry.objects.count() == entries


def test_as_known_at_a_moment() -> None:
    book = world.open_works(LOW)
    world.chlorine(book, [("2026-02-02T08:00", "0.12")])
    actions.judge(book=book, days=[FIRST], now=world.local("2026-02-03T09:00"))
    span = ("--from", "2026-02-02", "--to", "2026-02-02")
    assert listed(*span, "--known-at", "2026-02-03T08:59") == []
    assert len(listed(*span, "--known-at", "2026-02-03T09:00")) == 1


def test_an_unknown_works_is_said_in_one_sentence() -> None:
    with pytest.raises(CommandError, match="no works with the code 'DEV'"):
        listed("--from", "2026-02-02", "--to", "2026-02-02")


def test_the_book_says_what_was_written() -> None:
    book = world.open_works(LOW)
    world.history(book, FIRST, 6, factor=lambda code, on: 1.4 if on.day == 5 else 1.0)
    world.chlorine(book, [("2026-02-02T08:00", "0.12")], now=world.local("2026-02-09T08:00"))
    actions.judge(book=book, days=[FIRST + dt.timedelta(days=n) for n in range(6)], now=world.local("2026-02-09T12:00"))
    assert len(queries.between(book, FIRST, FIRST + dt.timedelta(days=5))) >= 2
    assert list(verify.everything()) == []


def test_by_the_clock_what_time_alone_makes_true() -> None:
    book = world.open_works(on_entry("held_below", limit=0.2, hours=4))
    world.chlorine(book, [("2026-02-02T08:00", "0.1")])
    tasks.by_the_clock(now=world.local("2026-02-02T11:59"), book="DEV")
    assert queries.open_ones(book) == []
    tasks.by_the_clock(now=world.local("2026-02-02T12:01"), book="DEV")
    assert [view.kind for view in queries.open_ones(book)] == ["held_below"]


def test_regular_work_is_asked_for_once_a_night() -> None:
    world.open_works(LOW)
    tasks.ask_night(now=world.local("2026-02-03T09:00"))
    assert [job.arguments["day"] for job in Job.objects.filter(kind=tasks.NIGHT)] == ["2026-02-01"]
    tasks.ask_night(now=world.local("2026-02-03T10:30"))
    tasks.ask_night(now=world.local("2026-02-03T11:00"))
    assert [job.arguments["day"] for job in Job.objects.filter(kind=tasks.NIGHT)] == ["2026-02-01", "2026-02-02"]
    tasks.ask_clock(now=world.local("2026-02-03T11:00"))
    tasks.ask_clock(now=world.local("2026-02-03T11:05"))
    assert Job.objects.filter(kind=tasks.CLOCK).count() == 1


def test_the_night_looks_at_days_that_late_entries_touched() -> None:
    book = world.open_works(LOW)
    world.chlorine(book, [("2026-01-20T08:00", "0.12")], now=world.local("2026-02-02T15:00"))
    tasks.by_night(now=world.local("2026-02-03T10:00"), book="DEV", day="2026-02-02")
    found = [view for view in queries.open_ones(book) if view.kind == "bound"]
    assert [view.raised_for for view in found] == [dt.date(2026, 1, 20)]


def test_a_draft_limit_is_tried_and_nothing_is_written() -> None:
    book = world.open_works()
    world.chlorine(book, [("2026-02-02T08:00", "0.42"), ("2026-02-03T08:00", "0.41"), ("2026-02-06T08:00", "0.40")])
    draft = described.limit(
        "draft", {"sample_point": "ENTRY", "parameter": "free_chlorine", "kind": "bound", "level": "alert", "low": 0.45}
    )
    entries = Entry.objects.count()
    now = world.local("2026-02-09T08:00")
    found = actions.try_limit(book=book, limit=draft, first=FIRST, last=FIRST + dt.timedelta(days=6), now=now)
    assert [(item.day.day, item.value) for item in found] == [(2, "0.42 mg/L"), (6, "0.4 mg/L")]
    assert Entry.objects.count() == entries
    with pytest.raises(actions.NotPossible, match="13 months"):
        actions.try_limit(book=book, limit=draft, first=FIRST, last=FIRST + dt.timedelta(days=400), now=now)


def test_a_draft_limit_is_tried_over_thirteen_months_and_no_more() -> None:
    book = world.open_works()
    now = world.local("2026-02-03T12:00")
    world.chlorine(book, [("2025-01-04T08:00", "0.12"), ("2026-02-02T08:00", "0.10")], now=now)
    draft = described.limit(
        "draft", {"sample_point": "ENTRY", "parameter": "free_chlorine", "kind": "bound", "level": "alert", "low": 0.3}
    )
    last = dt.date(2026, 2, 2)
    found = actions.try_limit(book=book, limit=draft, first=last - dt.timedelta(days=395), last=last, now=now)
    assert [item.day.isoformat() for item in found] == ["2025-01-04", "2026-02-02"]
    with pytest.raises(actions.NotPossible, match="13 months"):
        actions.try_limit(book=book, limit=draft, first=last - dt.timedelta(days=396), last=last, now=now)
