"""Book against dip can fail: a leak, a load nobody booked and a wrong witness each leave a mark of their own.

The tank holds 1 L a millimetre; the feeder says 100 L a day (120 kg at 1.2 kg/L), and so does the tank while all is well. The
book stands on the feeder for the last seven days, to 3 % of it: 840 kg ± 25 kg.
"""

from __future__ import annotations

import datetime as dt

import pytest

from plant.dosing import queries as dosing
from tests.dosing import build

pytestmark = pytest.mark.django_db
DAYS = 16
LITRES = 100.0
KG = LITRES * 1.2


def run(
    *, lost_l: float = 0.0, came_l: float = 0.0, on: int = 9, feeder_l_h: float | None = LITRES / 24, used_l: float = LITRES
):
    """A book of 16 days: what is lost or comes on day ``on`` is nowhere written down."""
    book = build.book(build.tank("T"), build.point("T"))
    rows = []
    for day in range(DAYS + 1):
        when = f"2026-03-{1 + day:02d}T07:00"
        there = 3500 - used_l * day + (came_l - lost_l if day > on else 0.0)
        rows += [build.level("T", when, there), build.count(when, 10_000.0 + 12_000.0 * day)]
        if feeder_l_h is not None:
            rows.append(build.read("CAUSTIC", when, "feeder_setting", feeder_l_h, "L/h"))
    build.enter(book, *rows)
    return book


def difference(book, day: int):
    """Dip less book at 07:00 of the day so many days after the first, kg, with its standard uncertainty and what is remarked."""
    at = build.at("2026-03-01T07:00") + dt.timedelta(days=day)
    (row,) = dosing.stock(book, at)
    return row.difference_kg, row.difference_sd_kg, row.remarks


def doses(book) -> list[float]:
    rows = dosing.comparison(book, dt.date(2026, 3, 1), dt.date(2026, 3, 16))
    return [row.product_kg.value for row in rows]


def test_while_all_is_well_book_and_dip_agree():
    book = run()
    for day in (8, 12, 16):
        found, sd, remarks = difference(book, day)
        assert found == pytest.approx(0, abs=0.5)
        assert 20 < sd < 35
        assert "book stands on feeder settings" in remarks


def test_a_leak_is_a_step_down_on_its_day_and_one_day_of_use_too_high():
    book = run(lost_l=80)
    assert difference(book, 9)[0] == pytest.approx(0, abs=0.5)
    for day in (10, 13, 16):
        found, sd, _ = difference(book, day)
        assert found == pytest.approx(-96, abs=0.5)
        assert abs(found) > 2 * sd
    used = doses(book)
    assert used[9] == pytest.approx(KG + 96, abs=0.5)
    assert [round(one) for day, one in enumerate(used) if day != 9] == [120] * 15


def test_a_load_nobody_booked_is_a_step_up_and_one_day_without_use():
    book = run(came_l=500)
    assert difference(book, 9)[0] == pytest.approx(0, abs=0.5)
    found, sd, _ = difference(book, 12)
    assert found == pytest.approx(600, abs=1)
    assert found > 10 * sd
    used = doses(book)
    assert used[9] is None or used[9] < 0


def test_a_wrong_witness_is_no_step_it_is_there_every_day_while_the_doses_are_even():
    book = run(feeder_l_h=1.2 * LITRES / 24)
    found = [difference(book, day)[0] for day in (9, 12, 16)]
    assert found == pytest.approx([0.2 * 7 * KG] * 3, abs=1.5)
    assert [round(one) for one in doses(book)] == [120] * 16


def test_a_slow_leak_shows_against_a_witness_and_without_one_the_software_says_that_it_can_not_know():
    """12 L a day run away beside the 100 L that are fed."""
    found, sd, remarks = difference(run(used_l=LITRES + 12), 16)
    assert found == pytest.approx(-12 * 1.2 * 7, abs=1)
    assert abs(found) > 2 * sd
    assert "book stands on feeder settings" in remarks


def test_the_same_leak_without_a_witness_is_taken_for_use():
    book = run(used_l=LITRES + 12, feeder_l_h=None)
    found, sd, remarks = difference(book, 16)
    assert abs(found) < 2 * sd
    assert any("no second witness: book stands on expected use" in remark for remark in remarks)
    assert doses(book)[5] == pytest.approx(112 * 1.2, abs=0.5)
