"""The round in Chromium: answers at once, nothing lost, each value in the book once."""

from __future__ import annotations

import pytest

from plant.intake.models import HandOver
from plant.ledger.models import Entry
from plant.readings.models import Reading
from tests import browser, people

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def book():
    return people.small_works()


@pytest.fixture
def tablet(live_server, new_page, book):
    page = new_page(viewport=browser.TABLET)
    browser.sign_in(page, live_server.url, "olga")
    page.goto(f"{live_server.url}/w/TST/round/")
    page.wait_for_selector("form[data-ready=yes]")
    return page


def field(page, key):
    return page.locator(f'li.line[data-key="{key}"] input[name^=value-]')


def answers(page, key):
    return page.locator(f'li.line[data-key="{key}"] .answers')


def wait_for(page, text):
    page.wait_for_function("text => document.body.innerText.includes(text)", arg=text)


KEY = "ENTRY:free_chlorine"


def test_a_value_is_answered_and_sent_as_one_entry(tablet):
    field(tablet, KEY).fill("0.55")
    field(tablet, "ENTRY:pH").fill("7,42")
    tablet.click("#send")
    wait_for(tablet, "In the book: 0.55 mg/L")
    assert Reading.objects.count() == 2
    assert Entry.objects.filter(kind="round").count() == 1
    assert Reading.objects.get(parameter="pH").value_text == "7.42"
    assert tablet.evaluate("async () => (await (await import('/static/intake/drafts.js')).waiting()).length") == 0


def test_what_is_not_a_number_is_stopped_beside_the_field(tablet):
    field(tablet, KEY).fill("0..5")
    assert "not a number" in answers(tablet, KEY).inner_text()
    tablet.click("#send")
    assert Reading.objects.count() == 0
    assert field(tablet, KEY).evaluate("node => node === document.activeElement")


def test_the_unlikely_is_shown_large_and_taken_with_one_tap(tablet):
    field(tablet, "ENTRY:pH").fill("13.5")
    tablet.click("#send")
    assert Reading.objects.count() == 0
    line = tablet.locator('li.line[data-key="ENTRY:pH"]')
    assert line.locator(".shown").inner_text().strip() == "13.5"
    size = line.locator(".shown").evaluate("node => getComputedStyle(node).fontSize")
    assert size == "44px"
    line.get_by_role("button", name="The instrument shows this").click()
    tablet.click("#send")
    wait_for(tablet, "In the book: 13.5")
    assert "the instrument shows this" in Reading.objects.get().note


def test_read_again_clears_the_field(tablet):
    field(tablet, "ENTRY:pH").fill("13.5")
    tablet.locator('li.line[data-key="ENTRY:pH"]').get_by_role("button", name="Read again").click()
    assert field(tablet, "ENTRY:pH").input_value() == ""


def test_outside_a_limit_says_what_to_do_and_whom_to_call(tablet):
    field(tablet, KEY).fill("0.05")
    said = answers(tablet, KEY).inner_text()
    assert "limit" in said
    assert "not below" in said
    assert "Take the sample again" in said
    assert "Never" in said  # the caution of the chemical


def test_enter_goes_to_the_next_line(tablet):
    field(tablet, KEY).fill("0.55")
    field(tablet, KEY).press("Enter")
    keys = tablet.locator("li.line").evaluate_all("nodes => nodes.map(node => node.dataset.key)")
    focused = tablet.evaluate("document.activeElement.closest('li.line')?.dataset.key")
    assert focused == keys[keys.index(KEY) + 1]


def test_what_was_typed_is_there_after_a_reload_and_after_a_crash(tablet, live_server):
    field(tablet, KEY).type("0.5")
    tablet.wait_for_timeout(200)
    tablet.reload()
    tablet.wait_for_selector("form[data-ready=yes]")
    assert field(tablet, KEY).input_value() == "0.5"
    other = tablet.context.new_page()
    tablet.close(run_before_unload=False)
    other.goto(f"{live_server.url}/w/TST/round/")
    other.wait_for_selector("form[data-ready=yes]")
    assert field(other, KEY).input_value() == "0.5"


def test_without_a_network_it_waits_and_goes_out_by_itself(tablet):
    field(tablet, KEY).fill("0.55")
    tablet.context.set_offline(True)
    tablet.click("#send")
    wait_for(tablet, "1 waiting to be sent")
    assert Reading.objects.count() == 0
    tablet.context.set_offline(False)
    wait_for(tablet, "In the book: 0.55 mg/L")
    assert Reading.objects.count() == 1


