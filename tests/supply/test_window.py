"""The order window by hand: 100 kg a day, loads of 1,000 kg, 4 days of lead time."""

import datetime as dt

import pytest

from plant.supply.window import Placed, Terms, arrival, window

MONDAY = dt.date(2026, 6, 1)
TERMS = Terms(lead_time_days=4, load_kg=1000, reserve_days=5)


def use(days, edge):
    return 100.0 * days * {"low": 0.9, "expected": 1.0, "high": 1.1}[edge]


def test_by_hand():
    """2,000 kg usable, 5 days' reserve of 500 kg: 1,500 kg at 110 a day is 13.6 days, so a load must come by day 13, ordered on day 9.
    Room for 400 kg: 600 kg more at 90 a day is 6.7 days, so it fits from day 7, ordered on day 3."""
    found = window(today=MONDAY, usable_kg=2000, room_kg=400, terms=TERMS, use_kg=use)
    assert (found.order_from, found.order_by) == (MONDAY + dt.timedelta(days=3), MONDAY + dt.timedelta(days=9))
    assert found.open


def test_no_delivery_at_the_week_end():
    terms = Terms(4, 1000, 5, no_delivery_days=("Sat", "Sun"))
    assert arrival(dt.date(2026, 6, 2), terms) == dt.date(2026, 6, 8)
    found = window(today=MONDAY, usable_kg=2000, room_kg=400, terms=terms, use_kg=use)
    # Day 13 is a Sunday: what is ordered from the Tuesday before comes on the Monday, too late. Friday the 12th is the last.
    assert found.order_by == dt.date(2026, 6, 8)


def test_a_load_on_its_way_counts_on_both_edges():
    placed = [Placed(MONDAY + dt.timedelta(days=2), 1000)]
    found = window(today=MONDAY, usable_kg=2000, room_kg=1400, terms=TERMS, use_kg=use, placed=placed)
    assert found.order_by == MONDAY + dt.timedelta(days=18)
    assert found.order_from == MONDAY + dt.timedelta(days=3)


def test_too_small_a_tank_is_said():
    found = window(today=MONDAY, usable_kg=800, room_kg=100, terms=TERMS, use_kg=use)
    assert not found.open
    assert "no window" in found.why or "reserve is reached" in found.why


def test_the_reserve_is_gone_already():
    found = window(today=MONDAY, usable_kg=300, room_kg=2000, terms=TERMS, use_kg=use)
    assert found.order_by is None
    assert "order at once" in found.why


def test_a_load_that_outlives_its_shelf_life():
    found = window(today=MONDAY, usable_kg=2000, room_kg=1500, terms=Terms(4, 1000, 5, shelf_life_days=8), use_kg=use)
    assert "shelf life" in found.why


@pytest.mark.parametrize("days", [0, 1, 3])
def test_more_stock_never_closes_the_window_earlier(days):
    less = window(today=MONDAY, usable_kg=2000, room_kg=400, terms=TERMS, use_kg=use)
    more = window(today=MONDAY, usable_kg=2000 + 100 * days, room_kg=400 - 100 * days, terms=TERMS, use_kg=use)
    assert more.order_by >= less.order_by
    assert more.order_from >= less.order_from
