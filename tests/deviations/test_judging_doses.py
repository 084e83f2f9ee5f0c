"""Days of doses and of stock judged on real rows: by default and by stated limits, with the causes named."""

from __future__ import annotations

import datetime as dt

import pytest

from plant import clock
from plant.ledger.models import Book
from plant.stock.models import Delivery
from tests.deviations import world
from tests.deviations.world import FIRST, judged, kinds, limit

pytestmark = pytest.mark.django_db


class TestDoses:
    def test_a_dose_a_fifth_off_by_default(self) -> None:
        book = world.open_works()
        day = FIRST + dt.timedelta(days=3)
        world.history(book, FIRST, 5, factor=lambda code, on: 1.25 if on == day else 1.0)
        (view,) = judged(book, FIRST, FIRST + dt.timedelta(days=4))
        assert (view.kind, view.subject, view.raised_for) == ("dose_vs_design", "NAOH-P", day)
        assert view.value.endswith("(+25.0 %)")

    def test_exactly_a_fifth_passes(self) -> None:
        # 20 % more of 384 L is 460.8 L: levels to the tenth of a millimetre hold it.
        book = world.open_works()
        world.history(book, FIRST, 5, factor=lambda code, on: 1.199 if on.day == 4 else 1.0)
        assert judged(book, FIRST, FIRST + dt.timedelta(days=4)) == []

    def test_a_default_can_be_withdrawn_and_restated(self) -> None:
        withdrawn = limit("dose_vs_design", dosing_point="NAOH-P", pct=30)
        book = world.open_works(withdrawn)
        world.history(book, FIRST, 5, factor=lambda code, on: 1.25 if on.day == 4 else 1.0)
        assert judged(book, FIRST, FIRST + dt.timedelta(days=4)) == []

    def test_the_certified_maximum_over_seven_days(self) -> None:
        # 100 mg/L as product is certified; 40 mg/L is the usual dose here (10 mg/L NaOH of 25 %).
        book = world.open_works(limit("certified_maximum", "regulatory", dosing_point="NAOH-P"))
        world.history(book, FIRST, 10, factor=lambda code, on: 4.0 if on.day >= 8 else 1.0)
        views = [view for view in judged(book, FIRST, FIRST + dt.timedelta(days=9)) if view.kind == "certified_maximum"]
        # (4 x 40 + 3 x 160) / 7 = 91.4 on the 10th; (3 x 40 + 4 x 160) / 7 = 108.6 on the 11th.
        assert [(view.raised_for.day, view.value.split(" ")[0]) for view in views] == [(11, "108.6")]

    def test_a_small_lasting_drift(self) -> None:
        book = world.open_works()
        begins = FIRST + dt.timedelta(days=40)
        world.history(book, FIRST, 60, factor=lambda code, on: 1.12 if on >= begins else 1.0, noise=0.03, gauge_m=0.004)
        views = judged(book, FIRST, FIRST + dt.timedelta(days=59))
        drifts = [view for view in views if view.kind == "drift"]
        assert [(view.subject, view.likely_causes[0]) for view in drifts] == [("NAOH-P", "feeder_drift")]
        assert 0 <= (drifts[0].raised_for - begins).days <= 4

    def test_every_dose_of_a_meter_moving_together_points_at_the_meter(self) -> None:
        book = world.open_works(codes=("AAA", "BBB", "CCC"))
        begins = FIRST + dt.timedelta(days=40)
        world.history(
            book, FIRST, 50, codes=("AAA", "BBB", "CCC"), metered=lambda on: 0.85 if on >= begins else 1.0, noise=0.02
        )
        views = [view for view in judged(book, FIRST, FIRST + dt.timedelta(days=49)) if view.raised_for >= begins]
        assert {view.subject for view in views} >= {"AAA-P", "BBB-P", "CCC-P"}
        assert {view.likely_causes[0] for view in views if view.kind == "drift"} == {"meter_error"}

    def test_an_unbooked_delivery_is_named(self) -> None:
        book = world.open_works()
        world.history(book, FIRST, 40, booked=lambda code, on: False)
        views = judged(book, FIRST, FIRST + dt.timedelta(days=39))
        # Three times in forty days the tank is filled and nobody books it.
        assert [(view.kind, view.likely_causes[0]) for view in views] == [("dose_vs_design", "unbooked_delivery")] * 3

    def test_a_stuck_gauge_is_named(self) -> None:
        book = world.open_works()
        world.history(book, FIRST, 14, level=lambda code, at, true: 5.0 if at > world.local("2026-02-10T08:00") else true)
        views = judged(book, FIRST, FIRST + dt.timedelta(days=13))
        assert "stuck" in kinds(views)
        assert {view.likely_causes[0] for view in views if view.raised_for.day >= 12} == {"stuck_sensor"}

    def test_a_wrong_level_is_named_once_the_next_day_gives_it_back(self) -> None:
        book = world.open_works()
        wrong = world.local("2026-02-10T07:00")
        world.history(book, FIRST, 14, level=lambda code, at, true: true - 0.3 if at == wrong else true)
        views = judged(book, FIRST, FIRST + dt.timedelta(days=13))
        assert {view.likely_causes[0] for view in views} == {"wrong_reading"}

    def test_later_days_never_inform_a_day(self) -> None:
        def run(days: int) -> list[tuple[object, ...]]:
            book = world.open_works()
            world.history(
                book, FIRST, days, factor=lambda code, on: 1.15 if on.day >= 20 else 1.0, noise=0.03, gauge_m=0.005, seed=4
            )
            views = judged(book, FIRST, FIRST + dt.timedelta(days=24), now=world.local("2026-05-01T12:00"))
            Book.objects.filter(pk=book.pk).update(code=f"OLD{book.pk}")
            return [
                (view.kind, view.subject, view.raised_for, view.since, view.value)
                for view in views
                if view.raised_for < FIRST + dt.timedelta(days=25)
            ]

        assert run(25) == run(45)

    def test_a_day_closed_by_a_later_reading_is_judged_with_the_day_of_that_reading(self) -> None:
        book = world.open_works()
        at = dt.timedelta(hours=24)
        start = world.local("2026-02-02T06:10")
        level, rows = 6.5, []
        for n in range(6):
            used = 0.384 * (1.5 if n == 3 else 1.0)
            rows.append(world.reading("FT", "totaliser", start + n * at, f"{12000 * n}", "m3"))
            rows.append(world.reading("NAOH-TANK", "level", start + n * at, f"{level:.3f}", "m"))
            level -= used
        world.enter(book, *rows, now=start + 6 * at)
        # The half more was used from 06:10 of the 5th to 06:10 of the 6th, which is the operating day of the 5th but for
        # 50 minutes; its end, 07:00 of the 6th, lies between readings of the 6th and the 7th at 06:10: the second belongs
        # to the operating day of the 6th, so that is the day on which it is known.
        (view,) = judged(book, dt.date(2026, 2, 1), dt.date(2026, 2, 7))
        assert view.raised_for == dt.date(2026, 2, 6)
        assert view.since == world.local("2026-02-05T07:00")


