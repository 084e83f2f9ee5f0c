"""The report that is due stands on the board of those who sign it, and of nobody else."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest
from django.test import Client

from plant import clock
from plant.ledger.models import Book
from plant.reports import actions
from tests import people
from tests.reports import plan

pytestmark = pytest.mark.django_db


@pytest.fixture
def book(tmp_path: Path) -> Book:
    found, _ = plan.works(tmp_path, dt.date(2026, 3, 1), dt.date(2026, 3, 31), now=dt.datetime(2026, 4, 1, 6, tzinfo=dt.UTC))
    return found


def board(who: str, day: int, monkeypatch) -> str:
    monkeypatch.setattr(clock, "now", lambda: dt.datetime(2026, 4, day, 10, tzinfo=dt.UTC))
    client = Client()
    client.force_login(people.person(who))
    return client.get("/w/TST/").content.decode()


@pytest.mark.parametrize(
    ("day", "words"),
    [
        (2, "The report of March 2026 is not prepared yet; it is due on 10 April, 8 days from now."),
        (9, "it is due on 10 April, 1 day from now."),
        (10, "it is due today."),
        (11, "it was due on 10 April, 1 day ago."),
        (20, "it was due on 10 April, 10 days ago."),
    ],
)
def test_counts_the_days_to_the_day_stated(book, monkeypatch, day, words):
    assert words in board("sam", day, monkeypatch)
    assert words in board("mira", day, monkeypatch)


def test_is_not_for_those_who_sign_nothing(book, monkeypatch):
    for who in ("olga", "ira", "adam"):
        assert "The report of March" not in board(who, 2, monkeypatch)


def test_ends_with_the_issue(book, monkeypatch):
    actions.issue_from_shell(book=book, year=2026, month=3, now=dt.datetime(2026, 4, 2, 9, tzinfo=dt.UTC))
    assert "The report of March" not in board("sam", 11, monkeypatch)


def test_a_month_without_readings_is_not_asked_for(monkeypatch):
    people.small_works()
    assert "The report of March" not in board("sam", 11, monkeypatch)
