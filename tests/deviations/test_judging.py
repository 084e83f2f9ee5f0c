"""Days judged on real rows: each kind of limit, what is left alone, and that twice changes nothing."""

from __future__ import annotations

import datetime as dt

import pytest

from plant import clock
from plant.deviations import actions, queries
from plant.ledger.models import Book, Entry
from plant.works import actions as works
from tests import people
from tests.deviations import world
from tests.deviations.world import FIRST, LOW, judged, kinds, on_entry

pytestmark = pytest.mark.django_db


class TestBound:
    def test_one_episode_for_many_readings_with_the_worst_value(self) -> None:
        book = world.open_works(LOW)
        world.chlorine(book, [("2026-02-02T08:00", "0.25"), ("2026-02-02T12:00", "0.12"), ("2026-02-02T18:00", "0.40")])
        (view,) = judged(book, FIRST)
        assert (view.kind, view.level, view.subject, view.parameter) == ("bound", "action", "ENTRY", "free_chlorine")
        assert view.value == "0.12 mg/L"
        assert view.limit == "≥ 0.30 mg/L"
        assert view.since == world.local("2026-02-02T08:00")

    def test_days_on_end_are_one_episode_and_a_day_between_ends_it(self) -> None:
        book = world.open_works(LOW)
        world.chlorine(book, [(f"2026-02-0{day}T08:00", "0.1") for day in (2, 3, 6)] + [("2026-02-04T08:00", "0.5")])
        views = judged(book, FIRST, FIRST + dt.timedelta(days=5))
        assert [(view.raised_for.day, len(view.days)) for view in views] == [(2, 2), (6, 1)]

    def test_equal_to_the_limit_is_inside(self) -> None:
        book = world.open_works(LOW)
        world.chlorine(book, [("2026-02-02T08:00", "0.30")])
        assert judged(book, FIRST) == []

    def test_each_reading_is_held_against_the_limit_in_force_then(self) -> None:
        book = world.open_works(LOW)
        works.state(
            book=book, kind="limit", subject="chlorine-low", effective_from=world.local("2026-02-02T12:00"),
            value={"sample_point": "ENTRY", "parameter": "free_chlorine", "kind": "bound", "level": "action", "low": 0.6},
            reason="raised", by=people.person("sam"), now=world.OPENED,
        )  # fmt: skip
        world.chlorine(book, [("2026-02-02T08:00", "0.40"), ("2026-02-02T14:00", "0.50")])
        (view,) = judged(book, FIRST)
        assert view.since == world.local("2026-02-02T14:00")

    def test_rounded_first_where_the_works_states_so(self) -> None:
        high = on_entry("bound", high=4.0, decimals=1)
        for extra, found in (("", ["bound"]), ("round_to_limit = true", [])):
            book = world.open_works(high, works_extra=extra)
            world.chlorine(book, [("2026-02-02T08:00", "4.04")])
            assert kinds(judged(book, FIRST)) == found
            Book.objects.filter(pk=book.pk).update(code=f"OLD{book.pk}")

    def test_a_limit_in_another_unit_is_converted(self) -> None:
        book = world.open_works(on_entry("bound", low=300, unit="µg/L"))
        world.chlorine(book, [("2026-02-02T08:00", "0.29")])
        assert kinds(judged(book, FIRST)) == ["bound"]

    def test_a_doubtful_reading_is_judged_and_raised_as_doubtful_too(self) -> None:
        book = world.open_works(LOW)
        at = world.local("2026-02-02T08:00")
        world.enter(book, world.reading("ENTRY", "free_chlorine", at, "0.07", "mg/L", marks=["impossible"]), now=at)
        views = judged(book, FIRST)
        assert sorted(kinds(views)) == ["bound", "suspicious_reading"]
        doubtful = next(view for view in views if view.kind == "suspicious_reading")
        assert doubtful.likely_causes[0] == "wrong_reading"

    def test_nothing_is_judged_while_the_works_is_off(self) -> None:
        book = world.open_works(LOW)
        works.state(
            book=book, kind="state", subject="works:DEV", effective_from=world.local("2026-02-01T07:00"), value={"is": "off"},
            reason="stop", by=people.person("sam"), now=world.OPENED,
        )  # fmt: skip
        world.chlorine(book, [("2026-02-02T08:00", "0.1")])
        assert judged(book, FIRST) == []


