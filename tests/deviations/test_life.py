"""The life of a deviation: who may do what, in which order, and what late entries and corrections do to it."""

from __future__ import annotations

import datetime as dt
import threading

import pytest
from django.db import connection

from plant.deviations import actions, queries
from plant.deviations.models import Deviation, DeviationEvent
from plant.deviations.queries import DeviationView
from plant.ledger.models import Book, Entry
from plant.readings.models import Reading, Settlement
from tests import people
from tests.deviations import world
from tests.deviations.world import FIRST, LOW, on_entry

pytestmark = pytest.mark.django_db
TELL = """
[[limit]]
code = "chlorine-legal"
sample_point = "ENTRY"
parameter = "free_chlorine"
kind = "bound"
level = "regulatory"
low = 0.20
tell = [{ who = "Drinking water desk", within_hours = 24 }]
"""
EVENING = world.local("2026-02-02T20:00")
MORNING = world.local("2026-02-03T09:00")


def raised(limits: str = LOW) -> tuple[Book, DeviationView, list[Reading]]:
    """A works with one low chlorine of 2 February, judged that evening."""
    book = world.open_works(limits)
    rows = world.chlorine(book, [("2026-02-02T10:00", "0.12")])
    actions.judge(book=book, days=[FIRST], now=EVENING)
    (view,) = queries.open_ones(book)
    return book, view, rows


def corrected(book: Book, reading: Reading, value: str, *, by: str, now: dt.datetime) -> Reading:
    """A correction of a reading by somebody, and the days judged again."""
    row = world.reading("ENTRY", "free_chlorine", reading.taken_at, value, "mg/L", supersedes=reading, reason="typed wrong")
    world.enter(book, row, now=now, by=people.person(by))
    actions.judge(book=book, days=[FIRST], now=now)
    return row


def step(name: str, book: Book, view: DeviationView, by: str, now: dt.datetime = MORNING, **rest: object) -> DeviationView:
    return getattr(actions, name)(book=book, ref=view.ref, by=people.person(by), now=now, **rest)


class TestLife:
    def test_from_raised_to_closed(self) -> None:
        book, view, _ = raised(TELL)
        assert view.state == "raised"
        assert [owed.who for owed in view.tellings_owed] == ["Drinking water desk"]
        assert view.tellings_owed[0].due == EVENING + dt.timedelta(hours=24)
        view = step("acknowledge", book, view, "olga")
        assert (view.state, view.acknowledged_by) == ("acknowledged", "Olga Ottesen")
        view = step("act", book, view, "olga", cause="feeder_drift", action="feeder flushed and set again")
        assert view.state == "acting"
        world.chlorine(book, [("2026-02-03T08:30", "0.45")])
        view = step("verify", book, view, "olga")
        assert view.state == "verified"
        assert "0.45" in view.events[-1].fields["words"]
        with pytest.raises(actions.NotPossible, match="still be told: Drinking water desk"):
            step("close", book, view, "sam")
        view = step("tell", book, view, "sam", who="Drinking water desk", how="telephone", reference="case 11")
        assert view.tellings_owed == ()
        view = step("close", book, view, "sam")
        assert view.state == "closed"
        assert [event.kind for event in view.events] == [
            "raised", "acknowledged", "cause", "action", "verified", "told", "closed",
        ]  # fmt: skip
        assert queries.open_ones(book) == []

    def test_who_may_do_what(self) -> None:
        book, view, _ = raised()
        for name in ("ira", "adam", "stan"):
            with pytest.raises(actions.NotAllowed):
                step("acknowledge", book, view, name)
        with pytest.raises(actions.NotAllowed, match=r"deviation\.close"):
            step("close", book, view, "olga")
        assert step("comment", book, view, "olga", words="line was shut").events[-1].kind == "comment"

    def test_verifying_needs_a_reading_back_inside(self) -> None:
        book, view, _ = raised()
        with pytest.raises(actions.NotPossible, match="no reading has been taken"):
            step("verify", book, view, "olga")
        world.chlorine(book, [("2026-02-03T08:00", "0.29")])
        with pytest.raises(actions.NotPossible, match=r"0\.29 mg/L at 2026-02-03 08:00, is not inside yet"):
            step("verify", book, view, "olga")
        with pytest.raises(actions.NotPossible, match="not verified yet"):
            step("close", book, view, "sam")

    def test_outside_again_after_verifying_undoes_it(self) -> None:
        book, view, _ = raised()
        world.chlorine(book, [("2026-02-03T08:00", "0.40")])
        view = step("verify", book, view, "olga")
        world.chlorine(book, [("2026-02-03T10:00", "0.10")])
        actions.judge(book=book, days=[FIRST + dt.timedelta(days=1)], now=world.local("2026-02-03T10:30"))
        found = queries.one(book, view.ref)
        assert found is not None
        assert found.state == "acting"

    def test_steps_that_make_no_sense_are_refused_in_words(self) -> None:
        book, view, _ = raised()
        with pytest.raises(actions.NotPossible, match="say who"):
            step("tell", book, view, "sam", who=" ", how="telephone")
        with pytest.raises(actions.NotPossible, match="say how"):
            step("tell", book, view, "sam", who="Desk", how="pigeon")
        with pytest.raises(actions.NotPossible, match="in the past"):
            step("tell", book, view, "sam", who="Desk", how="telephone", at=MORNING + dt.timedelta(hours=1))
        with pytest.raises(actions.NotPossible, match="what the cause was or what was done"):
            step("act", book, view, "sam")
        with pytest.raises(actions.NotPossible, match="cause is one of"):
            step("act", book, view, "sam", cause="gremlins")
        with pytest.raises(actions.NotPossible, match="empty comment"):
            step("comment", book, view, "sam", words="  ")
        with pytest.raises(actions.NotPossible, match=r"no deviation 9\.9"):
            actions.acknowledge(book=book, ref="9.9", by=people.person("sam"), now=MORNING)
        step("acknowledge", book, view, "sam")
        with pytest.raises(actions.NotPossible, match="acknowledged already"):
            step("acknowledge", book, view, "olga")

    def test_the_same_step_sent_twice_is_one_step(self) -> None:
        book, view, _ = raised()
        for _ in range(2):
            step("tell", book, view, "sam", who="Desk", how="telephone", client_id="a1")
        found = queries.one(book, view.ref)
        assert found is not None
        assert [event.kind for event in found.events] == ["raised", "told"]


