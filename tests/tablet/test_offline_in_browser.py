"""The round without a network, in Chromium: nothing lost, nothing doubled, and it says what is where."""

from __future__ import annotations

import json
import re
import signal

import pytest

from plant.intake.models import HandOver
from plant.ledger import verify
from plant.ledger.models import Entry
from plant.readings.models import Reading
from plant.works.tablets import gate
from tests import browser as chromium
from tests.tablet import walked

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
ROUND = "/w/TST/round/"


@pytest.fixture
def book():
    return walked.book()


@pytest.fixture
def page(live_server, new_page, book):
    """Olga, fully signed in, on a page that is ready for the time without a network."""
    made = new_page(viewport=chromium.TABLET)
    walked.sign_in(made, live_server.url, "olga")
    made.goto(live_server.url + ROUND)
    ready(made)
    return made


@pytest.fixture
def shared(live_server, new_page, book):
    """An enrolled tablet that nobody has taken."""
    made = new_page(viewport=chromium.TABLET)
    _, token = walked.enrolled(book)
    made.context.add_cookies([{"name": gate.COOKIE, "value": token, "url": f"{live_server.url}/w/TST/"}])
    walked.give_pin(book, "olga")
    made.goto(live_server.url + ROUND)
    made.wait_for_selector("html[data-offline=ready]", timeout=20_000)
    return made


def ready(page):
    page.wait_for_selector("form[data-ready=yes]")
    page.wait_for_selector("html[data-offline=ready]", timeout=20_000)


def waiting(page) -> list[dict]:
    return page.evaluate(
        """() => new Promise((resolve, reject) => {
            const request = indexedDB.open("weirbook-round");
            request.onsuccess = () => {
                const all = request.result.transaction("outbox").objectStore("outbox").getAll();
                all.onsuccess = () => { request.result.close(); resolve(all.result); };
            };
            request.onerror = () => reject(request.error);
        })"""
    )


def exactly_once() -> dict[str, int]:
    found: dict[str, int] = {}
    for row in Reading.objects.as_known():
        found[f"{row.site}:{row.parameter}"] = found.get(f"{row.site}:{row.parameter}", 0) + 1
    return found


def test_a_whole_round_offline_with_the_browser_killed_in_the_middle(live_server, book, browser, tmp_path):
    """25 lines: 12 typed without a network, the browser killed, reopened still without one, finished, reconnected."""
    start = {"executable_path": chromium_path(browser), "args": ["--no-sandbox"], "viewport": chromium.TABLET}
    profile = browser.browser_type.launch_persistent_context(str(tmp_path), **start)
    page = profile.new_page()
    walked.sign_in(page, live_server.url, "olga")
    cookies = profile.cookies()
    page.goto(live_server.url + ROUND)
    ready(page)
    assert page.locator("li.line[data-key]").count() == 25
    profile.set_offline(True)
    page.reload()
    page.wait_for_selector("form[data-ready=yes]")
    assert "No network. This is the round as known" in page.inner_text("#offline")
    keys = page.locator("li.line[data-key]").evaluate_all("nodes => nodes.map(node => node.dataset.key)")
    assert sorted(keys) == sorted(walked.VALUES)
    for key in keys[:12]:
        walked.field(page, key).fill(walked.VALUES[key])
    page.click("#send")
    walked.wait_for(page, "12 waiting to be sent")
    walked.field(page, keys[12]).fill(walked.VALUES[keys[12]])
    page.wait_for_timeout(300)
    kill_browser_of(tmp_path)
    assert Reading.objects.count() == 0

    profile = browser.browser_type.launch_persistent_context(str(tmp_path), **start)
    try:
        profile.add_cookies(cookies)
        profile.set_offline(True)
        page = profile.new_page()
        page.goto(live_server.url + ROUND)
        page.wait_for_selector("form[data-ready=yes]")
        walked.wait_for(page, "12 waiting to be sent")
        assert walked.field(page, keys[12]).input_value() == walked.VALUES[keys[12]]
        for key in keys[13:]:
            walked.field(page, key).fill(walked.VALUES[key])
        page.fill("#note", "all quiet")
        page.click("#close")
        walked.wait_for(page, "25 waiting to be sent")
        profile.set_offline(False)
        page.wait_for_function(
            "() => document.getElementById('queue-count')?.textContent === 'nothing waiting'", timeout=15_000
        )
        walked.wait_for(page, "This round was closed")
    finally:
        profile.close()
    assert exactly_once() == dict.fromkeys(walked.VALUES, 1)
    assert HandOver.objects.get().note == "all quiet"
    assert Entry.objects.filter(kind="round").count() == 2
    assert list(verify.everything()) == []


