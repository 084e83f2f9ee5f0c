"""Deliveries and transfers: what holds, what was reversed, what took its place."""

from __future__ import annotations

import datetime as dt
import uuid

import pytest

from plant.ledger import actions as ledger
from plant.ledger import verify
from plant.stock import actions, queries
from plant.stock.models import Delivery, Transfer
from tests import people

NOW = dt.datetime(2026, 3, 10, 12, 0, tzinfo=dt.UTC)
DAY = dt.timedelta(days=1)


@pytest.fixture
def book(db):
    return people.small_works()


def load(vessel="NAOH-BULK", quantity=1000.0):
    return Delivery(taken_at=NOW, vessel=vessel, product="NAOH", quantity=quantity, unit="kg", lot="L1", marks=[])


def append(book, *rows):
    return ledger.append(
        book=book, client_id=uuid.uuid4().hex, kind="test", received="x", rows=list(rows), by=people.person("sam"), now=NOW
    )


def loads(book, **asked):
    return queries.deliveries(book, start=NOW - DAY, end=NOW + DAY, **asked)


def test_a_reversed_delivery_no_longer_counts_but_stays_to_be_read(book):
    (row,) = append(book, load()).rows
    before = book.head_seq
    append(book, *actions.reversal(old=row, reason="went into the other tank"))
    assert loads(book) == []
    assert [one.pk for one in loads(book, known=before)] == [row.pk]
    assert Delivery.objects.count() == 2
    book.refresh_from_db()
    assert list(verify.chain(book)) == []


def test_a_wrong_delivery_is_replaced_by_a_right_one(book):
    (row,) = append(book, load(quantity=10000.0)).rows
    append(book, *actions.replacement(old=row, new=load(quantity=1000.0), reason="a nought too many"))
    assert [one.quantity for one in loads(book)] == [1000.0]


def test_of_two_people_the_second_is_told_who_was_first(book):
    (row,) = append(book, load()).rows
    append(book, *actions.reversal(old=row, reason="went elsewhere"))
    with pytest.raises(actions.AlreadyReversed, match=r"Sam.*went elsewhere"):
        actions.reversal(old=row, reason="went elsewhere, too")
    with pytest.raises(actions.AlreadyReversed):
        actions.replacement(old=row, new=load(), reason="went elsewhere, too")


def test_a_reversal_is_not_reversed(book):
    (row,) = append(book, load()).rows
    (gone,) = append(book, *actions.reversal(old=row, reason="went elsewhere")).rows
    with pytest.raises(actions.AlreadyReversed, match="itself a reversal"):
        actions.reversal(old=gone, reason="back again")


def test_a_reversal_says_why(book):
    (row,) = append(book, load()).rows
    with pytest.raises(actions.ReasonMissing):
        actions.reversal(old=row, reason=" ")


def test_deliveries_are_asked_for_by_vessel(book):
    append(book, load(), load("HYPO-BULK"))
    assert [one.vessel for one in loads(book, vessels=["HYPO-BULK"])] == ["HYPO-BULK"]


def test_transfers_are_found_from_both_ends(book):
    append(
        book,
        Transfer(taken_at=NOW, from_vessel="A", to_vessel="B", quantity=5, unit="L", marks=[]),
        Transfer(taken_at=NOW, from_vessel="C", to_vessel="D", quantity=5, unit="L", marks=[]),
    )
    for vessel in ("A", "B"):
        found = queries.transfers(book, start=NOW - DAY, end=NOW + DAY, vessels=[vessel])
        assert [(one.from_vessel, one.to_vessel) for one in found] == [("A", "B")]
