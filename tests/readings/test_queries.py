"""Reads of the readings: what holds, what held, what is usable."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest

from plant.ledger import actions as ledger
from plant.readings import actions, marks, queries
from plant.readings.models import Reading, Settlement
from tests import people

NOW = dt.datetime(2026, 3, 10, 12, 0, tzinfo=dt.UTC)
DAY = dt.timedelta(days=1)


@pytest.fixture
def book(db):
    return people.small_works()


def reading(typed="0.55", hour=8, **more):
    fields = {
        "site": "ENTRY",
        "parameter": "free_chlorine",
        "taken_at": NOW.replace(hour=hour),
        "typed": typed,
        "typed_unit": "mg/L",
        "value": float(typed),
        "value_text": typed,
        "unit": "mg/L",
        "marks": [],
    }
    return Reading(**fields | more)


def append(book, *rows, kind="test"):
    return ledger.append(
        book=book, client_id=uuid.uuid4().hex, kind=kind, received="x", rows=list(rows), by=people.person("olga"), now=NOW
    )


def around(book, **asked):
    return queries.points(book, start=NOW - DAY, end=NOW + DAY, **asked)


class TestPoints:
    def test_come_by_time_and_within_the_half_open_span(self, book):
        append(book, reading("0.3", 10), reading("0.1", 8), reading("0.2", 9))
        found = queries.series(book, "ENTRY", "free_chlorine", start=NOW.replace(hour=8), end=NOW.replace(hour=10))
        assert [point.text for point in found] == ["0.1", "0.2"]

    def test_of_one_works_are_not_another_s(self, book):
        other = people.open_works(people.SMALL.read_text().replace('"TST"', '"OTH"'))
        append(other, reading())
        assert around(book) == []

    def test_grouped_by_series_keep_their_order(self, book):
        append(book, reading("0.1", 8), reading("8.1", 8, parameter="pH", unit=""), reading("0.2", 9))
        grouped = queries.by_series(around(book))
        assert [point.text for point in grouped["ENTRY", "free_chlorine"]] == ["0.1", "0.2"]

    def test_carry_the_exact_decimal(self, book):
        append(book, reading("0.30"))
        (point,) = around(book)
        assert str(point.decimal) == "0.30"


class TestCorrections:
    def test_hold_from_when_they_were_known(self, book):
        (old,) = append(book, reading("0.55")).rows
        before = book.head_seq
        append(book, *actions.correction(old=old, new=reading("0.65"), reason="misread"))
        assert [point.text for point in around(book)] == ["0.65"]
        assert [point.text for point in around(book, known=before)] == ["0.55"]
        assert around(book)[0].corrected

    def test_cannot_fork(self, book):
        (old,) = append(book, reading("0.55")).rows
        append(book, *actions.correction(old=old, new=reading("0.65"), reason="misread"))
        with pytest.raises(actions.AlreadyCorrected, match="Olga"):
            actions.correction(old=old, new=reading("0.75"), reason="misread too")
        with pytest.raises(actions.AlreadyCorrected):
            actions.void(old=old, reason="gone")

    def test_keep_site_parameter_and_statistic(self, book):
        (old,) = append(book, reading("0.55", statistic="day_max")).rows
        (new,) = actions.correction(old=old, new=reading("0.65", site="RAW", parameter="pH"), reason="misread")
        assert (new.site, new.parameter, new.statistic) == ("ENTRY", "free_chlorine", "day_max")

    def test_of_a_doubtful_pair_stay_doubtful(self, book):
        (old,) = append(book, reading("0.55", marks=[marks.CONFLICT])).rows
        (new,) = actions.correction(old=old, new=reading("0.65"), reason="misread")
        assert new.marks == [marks.CONFLICT]

    def test_say_why(self, book):
        (old,) = append(book, reading()).rows
        with pytest.raises(actions.ReasonMissing):
            actions.correction(old=old, new=reading("0.65"), reason="  ")

    def test_are_shown_in_a_row_from_any_of_them(self, book):
        (first,) = append(book, reading("0.55")).rows
        (second,) = append(book, *actions.correction(old=first, new=reading("0.65"), reason="misread")).rows
        (third,) = append(book, *actions.correction(old=second, new=reading("0.75"), reason="again")).rows
        for one in (first, second, third):
            assert [row.pk for row in queries.history(one)] == [first.pk, second.pk, third.pk]
        assert queries.replaced_by(first).pk == third.pk
        assert queries.replaced_by(third) is None

    def test_void_is_a_row_and_the_last_one(self, book):
        (old,) = append(book, reading()).rows
        (gone,) = append(book, *actions.void(old=old, reason="never was")).rows
        assert around(book) == []
        with pytest.raises(actions.AlreadyCorrected, match="voided"):
            actions.correction(old=old, new=reading("0.65"), reason="misread")
        with pytest.raises(actions.AlreadyCorrected):
            actions.void(old=gone, reason="twice")


class TestDoubts:
    def test_keep_a_value_out_of_figures_until_settled(self, book):
        (row,) = append(book, reading("55", marks=[marks.LOST_POINT])).rows
        assert (around(book)[0].doubtful, around(book)[0].usable) == (True, False)
        append(book, *actions.settlement(book=book, reading=row, decision="stands", reason="it is so"))
        assert (around(book)[0].settled, around(book)[0].usable) == ("stands", True)

    def test_are_settled_as_known_at_the_time(self, book):
        (row,) = append(book, reading("55", marks=[marks.LOST_POINT])).rows
        before = book.head_seq
        append(book, *actions.settlement(book=book, reading=row, decision="set_aside", reason="can't be"))
        assert around(book, known=before)[0].doubtful
        assert around(book)[0].settled == "set_aside"

    def test_settled_anew_follow_the_last_word(self, book):
        (row,) = append(book, reading("55", marks=[marks.LOST_POINT])).rows
        for decision in ("set_aside", "stands", "set_aside"):
            append(book, *actions.settlement(book=book, reading=row, decision=decision, reason="look again"))
        assert around(book)[0].settled == "set_aside"
        assert Settlement.objects.as_known().count() == 1

    def test_are_settled_one_way_or_the_other(self, book):
        (row,) = append(book, reading("55", marks=[marks.LOST_POINT])).rows
        with pytest.raises(actions.NothingToSettle):
            actions.settlement(book=book, reading=row, decision="perhaps", reason="hm, hm")

    def test_in_words(self):
        assert marks.in_words([marks.IMPOSSIBLE, "something_else"]) == "outside what is physically possible; something else"


class TestLatest:
    def test_is_the_last_usable_number_before_a_moment(self, book):
        append(
            book,
            reading("0.1", 6),
            reading("0.2", 7),
            reading("9.9", 8, marks=[marks.IMPOSSIBLE]),
            reading("0.4", 9, state="not_taken", value=None, value_text=""),
            reading("0.5", 11),
        )
        assert queries.latest(book, "ENTRY", "free_chlorine", before=NOW.replace(hour=10)).text == "0.2"

    def test_is_found_behind_a_long_row_of_doubts(self, book):
        append(book, reading("0.1", 6))
        append(
            book,
            *[
                reading(f"9.{minute:02d}", taken_at=NOW.replace(hour=7, minute=minute), marks=[marks.IMPOSSIBLE])
                for minute in range(30)
            ],
        )
        assert queries.latest(book, "ENTRY", "free_chlorine", before=NOW).text == "0.1"

    def test_of_nothing_is_none(self, book):
        assert queries.latest(book, "ENTRY", "free_chlorine", before=NOW) is None


def test_one_is_found_by_its_name_only(book):
    (row,) = append(book, reading()).rows
    assert queries.one(book, row.ref).pk == row.pk
    assert all(
        queries.one(book, ref) is None for ref in ("", "x", "1", "1.x", "999.1", "-1.1", "1.1.1", "².1", "1" * 30 + ".1")
    )


def test_rivals_are_the_other_records_of_a_sample(book):
    one, two, _ = append(book, reading("0.1"), reading("0.2"), reading("0.3", sample="B")).rows
    assert [row.pk for row in queries.rivals(book, one)] == [two.pk]