def chromium_path(browser) -> str:
    return chromium._chromium(browser.browser_type.executable_path) or ""


def kill_browser_of(profile) -> None:
    """kill -9 for the browser that runs on this profile and for nothing else: found by the folder on its command line."""
    import os
    from pathlib import Path

    found = []
    for folder in Path("/proc").iterdir():
        if folder.name.isdigit():
            try:
                words = (folder / "cmdline").read_bytes().split(b"\0")
            except OSError:
                continue
            if f"--user-data-dir={profile}".encode() in words and not any(word.startswith(b"--type=") for word in words):
                found.append(int(folder.name))
    assert found
    for process in found:
        os.kill(process, signal.SIGKILL)


def test_an_action_value_that_has_not_been_sent_says_telephone_with_the_number(page):
    page.context.set_offline(True)
    walked.field(page, "ENTRY:free_chlorine").fill("0.05")
    page.click("#send")
    walked.wait_for(page, "Not sent: telephone 0555 0123")
    page.context.set_offline(False)
    walked.wait_for(page, "In the book: 0.05 mg/L")
    assert "Not sent" not in page.inner_text("body")


def test_no_other_page_is_kept_and_the_shell_points_to_the_round(page, live_server):
    page.goto(f"{live_server.url}/w/TST/")
    page.context.set_offline(True)
    page.reload()
    walked.wait_for(page, "This page needs the network. The round does not")
    page.get_by_role("link", name="Round of TST").click()
    page.wait_for_selector("form[data-ready=yes]")
    kept = page.evaluate(
        "async () => { const out = []; for (const name of await caches.keys())"
        " for (const one of await (await caches.open(name)).keys()) out.push(new URL(one.url).pathname); return out; }"
    )
    assert kept
    assert all(path == "/round-shell/" or path.startswith("/static/") for path in kept)


def test_somebody_elses_entries_stay_on_a_browser_that_is_no_shared_tablet(page, live_server):
    page.context.set_offline(True)
    walked.field(page, "ENTRY:pH").fill("8.2")
    page.click("#send")
    walked.wait_for(page, "1 waiting to be sent")
    page.context.clear_cookies(name="sessionid")
    walked.sign_in(page, live_server.url, "sam")
    page.context.set_offline(False)
    page.goto(live_server.url + ROUND)
    ready(page)
    assert [one["person"] for one in waiting(page)] == ["olga"]
    assert Reading.objects.count() == 0


def test_what_waits_can_be_saved_as_a_file(page):
    page.context.set_offline(True)
    walked.field(page, "ENTRY:pH").fill("8.2")
    page.click("#send")
    walked.wait_for(page, "1 waiting to be sent")
    page.locator("#queue > summary").click()
    with page.expect_download() as caught:
        page.click("#queue-save")
    said = json.loads(caught.value.path().read_text())
    assert [line["value"] for line in said["entries"][0]["body"]["lines"]] == ["8.2"]
    assert re.fullmatch(r"weirbook-unsent-TST-.*\.json", caught.value.suggested_filename)


def test_a_changed_app_loses_no_draft(page, monkeypatch):
    from plant.intake import offline

    walked.field(page, "ENTRY:pH").fill("8.2")
    before = page.evaluate("caches.keys()")
    real = offline.worker
    monkeypatch.setattr(offline, "worker", lambda: re.sub(r'"version": "\w+"', '"version": "another"', real()))
    page.evaluate("navigator.serviceWorker.getRegistration().then(one => one.update())")
    page.wait_for_function("async () => (await caches.keys()).join() === 'weirbook-another'", timeout=15_000)
    assert before != page.evaluate("caches.keys()")
    page.context.set_offline(True)
    page.reload()
    page.wait_for_selector("form[data-ready=yes]")
    assert walked.field(page, "ENTRY:pH").input_value() == "8.2"
    page.context.set_offline(False)
    page.click("#send")
    walked.wait_for(page, "In the book: 8.2")


