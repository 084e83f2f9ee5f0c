"""Operating days, their elapsed hours, and local times that do not exist or happen twice."""

import datetime as dt
from zoneinfo import ZoneInfo

import pytest

from plant import clock

BERLIN = clock.Calendar(ZoneInfo("Europe/Berlin"), dt.time(7))


def utc(text: str) -> dt.datetime:
    return dt.datetime.fromisoformat(text).replace(tzinfo=dt.UTC)


@pytest.mark.parametrize(
    ("moment", "day"),
    [
        ("2026-03-28T05:59", "2026-03-27"),
        ("2026-03-28T06:00", "2026-03-28"),
        ("2026-03-29T04:59", "2026-03-28"),
        ("2026-03-29T05:00", "2026-03-29"),
    ],
)
def test_an_operating_day_bears_the_date_of_its_start(moment, day):
    """07:00 is 06:00 UTC in winter and 05:00 UTC in summer; the night shift belongs to the day before."""
    assert BERLIN.day_of(utc(moment)).isoformat() == day


@pytest.mark.parametrize(("day", "hours"), [("2026-03-28", 23), ("2026-10-24", 25), ("2026-06-01", 24)])
def test_hours_elapse(day, hours):
    assert BERLIN.hours_in(dt.date.fromisoformat(day)) == hours


def test_a_month_runs_from_operating_day_to_operating_day():
    """July: from 07:00 on 1 July to 07:00 on 1 August, not from midnight."""
    first, last = clock.month_days(2026, 7)
    assert BERLIN.span(first, last) == (utc("2026-07-01T05:00"), utc("2026-08-01T05:00"))


def test_february_of_a_leap_year():
    assert clock.month_days(2028, 2)[1] == dt.date(2028, 2, 29)


def test_a_skipped_time_is_refused():
    with pytest.raises(clock.LocalTimeError, match="does not exist"):
        BERLIN.instant(dt.datetime(2026, 3, 29, 2, 30))


def test_a_doubled_time_needs_a_word():
    twice = dt.datetime(2026, 10, 25, 2, 30)
    with pytest.raises(clock.LocalTimeError, match="happened twice"):
        BERLIN.instant(twice)
    assert BERLIN.instant(twice, ambiguous="first") == utc("2026-10-25T00:30")
    assert BERLIN.instant(twice, ambiguous="second") == utc("2026-10-25T01:30")


def test_shifts_cross_midnight():
    shifts = (clock.Shift("day", dt.time(7)), clock.Shift("night", dt.time(19)))
    assert clock.shift_at(utc("2026-06-01T01:00"), BERLIN, shifts).name == "night"
    assert clock.shift_at(utc("2026-06-01T05:00"), BERLIN, shifts).name == "day"
    assert clock.shift_at(utc("2026-06-01T20:00"), BERLIN, shifts).name == "night"
    assert clock.shift_at(utc("2026-06-01T20:00"), BERLIN, ()) is None