class TestTime:
    def test_exactly_four_hours_passes_and_longer_does_not(self) -> None:
        # 40 CFR 141.72(b)(2).
        held = on_entry("held_below", limit=0.2, hours=4)
        book = world.open_works(held)
        world.chlorine(book, [("2026-02-02T08:00", "0.1"), ("2026-02-02T12:00", "0.2"), ("2026-02-03T08:00", "0.1")])
        assert judged(book, FIRST) == []
        world.chlorine(book, [("2026-02-03T12:01", "0.3")])
        (view,) = judged(book, FIRST, FIRST + dt.timedelta(days=1))
        assert (view.raised_for.day, view.value) == (3, "4.02 h")

    def test_the_night_of_the_clock_change(self) -> None:
        # 00:30 CET to 05:30 CEST on 29 March 2026: the wall clock says 5 h, 4 have passed.
        held = on_entry("held_below", limit=0.2, hours=4)
        book = world.open_works(held)
        world.chlorine(book, [("2026-03-29T00:30", "0.1"), ("2026-03-29T05:30", "0.3")])
        assert judged(book, dt.date(2026, 3, 28)) == []
        # 00:30 CEST to 03:30 CET on 25 October 2026: the wall clock says 3 h, 4 have passed; a minute more is too long.
        world.chlorine(book, [("2026-10-25T00:30", "0.1"), ("2026-10-25T03:31", "0.3")])
        (view,) = judged(book, dt.date(2026, 10, 24))
        assert view.value == "4.02 h"

    def test_a_dip_over_the_day_boundary_is_one_episode(self) -> None:
        book = world.open_works(on_entry("held_below", limit=0.2, hours=4))
        world.chlorine(book, [("2026-02-02T23:00", "0.1"), ("2026-02-03T09:00", "0.3")])
        (view,) = judged(book, FIRST, FIRST + dt.timedelta(days=1))
        assert [day.day for day in view.days] == [2, 3]
        assert view.value == "10.00 h"

    def test_rate_of_change_and_stuck(self) -> None:
        book = world.open_works(on_entry("rate_of_change", per_hour=0.1) + on_entry("stuck", readings=3).replace("own-", "my-"))
        world.chlorine(book, [("2026-02-02T08:00", "0.5"), ("2026-02-02T09:00", "0.7")])
        assert kinds(judged(book, FIRST)) == ["rate_of_change"]
        world.chlorine(book, [(f"2026-02-04T{hour:02}:00", "0.61") for hour in (8, 9, 10)])
        (view,) = judged(book, FIRST + dt.timedelta(days=2))
        assert (view.kind, view.value, view.likely_causes[0]) == ("stuck", "3 × 0.61", "stuck_sensor")

    def test_share_of_the_month_by_count(self) -> None:
        # 40 CFR 141.551: 171 of 180 passes, 170 does not.
        share = on_entry("share_of_month", "turbidity", limit=0.3, at_least_pct=95)
        for over, found in ((9, []), (10, ["share_of_month"])):
            book = world.open_works(share)
            start = world.local("2026-04-01T08:00")
            rows = [
                world.reading("ENTRY", "turbidity", start + dt.timedelta(hours=4 * n), "0.31" if n < over else "0.30", "NTU")
                for n in range(179)
            ]
            rows.append(world.reading("ENTRY", "turbidity", start + dt.timedelta(hours=1), "0.1", "NTU"))
            world.enter(book, *rows, now=world.local("2026-05-02T08:00"))
            views = judged(book, dt.date(2026, 4, 29), dt.date(2026, 4, 30))
            assert kinds(views) == found
            assert [view.value for view in views] == ["170 of 180 (94.44 %)"][: len(found)]
            Book.objects.filter(pk=book.pk).update(code=f"OLD{book.pk}")

    def test_running_annual_mean_with_a_missing_quarter(self) -> None:
        # 40 CFR 141.133(c)(1)(i): monthly means, quarterly means, mean of four quarters; the third quarter has no sample.
        book = world.open_works(on_entry("running_mean", months=12, high=4.0))
        rows = [
            world.reading("ENTRY", "free_chlorine", world.local(f"2026-{month:02}-10T09:00"), value, "mg/L")
            for month, value in ((1, "4.0"), (2, "5.0"), (3, "4.5"), (4, "4.4"), (10, "3.4"))
        ]
        world.enter(book, *rows, now=world.local("2027-01-02T08:00"))
        last = dt.date(2026, 12, 31)
        (view,) = judged(book, last)
        assert view.value == "4.1 mg/L"
        assert "mean of 3 of 4 quarters, 1 without a sample" in view.sentence

    def test_a_month_with_no_data_gives_no_share_and_no_mean(self) -> None:
        book = world.open_works(
            on_entry("share_of_month", "turbidity", limit=0.3, at_least_pct=95) + on_entry("running_mean", months=12, high=4.0)
        )
        world.chlorine(book, [("2026-02-02T08:00", "0.5")])
        assert judged(book, dt.date(2026, 6, 1), dt.date(2026, 6, 30)) == []


