"""How heavy the round is, how soon the first value can be typed on a slow tablet, and what a whole round costs in taps and time."""

from __future__ import annotations

import gzip
import json
import re
import time

import pytest

from tests import browser as chromium
from tests import services
from tests.operations.site import Site
from tests.tablet import walked

pytestmark = [pytest.mark.browser, pytest.mark.service, pytest.mark.slow]

PER_KEY_S = 0.2
PER_LINE_S = 0.5
"""The pace of a practised hand on a keypad, and the look at the instrument's number (common practice, no source)."""
SLOW_3G = {"offline": False, "latency": 150, "downloadThroughput": 1_600_000 / 8, "uploadThroughput": 750_000 / 8}
"""Downlink 1.6 Mbit/s, uplink 750 kbit/s, 150 ms: the usual profile of a fair third-generation network (from memory)."""
MAKE = """
import django; django.setup(); import json
from plant import clock
from tests import people
from tests.tablet import walked
book = people.open_works(walked.toml().replace('code = "TST"', 'code = "WLK"', 1), now=clock.now())
people.join(book, now=clock.now())
print(json.dumps(walked.enrolled(book, now=clock.now())[1]))
"""


@pytest.fixture(scope="module")
def served():
    """A server with hashed, compressed files, a works of 25 lines, and the token of one tablet."""
    site = Site(more={"DJANGO_SETTINGS_MODULE": "tests.tablet.hashed_settings"})
    try:
        site.manage("collectstatic", "--noinput", "--verbosity", "0")
        token = json.loads(site.python(MAKE))
        port = services.free_port()
        site.web(port, threads=8)
        yield site, f"http://127.0.0.1:{port}", token
    finally:
        site.close()


@pytest.fixture
def tablet(served, new_page):
    _, address, token = served
    page = new_page(viewport=chromium.TABLET)
    page.context.add_cookies([{"name": "weirbook_tablet", "value": token, "url": f"{address}/w/WLK/"}])
    return page


def begin(page) -> None:
    page.get_by_role("button", name="Olga Ottesen").click()
    page.get_by_role("button", name="Go on by name only").click()
    page.wait_for_selector("form[data-ready=yes]")


class Weight:
    """Bytes that come over the network, as they come; a page itself counts as gzip would make it, as a proxy does."""

    def __init__(self, page) -> None:
        self.page = page
        self.link = page.context.new_cdp_session(page)
        self.link.send("Network.enable")
        self.bytes: dict[str, float] = {}
        self.kinds: dict[str, str] = {}
        self.cached: set[str] = set()
        self.link.on("Network.responseReceived", self._answered)
        self.link.on("Network.requestServedFromCache", lambda event: self.cached.add(event["requestId"]))
        self.link.on(
            "Network.loadingFinished", lambda event: self.bytes.__setitem__(event["requestId"], event["encodedDataLength"])
        )

    def _answered(self, event) -> None:
        self.kinds[event["requestId"]] = event["type"]
        if event["response"].get("fromDiskCache") or event["response"].get("fromServiceWorker"):
            self.cached.add(event["requestId"])

    def total(self) -> float:
        files = sum(
            size for ident, size in self.bytes.items() if self.kinds.get(ident) != "Document" and ident not in self.cached
        )
        return files + len(gzip.compress(self.page.evaluate("() => document.documentElement.outerHTML").encode()))


def test_first_load_is_light_and_the_next_comes_from_the_cache(served, tablet, figure):
    _, address, _ = served
    first = Weight(tablet)
    tablet.goto(f"{address}/w/WLK/round/")
    tablet.wait_for_selector("html[data-begun=yes]")
    weight_first = first.total()
    tablet.wait_for_selector("html[data-offline=ready]", timeout=20_000)
    tablet.wait_for_timeout(500)
    again = Weight(tablet)
    tablet.reload()
    tablet.wait_for_selector("html[data-begun=yes]")
    weight_again = again.total()
    figure(f"Round of 25 lines: first load {weight_first / 1000:.0f} kB compressed, the next {weight_again / 1000:.0f} kB")
    assert weight_first < 300_000
    assert weight_again < 60_000
    # Every script came under a hashed name, imports included.
    names = tablet.evaluate(
        "() => performance.getEntriesByType('resource').map(one => one.name).filter(one => one.endsWith('.js'))"
    )
    assert names
    assert [name for name in names if "/static/" in name and not re.search(r"\.[0-9a-f]{12}\.js$", name)] == []
    tablet.context.set_offline(True)
    tablet.reload()
    tablet.wait_for_selector("html[data-begun=yes]")
    assert "No network" in tablet.inner_text("#offline")


@pytest.mark.parametrize("visit", ["first", "next"])
def test_time_to_first_entry_on_a_slow_tablet(served, tablet, figure, visit):
    """CPU slowed four times, a third-generation network."""
    _, address, _ = served
    if visit == "next":
        tablet.goto(f"{address}/w/WLK/round/")
        tablet.wait_for_selector("html[data-offline=ready]", timeout=20_000)
    link = tablet.context.new_cdp_session(tablet)
    link.send("Network.enable")
    link.send("Network.emulateNetworkConditions", SLOW_3G)
    link.send("Emulation.setCPUThrottlingRate", {"rate": 4})
    tablet.set_default_timeout(30_000)
    began = time.monotonic()
    tablet.goto(f"{address}/w/WLK/round/", wait_until="commit")
    begin(tablet)
    walked.field(tablet, "RAW:temperature").press("1")
    seconds = time.monotonic() - began
    figure(f"Time to the first typed digit, CPU slowed 4 times, 1.6 Mbit/s and 150 ms, {visit} visit: {seconds:.1f} s")
    assert seconds < 15


def test_a_scripted_operator_walks_25_lines(served, tablet, figure):
    """One tap into the first field, digits and "next" for each line, one tap to send; at the pace of a practised hand."""
    site, address, _ = served
    tablet.goto(f"{address}/w/WLK/round/")
    begin(tablet)
    keys = tablet.locator("li.line[data-key]").evaluate_all("nodes => nodes.map(node => node.dataset.key)")
    began = time.monotonic()
    taps = 1
    walked.field(tablet, keys[0]).click()
    for key in keys:
        assert tablet.evaluate("() => document.activeElement.closest('li.line')?.dataset.key") == key
        tablet.wait_for_timeout(PER_LINE_S * 1000)
        text = walked.VALUES[key]
        tablet.keyboard.type(text, delay=PER_KEY_S * 1000)
        tablet.keyboard.press("Enter")
        taps += len(text) + 1
    assert tablet.evaluate("() => document.activeElement.id") == "send"
    tablet.click("#send")
    taps += 1
    tablet.wait_for_function("() => document.getElementById('queue-count').textContent === 'nothing waiting'", timeout=30_000)
    seconds = time.monotonic() - began
    figure(f"25 lines: {taps} taps, {seconds:.0f} s at {PER_KEY_S} s a key and {PER_LINE_S} s a line, sending included")
    assert site.ask("Reading.objects.filter(entry__kind='round', book__code='WLK').count()") == 25
    assert seconds < 120
