"""Many from one cause are one thing with its parts."""

from __future__ import annotations

import dataclasses
import datetime as dt
from zoneinfo import ZoneInfo

import pytest

from plant import clock
from plant.board import things
from plant.deviations import actions, queries
from plant.deviations.queries import DeviationView
from plant.deviations.together import chains, together
from plant.works import queries as works
from tests.deviations import world

NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
HANGS_ON = {"A-P": ("A-P", "FT"), "A-TANK": ("A-P", "FT"), "B-P": ("B-P", "FT"), "C-P": ("C-P", "FT-RAW"), "FT": ("A-P", "FT")}
BASE = DeviationView(
    pk=1, ref="9.1", code="default-drift-A-P", kind="drift", level="alert", subject_kind="dosing_point", subject="A-P",
    parameter="", raised_for=dt.date(2026, 3, 10), since=NOW, raised_at=NOW, value="", limit="", sentence="",
    likely_causes=("meter_error", "feeder_drift"), causes=(), state="raised", events=(), tellings_owed=(),
    awaiting_approval=False, days=(),
)  # fmt: skip


def view(**changes) -> DeviationView:
    return dataclasses.replace(BASE, **changes)


def subjects(*views: DeviationView) -> list[list[str]]:
    return [[item.subject for item in group] for group in together(views, HANGS_ON)]


def test_the_doses_of_a_wrong_meter_are_one() -> None:
    assert subjects(view(), view(subject="B-P"), view(subject="C-P")) == [["A-P", "B-P"], ["C-P"]]


def test_a_hanging_gauge_is_one_with_the_dose_reckoned_from_it() -> None:
    stuck = view(subject="A-TANK", kind="stuck", likely_causes=("stuck_sensor",))
    dose = view(kind="dose_vs_design", likely_causes=("stuck_sensor", "leak"))
    assert subjects(stuck, dose, view(subject="B-P", likely_causes=("stuck_sensor",))) == [["A-TANK", "A-P"], ["B-P"]]


@pytest.mark.parametrize(
    "other",
    [
        {"likely_causes": ("leak", "meter_error")},
        {"since": NOW - dt.timedelta(days=4, seconds=1)},
        {"kind": "missing"},
        {"subject": "ENTRY"},
    ],
    ids=["another cause first", "long before", "no dose", "hangs on nothing"],
)
def test_what_stands_alone(other) -> None:
    assert len(together([view(), view(subject="B-P") if not other else view(**({"subject": "B-P"} | other))], HANGS_ON)) == 2


def test_what_nobody_can_explain_is_not_taken_together() -> None:
    unknown = ("unknown",)
    assert len(together([view(likely_causes=unknown), view(subject="B-P", likely_causes=unknown)], HANGS_ON)) == 2


def test_the_board_shows_it_as_one_with_its_parts_and_the_worst_level() -> None:
    views = [view(ref="9.1"), view(ref="9.2", subject="B-P", level="action"), view(ref="9.3", subject="C-P")]
    calendar = clock.Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))
    found = things.listed(views, code="TST", now=NOW, calendar=calendar, names={}, labels={}, hangs_on=HANGS_ON)
    assert [(thing.level, thing.title, len(thing.parts)) for thing in found] == [
        ("action", "2 signs of one cause", 2),
        ("alert", "C-P: dose drifting", 0),
    ]
    assert found[0].cause == "the flow meter is wrong"


@pytest.mark.django_db
def test_a_meter_that_counts_too_little_is_one_thing() -> None:
    codes = ("AAA", "BBB", "CCC")
    book = world.open_works(codes=codes)
    begins = dt.date(2026, 3, 14)
    world.history(book, dt.date(2026, 2, 2), 50, codes=codes, metered=lambda on: 0.85 if on >= begins else 1.0, noise=0.02)
    now = world.local("2026-03-24T12:00")
    actions.judge(book=book, days=clock.days(dt.date(2026, 3, 10), dt.date(2026, 3, 20)), now=now)
    views = [item for item in queries.open_ones(book) if item.kind in ("drift", "dose_vs_design")]
    assert {item.subject for item in views} == {"AAA-P", "BBB-P", "CCC-P"}
    groups = together(views, chains(works.stated(book), now))
    assert [sorted({item.subject for item in group}) for group in groups] == [["AAA-P", "BBB-P", "CCC-P"]]
