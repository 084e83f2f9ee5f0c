"""A load for another tank, at 03:00, in Chromium: refused before it is connected; recorded after the event, in plain words."""

from __future__ import annotations

import pytest

from plant.deviations import queries as deviations
from plant.stock.models import Delivery
from plant.works import queries as works
from tests import browser, people

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def book():
    return people.small_works()


def test_the_wrong_tank_before_and_after(book, live_server, new_page, accessibility):
    page = new_page(viewport=browser.TABLET)
    browser.sign_in(page, live_server.url, "olga")
    page.goto(live_server.url + "/w/TST/delivery/")
    page.get_by_label("Into").select_option("NAOH-BULK")
    page.get_by_label("Product, as the papers").select_option("HYPO")
    page.get_by_label("Quantity").fill("1000")
    page.get_by_label("Unit").select_option("kg")
    page.get_by_label("Lot").fill("H-12")
    page.get_by_label("Second person").fill("the driver, P. Oak")
    page.get_by_label("caps of all others are locked").check()
    page.get_by_label("We have done these checks").check()
    page.get_by_role("button", name="Record the delivery").click()

    alert = page.get_by_role("alert")
    assert alert.get_by_role("heading", name="Do not connect").is_visible()
    assert alert.get_by_text("holds NAOH, the load is HYPO. Do not connect.").is_visible()
    assert alert.get_by_text("Nothing has been recorded.").is_visible()
    assert page.get_by_label("Lot").input_value() == "H-12"
    assert Delivery.objects.count() == 0
    assert accessibility(page) == []

    already = page.get_by_role("region", name="It has already been unloaded")
    steps = already.get_by_role("listitem").all_inner_texts()
    assert [step.split(".")[0] for step in steps] == [
        "Stop the transfer",
        "Isolate the feed from this tank: nothing of it goes to the water",
        "If there is heat, gas or a smell: leave, upwind, and keep others away",
        "Call the emergency number of the works, the supplier, and the person in charge",
    ]
    already.get_by_role("button", name="Record what has gone in").click()
    page.get_by_text("In the book.").wait_for()
    assert Delivery.objects.get().marks == ["wrong_product"]
    (raised,) = (one for one in deviations.open_ones(book) if one.kind == "suspicious_reading")
    assert (raised.subject, raised.level) == ("NAOH-BULK", "action")
    now = Delivery.objects.get().entry.recorded_at
    assert works.stated(book).state("vessel", "NAOH-BULK", now) == "off"
    page.goto(live_server.url + "/w/TST/")
    assert page.get_by_text("another product than the vessel holds").first.is_visible()