class TestLateAndCorrected:
    def test_a_late_reading_joins_the_episode_of_its_day(self) -> None:
        book, view, _ = raised()
        world.chlorine(book, [("2026-02-02T06:50", "0.2"), ("2026-02-02T14:00", "0.08")], now=MORNING)
        actions.judge(book=book, days=[FIRST - dt.timedelta(days=1), FIRST], now=MORNING)
        (found,) = [item for item in queries.open_ones(book) if item.kind != "missing"]
        assert found.ref == view.ref
        assert [day.day for day in found.days] == [1, 2]
        assert found.value == "0.08 mg/L"
        assert Deviation.objects.filter(kind="bound").count() == 1

    def test_what_was_known_before_the_late_reading_can_still_be_asked(self) -> None:
        book, _, _ = raised()
        book.refresh_from_db()
        seq = book.head_seq
        world.chlorine(book, [("2026-02-02T14:00", "0.08")], now=MORNING)
        actions.judge(book=book, days=[FIRST], now=MORNING)
        assert [item.value for item in queries.open_ones(book, seq)] == ["0.12 mg/L"]
        assert queries.open_ones(book, 1) == []

    def test_a_correction_of_an_action_level_counts_only_after_somebody_else_approved(self) -> None:
        book, _, (row,) = raised()
        corrected(book, row, "0.42", by="sam", now=MORNING)
        (found,) = queries.open_ones(book)
        assert found.awaiting_approval
        assert (found.state, found.value, found.corrected_by) == ("raised", "0.12 mg/L", ("sam",))
        assert queries.awaiting_approval(book) == [found]
        with pytest.raises(actions.NotPossible, match="somebody else"):
            step("approve", book, found, "sam")
        with pytest.raises(actions.NotAllowed):
            step("approve", book, found, "olga")
        found = step("approve", book, found, "mira")
        assert found.state == "corrected_away"
        assert queries.open_ones(book) == []
        entries = Entry.objects.count()
        actions.judge(book=book, days=[FIRST], now=MORNING)
        assert Entry.objects.count() == entries

    def test_a_correction_of_an_alert_clears_at_once(self) -> None:
        book, _, (row,) = raised(on_entry("bound", low=0.3))
        corrected(book, row, "0.42", by="olga", now=MORNING)
        (found,) = queries.between(book, FIRST, FIRST)
        assert found.state == "corrected_away"

    def test_a_correction_that_stays_outside_changes_the_value(self) -> None:
        book, view, (row,) = raised()
        corrected(book, row, "0.21", by="olga", now=MORNING)
        (found,) = queries.open_ones(book)
        assert (found.ref, found.value, found.awaiting_approval) == (view.ref, "0.21 mg/L", False)

    def test_corrected_back_again_before_approval(self) -> None:
        book, _, (row,) = raised()
        second = corrected(book, row, "0.42", by="sam", now=MORNING)
        corrected(book, second, "0.12", by="sam", now=MORNING + dt.timedelta(minutes=5))
        (found,) = queries.open_ones(book)
        assert not found.awaiting_approval
        with pytest.raises(actions.NotPossible, match="no correction awaits"):
            step("approve", book, found, "mira")

    def test_a_correction_after_closing_is_written_down_and_does_not_open_it(self) -> None:
        book, view, (row,) = raised()
        world.chlorine(book, [("2026-02-03T08:00", "0.40")])
        step("verify", book, view, "olga")
        step("close", book, view, "sam")
        corrected(book, row, "0.05", by="olga", now=MORNING + dt.timedelta(hours=1))
        (found,) = queries.between(book, FIRST, FIRST)
        assert (found.state, found.value) == ("closed", "0.05 mg/L")
        assert found.events[-1].fields["after_closing"] is True

    def test_outside_on_the_day_after_closing_is_a_new_episode(self) -> None:
        book, view, _ = raised()
        world.chlorine(book, [("2026-02-02T22:00", "0.40")], now=EVENING + dt.timedelta(hours=2))
        late = EVENING + dt.timedelta(hours=3)
        step("verify", book, view, "olga", late)
        step("close", book, view, "sam", late)
        world.chlorine(book, [("2026-02-03T08:00", "0.1")])
        actions.judge(book=book, days=[FIRST + dt.timedelta(days=1)], now=MORNING)
        assert [item.state for item in queries.between(book, FIRST, FIRST + dt.timedelta(days=1))] == ["closed", "raised"]

    def test_a_doubtful_reading_set_aside_clears_as_a_correction_does(self) -> None:
        book = world.open_works(LOW)
        at = world.local("2026-02-02T10:00")
        (row,) = world.enter(book, world.reading("ENTRY", "free_chlorine", at, "0.12", "mg/L", marks=["conflict"]), now=at)
        actions.judge(book=book, days=[FIRST], now=EVENING)
        assert {view.kind for view in queries.open_ones(book)} == {"bound", "suspicious_reading"}
        settled = Settlement(reading=row, decision="set_aside", reason="vial broken")
        world.enter(book, settled, now=MORNING, by=people.person("sam"))
        actions.judge(book=book, days=[FIRST], now=MORNING)
        (found,) = queries.open_ones(book)
        assert (found.kind, found.awaiting_approval, found.corrected_by) == ("bound", True, ("sam",))