def test_a_clock_26_hours_fast_is_said_and_the_times_are_the_servers(live_server, new_page, book):
    page = new_page(viewport=chromium.TABLET)
    walked.sign_in(page, live_server.url, "olga")
    page.add_init_script(
        "const real = Date; const off = 26 * 3600000; "
        "Date = class extends real { constructor(...a) { a.length ? super(...a) : super(real.now() + off); } "
        "static now() { return real.now() + off; } };"
    )
    page.goto(live_server.url + ROUND)
    ready(page)
    assert "26 h fast" in page.inner_text("#clock-off")
    walked.field(page, "ENTRY:pH").fill("8.2")
    page.click("#send")
    walked.wait_for(page, "In the book: 8.2")
    entry = Entry.objects.get(kind="round")
    assert abs((Reading.objects.get().taken_at - entry.recorded_at).total_seconds()) < 120
    noted = json.loads(entry.payload)["noted"]
    assert noted["clock_flagged"]
    assert abs(noted["clock_off_s"] - 26 * 3600) < 60


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


def test_tanks_and_feeders_are_reckoned_at_the_flow_just_read(page, book):
    """1.5 m in a tank of 1.6 m diameter is 3,016 L; less the heel of 150 L, at 8.8 mL a m³ and the flow of the totaliser."""
    from tests.tablet import feeding_world

    feeding_world.flow_of(book, m3_h=400)
    page.reload()
    ready(page)
    line = page.locator('li.line[data-key="HYPO-BULK:level"]')
    walked.field(page, "HYPO-BULK:level").fill("1.5")
    assert "lasts about 34 days at the design dose" in line.locator(".reckoned").inner_text()
    feeder = page.locator('li.line[data-key="HYPO-POST:feeder_setting"] .reckoned').inner_text()
    assert "1.1 mg/L at 400 m³/h" in feeder
    assert "about 46 %" in feeder


def test_the_next_shift_takes_over_with_one_tap(page):
    page.click("#take-over")
    walked.wait_for(page, "Taken over by Olga Ottesen")
    page.reload()
    walked.wait_for(page, "Taken over by Olga Ottesen")


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


def test_a_draw_down_is_timed_and_put_into_the_field(live_server, new_page):
    from tests import people

    made = people.open_works(walked.toml().replace('parameter = "feeder_setting"', 'parameter = "drawdown"'))
    people.join(made)
    page = new_page(viewport=chromium.TABLET)
    walked.sign_in(page, live_server.url, "olga")
    page.goto(live_server.url + ROUND)
    page.wait_for_selector("form[data-ready=yes]")
    line = page.locator('li.line[data-key="HYPO-POST:drawdown"]')
    line.get_by_label("Drawn, mL").fill("100")
    line.get_by_role("button", name="Start the timer").click()
    page.wait_for_timeout(2000)
    line.get_by_role("button", name="Stop").click()
    # 100 mL in two seconds and the time a click takes: near 3000 mL/min, never more.
    assert 1500 < float(walked.field(page, "HYPO-POST:drawdown").input_value()) <= 3000
    page.click("#send")
    walked.wait_for(page, "In the book:")
    assert Reading.objects.get().note.startswith("100 mL in 2 s")


def test_decimal_commas_are_taken_where_the_works_counts_in_metric_units(page):
    walked.field(page, "ENTRY:pH").fill("8,21")
    page.click("#send")
    walked.wait_for(page, "In the book: 8,21")
    assert Reading.objects.get().value_text == "8.21"


def test_a_shift_that_began_without_a_network_starts_with_open_lines(page, live_server):
    """The shift moves on by the clock the server gave; what the last shift took is not taken for this one."""
    walked.field(page, "ENTRY:pH").fill("8.2")
    page.click("#send")
    walked.wait_for(page, "In the book: 8.2")
    page.wait_for_function("() => document.getElementById('queue-count').textContent === 'nothing waiting'")
    page.wait_for_timeout(500)
    page.add_init_script(
        "const real = Date; const off = 13 * 3600000; "
        "Date = class extends real { constructor(...a) { a.length ? super(...a) : super(real.now() + off); } "
        "static now() { return real.now() + off; } };"
    )
    page.context.set_offline(True)
    page.reload()
    page.wait_for_selector("form[data-ready=yes]")
    assert "moved on to the shift that is on" in page.inner_text("#offline")
    assert page.locator('li.line[data-key="ENTRY:pH"].taken').count() == 0
    assert page.inner_text("#count") == "0 of 25"
