"""Orders: placed, known to the window, ended by a delivery or cancelled; and loads outside their terms."""

from __future__ import annotations

import datetime as dt

import pytest

from plant.deviations import queries as deviations
from plant.readings import marks
from plant.stock import queries as stock
from plant.stock.models import Delivery, Order
from plant.supply import queries as supply
from plant.works import queries as works
from tests import people
from tests.intake.test_receiving import NOW, book, deliver, state  # noqa: F401  # book is a fixture


def place(who="sam", **typed):
    given = {
        "client_id": "o1", "product": "NAOH", "quantity_kg": "5000", "ordered_on": "2026-04-01", "expected_on": "2026-04-08",
        "supplier": "Invented Supplies", "reference": "PO 12",
    } | typed  # fmt: skip
    return people.signed_in(who).post("/w/TST/orders/place/", given)


class TestOrders:
    def test_is_placed_once_and_stands_on_the_page_for_all(self, book):  # noqa: F811
        for _ in range(2):
            assert place().status_code == 302
        assert Order.objects.count() == 1
        page = people.signed_in("ira").get("/w/TST/orders/").content.decode()
        assert "5,000 kg NAOH" in page
        assert "expected 8 Apr" in page

    @pytest.mark.parametrize(
        "typed", [{"expected_on": "2026-03-01"}, {"quantity_kg": "0"}, {"quantity_kg": "much"}, {"product": "WINE"}]
    )
    def test_bad_input_is_said_and_nothing_is_written(self, book, typed):  # noqa: F811
        answer = place(**typed)
        assert answer.status_code == 422
        assert 'value="PO 12"' in answer.content.decode()
        assert Order.objects.count() == 0

    def test_operators_and_inspectors_place_none(self, book):  # noqa: F811
        assert place("olga").status_code == 403
        assert place("ira").status_code == 403

    def test_a_delivery_ends_it(self, book):  # noqa: F811
        place()
        ref = stock.orders(book)[0].ref
        assert f'value="{ref}" selected' in people.signed_in("olga").get(f"/w/TST/delivery/?order={ref}").content.decode()
        assert deliver(order=ref).status_code == 302
        assert stock.orders(book) == []
        ended = Order.objects.get(voided=True)
        assert ended.reason.startswith("delivered: 1273 kg NAOH")
        assert ended.entry_id == Delivery.objects.get().entry_id

    def test_is_cancelled_with_a_reason_only(self, book):  # noqa: F811
        place()
        ref, sam = stock.orders(book)[0].ref, people.signed_in("sam")
        sam.post(f"/w/TST/orders/{ref}/cancel/", {"client_id": "c", "reason": ""})
        assert len(stock.orders(book)) == 1
        sam.post(f"/w/TST/orders/{ref}/cancel/", {"client_id": "c", "reason": "the works closed"})
        assert stock.orders(book) == []
        assert sam.post(f"/w/TST/orders/{ref}/cancel/", {"client_id": "d", "reason": "again"}).status_code == 404

    def test_the_supply_knows_what_is_on_its_way_and_what_is_overdue(self, book):  # noqa: F811
        place()
        place(client_id="o2", product="PEROX", expected_on="2026-04-01")
        remarks = {item.product: item.remarks for item in supply.supply(book, NOW)}
        assert any(one.startswith("on order: 5000 kg NAOH, expected 2026-04-08") for one in remarks["NAOH"])
        assert any("overdue, not counted on" in one for one in remarks["PEROX"])

    def test_as_known_before(self, book):  # noqa: F811
        before = book.head_seq
        place()
        assert stock.orders(book, known=before) == []


class TestTerms:
    @pytest.fixture(autouse=True)
    def terms(self, book):  # noqa: F811
        caustic = works.stated(book).value("product", "NAOH", NOW)
        more = {"shelf_life_days": 365, "accepted_strength_low": 24.0, "accepted_strength_high": 26.0}
        state(book, "product", "NAOH", dict(caustic, **more))

    OLD = {"manufactured_on": "2025-03-01"}
    WEAK = {"strength": "23.9", "strength_basis": "weight_pct"}

    @pytest.mark.parametrize(
        ("typed", "said"),
        [
            (OLD, "The lot is 397 days old; its shelf life is 365 days."),
            (WEAK, "says 23.9 (weight pct); at least 24 is accepted."),
        ],
    )
    def test_an_operator_is_told_and_can_not_accept(self, book, typed, said):  # noqa: F811
        answer = deliver(**typed, accepted_because="the driver is in a hurry")
        page = answer.content.decode()
        assert answer.status_code == 422
        assert said in page
        assert "A supervisor may accept it, with a reason; or send it back." in page
        assert Delivery.objects.count() == 0

    def test_a_supervisor_accepts_with_a_reason_and_it_is_marked_and_seen(self, book):  # noqa: F811
        assert deliver("sam", **self.WEAK).status_code == 422
        assert deliver("sam", **self.WEAK, accepted_because="the tank is nearly empty").status_code == 302
        assert Delivery.objects.get().marks == [marks.ACCEPTED]
        assert "the tank is nearly empty" in Delivery.objects.get().entry.payload
        (view,) = (one for one in deviations.open_ones(book) if one.kind == "suspicious_reading")
        assert (view.level, view.subject) == ("alert", "NAOH-BULK")

    @pytest.mark.parametrize("strength", ["24", "26", "25"])
    def test_at_the_edges_it_is_as_it_should_be(self, book, strength):  # noqa: F811
        assert deliver(strength=strength, strength_basis="weight_pct", manufactured_on="2025-04-02").status_code == 302
        assert Delivery.objects.get().marks == []

    def test_quarantine_keeps_the_vessel_out_of_service_and_its_stock_unusable(self, book):  # noqa: F811
        assert deliver(quarantine="on").status_code == 302
        assert works.stated(book).state("vessel", "NAOH-BULK", NOW + dt.timedelta(minutes=1)) == "off"
        (row,) = (one for one in supply.stock(book, NOW + dt.timedelta(minutes=1)) if one.vessel == "NAOH-BULK")
        assert row.usable_active_kg in (None, 0.0)