def test_an_answer_that_was_lost_on_the_way_does_not_double_anything(tablet):
    lost = []

    def lose_the_answer(route):
        if not lost:
            lost.append(route.fetch().status)
            route.abort()
        else:
            route.continue_()

    tablet.route("**/entries/*", lose_the_answer)
    field(tablet, KEY).fill("0.55")
    with tablet.expect_event("requestfailed"):
        tablet.click("#send")
    assert lost == [201]
    wait_for(tablet, "1 waiting to be sent")
    tablet.evaluate("window.dispatchEvent(new Event('online'))")
    wait_for(tablet, "In the book: 0.55 mg/L")
    assert Reading.objects.count() == 1


def test_what_the_server_refuses_is_shown_at_its_line_and_kept(tablet):
    tablet.route(
        "**/entries/*",
        lambda route: route.fulfill(
            status=422, content_type="application/json", body='{"general": "", "lines": {"0": "read unit; expected another"}}'
        ),
    )
    field(tablet, KEY).fill("0.55")
    tablet.click("#send")
    wait_for(tablet, "read unit; expected another")
    assert field(tablet, KEY).input_value() == "0.55"


def test_not_taken_needs_a_reason_and_goes_with_it(tablet):
    line = tablet.locator(f'li.line[data-key="{KEY}"]')
    line.locator("summary").click()
    line.locator("select[name^=not_taken-]").select_option("no reagent")
    tablet.click("#send")
    wait_for(tablet, "In the book: not taken, no reagent")
    assert Reading.objects.get().state == "not_taken"


def test_a_level_shows_its_litres_in_each_unit(tablet):
    key = "HYPO-BULK:level"
    line = tablet.locator(f'li.line[data-key="{key}"]')
    for unit, typed in (("m", "1.5"), ("cm", "150"), ("%", "50"), ("L", "3016")):
        line.locator("select[name^=unit-]").select_option(unit)
        field(tablet, key).fill(typed)
        assert "3,016 L" in line.locator(".shown").inner_text(), unit
    tablet.click("#send")
    wait_for(tablet, "In the book: 3016 L")
    reading = Reading.objects.get()
    assert (reading.parameter, reading.unit, reading.value) == ("volume", "L", 3016.0)


def test_the_round_is_closed_with_a_note(tablet):
    field(tablet, KEY).fill("0.55")
    tablet.fill("#note", "pump 2 hums")
    tablet.click("#close")
    wait_for(tablet, "This round was closed")
    assert HandOver.objects.get().note == "pump 2 hums"
    assert Reading.objects.count() == 1
    assert tablet.input_value("#note") == ""


@pytest.mark.parametrize("size", [browser.TABLET, browser.DESK, browser.PHONE])
@pytest.mark.parametrize("theme", ["light", "dark"])
def test_axe_finds_nothing_serious(live_server, new_page, accessibility, book, size, theme):
    page = new_page(viewport=size, color_scheme=theme)
    browser.sign_in(page, live_server.url, "olga")
    page.goto(f"{live_server.url}/w/TST/round/")
    page.wait_for_selector("form[data-ready=yes]")
    field(page, KEY).fill("0.05")
    field(page, "ENTRY:pH").fill("13.5")
    assert accessibility(page) == []
    assert page.evaluate("document.documentElement.scrollWidth <= window.innerWidth")


def test_targets_are_large_enough_for_gloves(tablet):
    field(tablet, "ENTRY:pH").fill("13.5")
    small = tablet.evaluate("""() => [...document.querySelectorAll('main input:not([type=hidden]), main button, main select, main summary')]
        .filter(node => node.checkVisibility()).map(node => [node.outerHTML.slice(0, 80), node.getBoundingClientRect().height])
        .filter(([, height]) => height < 48)""")
    assert small == []


def test_what_was_typed_in_an_earlier_shift_is_offered_again(tablet):
    yesterday = tablet.evaluate("Date.now() - 20 * 3600 * 1000")
    tablet.evaluate(
        """async ([key, at]) => {
            const drafts = await import('/static/intake/drafts.js');
            const line = {value: '0.61', unit: 'mg/L', notTaken: '', clock: '', note: '', atMs: at, confirmed: false};
            await drafts.keepDraft({key: 'TST|2026-01-01 day|olga', lines: {[key]: line}, note: ''});
        }""",
        [KEY, yesterday],
    )
    tablet.reload()
    tablet.wait_for_selector("form[data-ready=yes]")
    wait_for(tablet, "never sent")
    tablet.get_by_role("button", name="Send these now").click()
    wait_for(tablet, "In the book: ENTRY free_chlorine 0.61 mg/L")
    assert tablet.inner_text("#count").startswith("0 of")
    assert abs(Reading.objects.get().taken_at.timestamp() - yesterday / 1000) < 60
    tablet.reload()
    tablet.wait_for_selector("form[data-ready=yes]")
    assert "never sent" not in tablet.inner_text("body")
