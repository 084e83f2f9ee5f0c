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
from tests import browser as chromium
from tests.tablet import walked

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
ROUND = "/w/TST/round/"


def test_a_whole_round_offline_with_the_browser_killed_in_the_middle(live_server, book, browser, tmp_path):
    """25 lines: 12 typed without a network, the browser killed, reopened still without one, finished, reconnected."""
    start = {"executable_path": chromium_path(browser), "args": ["--no-sandbox"], "viewport": chromium.TABLET}
    profile = browser.browser_type.launch_persistent_context(str(tmp_path), **start)
    page = profile.new_page()
    chromium.sign_in(page, live_server.url, "olga")
    cookies = profile.cookies()
    page.goto(live_server.url + ROUND)
    walked.ready(page)
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
    assert walked.exactly_once() == dict.fromkeys(walked.VALUES, 1)
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
    chromium.sign_in(page, live_server.url, "sam")
    page.context.set_offline(False)
    page.goto(live_server.url + ROUND)
    walked.ready(page)
    assert [one["person"] for one in walked.waiting(page)] == ["olga"]
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
    chromium.sign_in(page, live_server.url, "olga")
    page.add_init_script(
        "const real = Date; const off = 26 * 3600000; "
        "Date = class extends real { constructor(...a) { a.length ? super(...a) : super(real.now() + off); } "
        "static now() { return real.now() + off; } };"
    )
    page.goto(live_server.url + ROUND)
    walked.ready(page)
    assert "26 h fast" in page.inner_text("#clock-off")
    walked.field(page, "ENTRY:pH").fill("8.2")
    page.click("#send")
    walked.wait_for(page, "In the book: 8.2")
    entry = Entry.objects.get(kind="round")
    assert abs((Reading.objects.get().taken_at - entry.recorded_at).total_seconds()) < 120
    noted = json.loads(entry.payload)["noted"]
    assert noted["clock_flagged"]
    assert abs(noted["clock_off_s"] - 26 * 3600) < 60


def test_tanks_and_feeders_are_reckoned_at_the_flow_just_read(page, book):
    """1.5 m in a tank of 1.6 m diameter is 3,016 L; less the heel of 150 L, at 8.8 mL a m³ and the flow of the totaliser."""
    from tests.tablet import feeding_world

    feeding_world.flow_of(book, m3_h=400)
    page.reload()
    walked.ready(page)
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


def test_a_draw_down_is_timed_and_put_into_the_field(live_server, new_page):
    from tests import people

    made = people.open_works(walked.toml().replace('parameter = "feeder_setting"', 'parameter = "drawdown"'))
    people.join(made)
    page = new_page(viewport=chromium.TABLET)
    chromium.sign_in(page, live_server.url, "olga")
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
