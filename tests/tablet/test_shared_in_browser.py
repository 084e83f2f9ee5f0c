"""A tablet that several people share, in Chromium: names, PINs, the lock after idleness, and a tablet that was withdrawn."""

from __future__ import annotations

import pytest

from plant.ledger.models import Entry
from plant.readings.models import Reading
from plant.works.tablets import gate
from tests import browser as chromium
from tests.tablet import walked

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
ROUND = "/w/TST/round/"


def test_a_shared_tablet_takes_a_name_and_a_pin(shared):
    assert not shared.locator("#work").is_visible()
    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.fill("#pin", "29384")
    shared.keyboard.press("Enter")
    walked.wait_for(shared, "name and PIN")
    walked.field(shared, "ENTRY:pH").fill("8.2")
    shared.click("#send")
    walked.wait_for(shared, "In the book: 8.2")
    entry = Entry.objects.get(kind="round")
    assert (entry.recorded_by.username, entry.device, entry.attested) == ("olga", "Filter hall", "pin")


def test_a_wrong_pin_is_said_and_entry_goes_on_by_name(shared):
    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.fill("#pin", "11223")
    shared.keyboard.press("Enter")
    walked.wait_for(shared, "The PIN is not right")
    shared.get_by_role("button", name="Go on by name only").click()
    walked.wait_for(shared, "name chosen, PIN owed")
    walked.field(shared, "ENTRY:pH").fill("8.2")
    shared.click("#send")
    walked.wait_for(shared, "In the book: 8.2")
    assert Entry.objects.get(kind="round").attested == "claimed"
    shared.get_by_role("button", name="Give the PIN").click()
    shared.fill("#pin", "29384")
    shared.keyboard.press("Enter")
    walked.wait_for(shared, "name and PIN")
    assert Entry.objects.filter(kind="attestation").count() == 1


def test_without_a_network_the_name_is_claimed_and_two_people_send_from_one_tablet(shared):
    shared.context.set_offline(True)
    shared.reload()
    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.fill("#pin", "29384")
    shared.keyboard.press("Enter")
    walked.wait_for(shared, "name chosen, PIN owed")
    walked.field(shared, "ENTRY:pH").fill("8.2")
    shared.click("#send")
    walked.wait_for(shared, "1 waiting to be sent")
    walked.field(shared, "RAW:temperature").fill("11")
    shared.get_by_role("button", name="Lock").click()
    shared.get_by_role("button", name="Sam Sundby").click()
    shared.get_by_role("button", name="Go on by name only").click()
    shared.wait_for_selector("form[data-ready=yes]")
    assert walked.field(shared, "RAW:temperature").input_value() == ""
    walked.field(shared, "ENTRY:hardness").fill("180")
    shared.click("#send")
    shared.wait_for_function("() => document.getElementById('queue-count').textContent.startsWith('2 waiting')")
    shared.context.set_offline(False)
    shared.wait_for_function("() => document.getElementById('queue-count').textContent === 'nothing waiting'", timeout=15_000)
    rows = Entry.objects.filter(kind="round").order_by("seq")
    assert [(row.recorded_by.username, row.attested) for row in rows] == [("olga", "claimed"), ("sam", "claimed")]
    shared.get_by_role("button", name="Lock").click()
    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.get_by_role("button", name="Go on by name only").click()
    shared.wait_for_selector("form[data-ready=yes]")
    assert walked.field(shared, "RAW:temperature").input_value() == "11"
    assert walked.field(shared, "ENTRY:pH").input_value() == ""


def test_it_locks_after_idleness_and_keeps_what_was_typed(live_server, new_page, book, monkeypatch):
    from plant.intake.views import round_page

    monkeypatch.setattr(round_page, "IDLE_S", 2)
    page = new_page(viewport=chromium.PHONE)
    _, token = walked.enrolled(book)
    page.context.add_cookies([{"name": gate.COOKIE, "value": token, "url": f"{live_server.url}/w/TST/"}])
    page.goto(live_server.url + ROUND)
    page.get_by_role("button", name="Olga Ottesen").click()
    page.get_by_role("button", name="Go on by name only").click()
    page.wait_for_selector("form[data-ready=yes]")
    walked.field(page, "ENTRY:pH").fill("8.2")
    walked.wait_for(page, "Locked after a while without use")
    assert not page.locator("#work").is_visible()
    page.get_by_role("button", name="Olga Ottesen").click()
    page.get_by_role("button", name="Go on by name only").click()
    page.wait_for_selector("form[data-ready=yes]")
    assert walked.field(page, "ENTRY:pH").input_value() == "8.2"