class TestStock:
    def delivery(self, at: str, kg: float = 4000.0, **rest: object) -> Delivery:
        return Delivery(taken_at=world.local(at), vessel="NAOH-TANK", product="NAOH", quantity=kg, unit="kg", lot="L-7", **rest)

    def test_days_of_supply_holding_and_age(self) -> None:
        book = world.open_works(
            limit("days_of_supply", vessel="NAOH-TANK", low=30)
            + limit("holding", "regulatory", vessel="NAOH-TANK", high=12000, unit="kg")
            + limit("lot_age", vessel="NAOH-TANK", days=20)
        )
        world.history(book, FIRST, 12)
        made = dt.date(2026, 1, 15)
        world.enter(book, self.delivery("2026-02-02T10:00", manufactured_on=made), now=world.local("2026-02-14T08:30"))
        views = {view.kind: view for view in judged(book, FIRST, FIRST + dt.timedelta(days=11))}
        assert {"days_of_supply", "holding", "lot_age"} <= set(views)
        # 6.5 m at 1.25 kg/L are 8,125 kg, and 4,000 kg came in before any was used.
        assert (views["holding"].raised_for, views["holding"].value) == (FIRST, "12125 kg")
        # The 20th day after 15 January is 4 February; the day after it is late.
        assert views["lot_age"].raised_for == dt.date(2026, 2, 5)

    def test_a_solution_counts_on_its_own_basis_and_below_the_cut_not_at_all(self) -> None:
        """Trap: the peak is 12,125 kg of 25 % solution, 3,031 kg of the chemical itself; a cut at 30 % leaves nothing of it."""
        for keys, found in (
            ({"high": 3000, "counts": "active"}, "3031 kg"),
            ({"high": 3100, "counts": "active"}, None),
            ({"high": 12000, "from_strength": 25}, "12125 kg"),
            ({"high": 12000, "from_strength": 30}, None),
        ):
            book = world.open_works(limit("holding", "regulatory", vessel="NAOH-TANK", unit="kg", **keys))
            world.history(book, FIRST, 4)
            world.enter(book, self.delivery("2026-02-02T10:00"), now=world.local("2026-02-14T08:30"))
            views = [view for view in judged(book, FIRST, FIRST + dt.timedelta(days=3)) if view.kind == "holding"]
            assert [view.value for view in views[:1]] == ([found] if found else []), keys
            type(book).objects.filter(pk=book.pk).update(code=f"OLD{book.pk}")

    def test_a_weak_lot_by_its_test(self) -> None:
        book = world.open_works(limit("strength_low", vessel="NAOH-TANK", pct_below_certificate=10))
        world.history(book, FIRST, 4)
        at = world.local("2026-02-03T09:00")
        world.enter(book, world.reading("NAOH-TANK", "strength", at, "22.0", "%"), now=world.local("2026-02-06T13:30"))
        (view,) = [view for view in judged(book, FIRST, FIRST + dt.timedelta(days=3)) if view.kind == "strength_low"]
        assert view.raised_for == dt.date(2026, 2, 3)
        assert "12.0 % below 25" in view.value

    def test_a_leak_by_a_second_witness(self) -> None:
        book = world.open_works()
        begins = FIRST + dt.timedelta(days=20)
        world.history(book, FIRST, 32, factor=lambda code, on: 1.3 if on >= begins else 1.0)
        rows = [
            world.reading("NAOH-P", "feeder_setting", dt.datetime.combine(on, dt.time(7), dt.UTC), "16.0", "L/h")
            for on in clock.days(FIRST, FIRST + dt.timedelta(days=32))
        ]
        world.enter(book, *rows, now=world.local("2026-03-07T08:30"))
        views = judged(book, FIRST, FIRST + dt.timedelta(days=31))
        losses = [view for view in views if view.kind == "stock_loss"]
        assert [(view.subject, view.likely_causes[0]) for view in losses] == [("NAOH-TANK", "leak")]
        assert (losses[0].raised_for - begins).days <= 7