class TestMissing:
    def test_a_round_line_not_walked_and_one_not_taken_with_a_reason(self) -> None:
        lines = '[[round_line]]\nsite = "ENTRY"\nparameter = "free_chlorine"\ndue = "shift"\n'
        book = world.open_works(lines)
        world.chlorine(book, [("2026-02-02T06:00", "0.5"), ("2026-02-02T08:00", "0.5")])
        now = world.local("2026-02-03T12:00")
        actions.judge(book=book, days=[FIRST], now=now)
        (view,) = queries.open_ones(book)
        assert (view.kind, view.subject) == ("missing", "NAOH-P")
        assert (view.value, view.sentence) == ("1 of 2 missing", "not read: free chlorine at ENTRY (night)")
        why = world.reading("ENTRY", "free_chlorine", world.local("2026-02-02T20:00"), "", note="sample tap frozen")
        world.enter(book, why, now=now)
        actions.judge(book=book, days=[FIRST], now=now)
        assert queries.open_ones(book) == []
        assert queries.between(book, FIRST, FIRST)[0].state == "corrected_away"

    def test_a_round_nobody_walked_is_one_thing(self) -> None:
        sites = [
            ("ENTRY", "pH"),
            ("ENTRY", "free_chlorine"),
            ("ENTRY", "turbidity"),
            ("FT", "totaliser"),
            ("NAOH-TANK", "level"),
        ]
        line = '[[round_line]]\nsite = "{}"\nparameter = "{}"\ndue = "shift"\n'
        book = world.open_works("".join(line.format(*item) for item in sites))
        world.chlorine(book, [("2026-02-01T08:00", "0.5")])
        actions.judge(book=book, days=[FIRST], now=world.local("2026-02-03T12:00"))
        found = [(view.subject, view.value) for view in queries.open_ones(book) if FIRST in view.days]
        assert found == [("NAOH-P", "8 of 8 missing"), ("NAOH-TANK", "2 of 2 missing")]

    def test_not_yet_late_is_not_missing(self) -> None:
        book = world.open_works('[[round_line]]\nsite = "ENTRY"\nparameter = "free_chlorine"\ndue = "shift"\n')
        world.chlorine(book, [("2026-02-02T06:00", "0.5"), ("2026-02-02T08:00", "0.5")])
        actions.judge(book=book, days=[FIRST], now=world.local("2026-02-03T08:59"))
        assert queries.open_ones(book) == []
        actions.judge(book=book, days=[FIRST], now=world.local("2026-02-03T09:00"))
        assert kinds(queries.open_ones(book)) == ["missing"]

    def test_without_round_lines_levels_and_totalisers_once_a_day(self) -> None:
        book = world.open_works()
        world.history(book, FIRST, 2)
        actions.judge(book=book, days=clock.days(FIRST, FIRST + dt.timedelta(days=3)), now=world.local("2026-02-06T12:00"))
        found = [(view.subject, view.parameter, view.raised_for.day, len(view.days)) for view in queries.open_ones(book)]
        # The day of 4 February holds the readings that close the 3rd.
        assert found == [("NAOH-P", "totaliser", 5, 1), ("NAOH-TANK", "level", 5, 1)]

    def test_what_is_off_is_not_expected(self) -> None:
        book = world.open_works()
        world.history(book, FIRST, 1)
        for subject in ("vessel:NAOH-TANK", "dosing_point:NAOH-P", "works:DEV"):
            works.state(
                book=book, kind="state", subject=subject, effective_from=world.local("2026-02-03T07:00"), value={"is": "off"},
                reason="stop", by=people.person("sam"), now=world.local("2026-02-03T07:30"),
            )  # fmt: skip
        actions.judge(book=book, days=[FIRST + dt.timedelta(days=2)], now=world.local("2026-02-06T12:00"))
        assert queries.open_ones(book) == []


class TestOnceOnly:
    def test_review_twice_changes_nothing(self) -> None:
        book = world.open_works(LOW)
        world.history(book, FIRST, 30, factor=lambda code, on: 1.2 if on.day > 20 else 1.0, noise=0.03, gauge_m=0.005)
        world.chlorine(book, [("2026-02-02T08:00", "0.1"), ("2026-02-03T08:00", "0.2")], now=world.local("2026-03-05T12:30"))
        now = world.local("2026-03-06T12:00")
        days = clock.days(FIRST, FIRST + dt.timedelta(days=29))
        assert actions.judge(book=book, days=days, now=now)
        entries = Entry.objects.filter(book=book).count()
        assert actions.judge(book=book, days=days, now=now) == []
        assert actions.judge(book=book, days=days[::-1], now=now + dt.timedelta(hours=5)) == []
        for day in days:
            assert actions.judge(book=book, days=[day], now=now + dt.timedelta(days=9)) == []
        assert Entry.objects.filter(book=book).count() == entries

    def test_a_running_day_is_not_written_anew_every_five_minutes(self) -> None:
        book = world.open_works(on_entry("held_below", limit=0.2, hours=4))
        world.chlorine(book, [("2026-02-02T08:00", "0.1")])
        start = world.local("2026-02-02T12:05")
        for n in range(12):
            actions.judge(book=book, days=[FIRST], now=start + n * dt.timedelta(minutes=5))
        (view,) = queries.open_ones(book)
        assert view.kind == "held_below"
        assert [event.kind for event in view.events] == ["raised"]

    def test_days_that_have_not_begun_are_passed_over(self) -> None:
        book = world.open_works(LOW)
        assert actions.judge(book=book, days=[dt.date(2030, 1, 1)], now=world.local("2026-02-02T12:00")) == []
