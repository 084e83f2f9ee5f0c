"""The list of what needs someone, and its sentence."""

from __future__ import annotations

import dataclasses
import datetime as dt
from zoneinfo import ZoneInfo

import pytest

from plant import clock
from plant.board import things
from plant.deviations import findings
from plant.deviations.queries import DeviationView, EventView, Owed
from plant.works import kinds

CALENDAR = clock.Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))
NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
NAMES = {"ENTRY": "Works outlet", "RAW": "Raw water", "HYPO-POST": "Hypochlorite after filtration"}
LABELS = {"free_chlorine": "Free chlorine", "temperature": "Temperature"}

BASE = DeviationView(
    pk=1, ref="9.1", code="entry-free-chlorine-low", kind="bound", level="action", subject_kind="sample_point", subject="ENTRY",
    parameter="free_chlorine", raised_for=dt.date(2026, 3, 10), since=NOW - dt.timedelta(hours=3), raised_at=NOW,
    value="0.21 mg/L", limit="≥ 0.30 mg/L", sentence="", likely_causes=("weak_product",), causes=(), state="raised", events=(),
    tellings_owed=(), awaiting_approval=False, days=(),
)  # fmt: skip


def view(**changes) -> DeviationView:
    return dataclasses.replace(BASE, **changes)


def listed(*views: DeviationView) -> list[things.Thing]:
    return things.listed(views, code="TST", now=NOW, calendar=CALENDAR, names=NAMES, labels=LABELS)


def test_a_thing_says_what_where_since_when_and_why():
    (thing,) = listed(view())
    assert thing.title == "Free chlorine, Works outlet: outside its limit"
    assert thing.found == "0.21 mg/L, limit ≥ 0.30 mg/L"
    assert thing.since == "07:00"
    assert thing.cause == "the product is weak"
    assert thing.who == "nobody yet"
    assert thing.path == "/w/TST/deviations/9.1/"


def test_a_drift_speaks_for_itself_without_its_statistics():
    words = "used is 10.9 % below what it was against design; statistic 8.6, threshold 3.50"
    found = listed(view(kind="drift", value="-10.9 %", limit="no lasting change", sentence=words))
    assert found[0].found == "used is 10.9 % below what it was against design"


def test_worst_comes_first_and_the_older_of_two_alike():
    found = listed(
        view(ref="1.1", level="alert"),
        view(ref="2.1", level="action", since=NOW - dt.timedelta(hours=1)),
        view(ref="3.1", level="regulatory"),
        view(ref="4.1", level="action", since=NOW - dt.timedelta(hours=9)),
    )
    assert [thing.path[-4:-1] for thing in found] == ["3.1", "4.1", "2.1", "1.1"]


def test_many_missing_values_are_one_thing_with_its_parts():
    missing = [
        view(
            ref=f"{n}.1",
            kind="missing",
            level="alert",
            subject="RAW",
            parameter="temperature",
            since=NOW - dt.timedelta(hours=n),
        )
        for n in (2, 5, 3)
    ]
    (thing,) = listed(*missing)
    assert thing.title == "3 values are missing"
    assert thing.since == "05:00"
    assert thing.parts == ("Temperature, Raw water",) * 3


def test_missing_values_of_two_levels_stay_apart():
    found = listed(
        *(view(ref=f"{n}.1", kind="missing", level=level) for n, level in enumerate(["alert", "action", "alert", "action"]))
    )
    assert [(thing.level, thing.title) for thing in found] == [
        ("action", "2 values are missing"), ("alert", "2 values are missing"),
    ]  # fmt: skip


def test_one_missing_value_stands_alone():
    (thing,) = listed(view(kind="missing", level="alert", subject="RAW", parameter="temperature"))
    assert thing.title == "Temperature, Raw water: missing"


def event(kind: str, by: str) -> EventView:
    return EventView("9.2", kind, NOW, NOW, by, by.lower(), None, {})


@pytest.mark.parametrize(
    ("state", "events", "who"),
    [
        ("raised", (event("comment", "Ira Ives"),), "nobody yet"),
        ("acknowledged", (event("acknowledged", "Sam Sundby"), event("comment", "Ira Ives")), "Sam Sundby"),
        ("acting", (event("action", "Olga Ottesen"),), "Olga Ottesen"),
    ],
)
def test_who_has_it_is_who_took_it_on(state, events, who):
    assert listed(view(state=state, events=events))[0].who == who


def test_the_telling_due_first_is_named():
    owed = (
        Owed("Health office", NOW + dt.timedelta(hours=20)),
        Owed("Regulator", NOW + dt.timedelta(hours=2), "555 0100"),
    )
    assert listed(view(tellings_owed=owed))[0].telling == "Tell Regulator by 12:00, telephone 555 0100."


def test_an_overdue_telling_says_so():
    owed = (Owed("Regulator", NOW - dt.timedelta(hours=2)),)
    assert listed(view(tellings_owed=owed))[0].telling == "Tell Regulator by 08:00 (overdue)."


def test_an_unknown_cause_is_not_called_likely():
    assert listed(view(likely_causes=("unknown",)))[0].cause == ""


@pytest.mark.parametrize(
    ("number", "settled", "words"),
    [
        (0, "06:10", "Nothing needs anyone since 06:10."),
        (0, "", "Nothing needs anyone."),
        (1, "", "1 thing needs someone."),
        (3, "06:10", "3 things need someone."),
    ],
)
def test_the_sentence(number, settled, words):
    found = listed(*(view(ref=f"{n}.1") for n in range(number)))
    assert things.sentence(found, settled) == words


def test_every_kind_of_limit_and_every_cause_has_words():
    assert {*kinds.LIMIT_KINDS, "suspicious_reading"} == set(things.KINDS)
    assert set(findings.CAUSES) == set(things.CAUSES)