def test_what_is_refused_for_a_round_that_is_gone_stays_in_the_queue_with_its_reason(shared):
    """A refused entry of somebody who no longer has the tablet is neither dropped nor sent again by itself."""
    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.get_by_role("button", name="Go on by name only").click()
    shared.wait_for_selector("form[data-ready=yes]")
    shared.context.set_offline(True)
    walked.field(shared, "ENTRY:pH").fill("8.2")
    shared.click("#send")
    walked.wait_for(shared, "1 waiting to be sent")
    shared.get_by_role("button", name="Lock").click()
    shared.route(
        "**/entries/*",
        lambda route: route.fulfill(status=422, content_type="application/json", body='{"general": "read unit", "lines": {}}'),
    )
    shared.context.set_offline(False)
    shared.wait_for_function("() => document.getElementById('queue-count').textContent.includes('1 refused')", timeout=15_000)
    assert "Refused: read unit" in shared.locator("#queue-list").text_content()
    shared.unroute("**/entries/*")
    shared.locator("#queue > summary").click()
    shared.get_by_role("button", name="Try again").click()
    shared.wait_for_function("() => document.getElementById('queue-count').textContent === 'nothing waiting'")
    assert Reading.objects.get().value_text == "8.2"


def test_a_withdrawn_tablet_still_gives_up_what_it_keeps(shared, book, live_server):
    from plant.works.tablets.models import Device

    shared.get_by_role("button", name="Olga Ottesen").click()
    shared.get_by_role("button", name="Go on by name only").click()
    shared.wait_for_selector("form[data-ready=yes]")
    shared.context.set_offline(True)
    walked.field(shared, "ENTRY:pH").fill("8.2")
    shared.click("#send")
    walked.wait_for(shared, "1 waiting to be sent")
    Device.objects.update(revoked_at=book.opened_at, revoked_why="lost")
    shared.context.set_offline(False)
    walked.wait_for(shared, "has been withdrawn from the works")
    shared.goto(live_server.url + ROUND)
    walked.wait_for(shared, "1 waiting to be sent")
    with shared.expect_download() as caught:
        shared.click("#queue-save")
    assert "8.2" in caught.value.path().read_text()


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("size", [chromium.TABLET, chromium.PHONE])
def test_axe_finds_nothing_serious_on_a_shared_tablet(live_server, new_page, accessibility, book, size, theme):
    page = new_page(viewport=size, color_scheme=theme)
    _, token = walked.enrolled(book)
    page.context.add_cookies([{"name": gate.COOKIE, "value": token, "url": f"{live_server.url}/w/TST/"}])
    page.goto(live_server.url + ROUND)
    page.get_by_role("button", name="Olga Ottesen").wait_for()
    assert accessibility(page) == []
    page.get_by_role("button", name="Olga Ottesen").click()
    assert accessibility(page) == []
    page.get_by_role("button", name="Go on by name only").click()
    page.wait_for_selector("form[data-ready=yes]")
    page.locator("#queue > summary").click()
    assert accessibility(page) == []
    small = page.evaluate("""() => [...document.querySelectorAll('main button, main input:not([type=hidden]), main select, main summary')]
        .filter(node => node.checkVisibility()).map(node => [node.outerHTML.slice(0, 90), node.getBoundingClientRect().height])
        .filter(([, height]) => height < 48)""")
    assert small == []
    # Text at 200 %: nothing is cut off, nothing scrolls sideways.
    page.evaluate("document.documentElement.style.fontSize = '32px'")
    assert page.evaluate("document.documentElement.scrollWidth <= window.innerWidth")