class TestMoments:
    def test_what_was_so_at_noon_stays_said_when_the_evening_brings_a_delivery(self) -> None:
        from tests.deviations.test_judging_doses import TestStock
        from tests.deviations.world import limit

        book = world.open_works(limit("days_of_supply", vessel="NAOH-TANK", low=14))
        world.history(book, FIRST, 8)
        day = FIRST + dt.timedelta(days=8)
        noon = world.local("2026-02-10T12:00")
        actions.judge(book=book, days=[day], now=noon + dt.timedelta(hours=2))
        assert "days_of_supply" in [view.kind for view in queries.open_ones(book)]
        load = TestStock().delivery("2026-02-10T16:00", 5000.0)
        world.enter(book, load, world.reading("NAOH-TANK", "level", world.local("2026-02-10T17:00"), "7.2", "m"),
                    now=world.local("2026-02-10T17:05"))  # fmt: skip
        actions.judge(book=book, days=[day], now=world.local("2026-02-10T18:00"))
        found = [view for view in queries.between(book, day, day) if view.kind == "days_of_supply"]
        assert [view.state for view in found] == ["raised"]


@pytest.mark.django_db(transaction=True)
def test_two_reviewers_at_once_raise_it_once() -> None:
    book = world.open_works(LOW)
    world.history(book, FIRST, 10)
    world.chlorine(book, [("2026-02-03T10:00", "0.12"), ("2026-02-05T10:00", "0.12")], now=world.local("2026-02-12T14:00"))
    now = world.local("2026-02-12T15:00")
    days = [FIRST + dt.timedelta(days=n) for n in range(10)]
    gate, problems, counts = threading.Barrier(2), [], []

    def review() -> None:
        try:
            gate.wait(timeout=10)
            counts.append(len(actions.judge(book=Book.objects.get(pk=book.pk), days=days, now=now)))
        except Exception as problem:  # noqa: BLE001  # whatever it is, the test must say so
            problems.append(problem)
        finally:
            connection.close()

    threads = [threading.Thread(target=review) for _ in range(2)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert problems == []
    assert sorted(counts) == [0, 2]
    assert Deviation.objects.filter(kind="bound").count() == 2
    assert DeviationEvent.objects.filter(kind="raised").count() == 2