def test_inactivation_below_one() -> None:
    # 900 m3 x 0.5 / 1,200 m3/h = 22.5 min; 0.2 mg/L x 22.5 min = 4.5; one log Giardia at 0.5 °C and pH 7.5 needs far more.
    segment = """
[[contact_segment]]
code = "CLEARWELL"
volume_m3 = 900
baffling_factor = 0.5
peak_flow_meter = "FT"
sample_point = "ENTRY"
required_log_giardia = 1.0
[[limit]]
code = "ct"
kind = "inactivation_ratio"
level = "regulatory"
contact_segment = "CLEARWELL"
low = 1.0
"""
    book = world.open_works(segment)
    at = world.local("2026-02-02T09:00")
    rows = [
        world.reading("ENTRY", "free_chlorine", at, "0.2", "mg/L"),
        world.reading("ENTRY", "pH", at, "7.5"),
        world.reading("ENTRY", "temperature", at, "0.5", "°C"),
    ]
    world.enter(book, *rows, now=at)
    assert judged(book, FIRST) == []
    world.enter(book, world.reading("FT", "peak_hourly_flow", at, "1200", "m3/h"), now=world.local("2026-02-03T12:30"))
    (view,) = judged(book, FIRST, now=world.local("2026-02-03T14:00"))
    assert (view.kind, view.subject, view.level) == ("inactivation_ratio", "ENTRY", "regulatory")
    assert float(view.value) < 1
