"""The board's pages in Chromium: as wide as the screen, without findings in both colours, and what their scripts do."""

from __future__ import annotations

import datetime as dt

import pytest
from django.contrib.auth import BACKEND_SESSION_KEY, HASH_SESSION_KEY, SESSION_KEY
from django.contrib.sessions.backends.db import SessionStore

from plant import clock
from tests import browser, people
from tests.board import books

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]

NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
PAGES = (
    "/",
    "/w/TST/",
    "/w/TST/stock/",
    "/w/TST/dosing/HYPO-POST/",
    "/w/TST/readings/",
    "/w/TST/trail/?key=used:HYPO-POST:2026-03-09",
    "/help/",
    "/help/board/",
    "/help/cautions/",
    "/password/",
    "/w/NONE/",
)
SIZES = {"tablet": browser.TABLET, "desk": browser.DESK, "phone": browser.PHONE}


@pytest.fixture
def book(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    book = books.with_history(days=30, now=NOW)
    books.raise_one(book, now=NOW)
    books.raise_one(book, now=NOW, code="r", level="regulatory", parameter="turbidity", kind="share_of_month")
    books.raise_one(book, now=NOW, code="d", level="alert", kind="dose_vs_design", subject="CAUSTIC-PH", parameter="")
    return book


@pytest.fixture
def opened(live_server, new_page):
    """Opens a page as a person: ``opened("sam", path, viewport=…)``."""

    def go(username: str, path: str, **options):
        page = new_page(**options)
        person = people.person(username)
        session = SessionStore()
        session[SESSION_KEY] = str(person.pk)
        session[BACKEND_SESSION_KEY] = "django.contrib.auth.backends.ModelBackend"
        session[HASH_SESSION_KEY] = person.get_session_auth_hash()
        session.save()
        page.context.add_cookies([{"name": "sessionid", "value": session.session_key, "url": live_server.url}])
        page.goto(live_server.url + path)
        return page

    return go


@pytest.mark.parametrize(("size", "colours"), [("tablet", "light"), ("desk", "dark"), ("phone", "light")])
def test_every_page_is_clean_and_no_wider_than_the_screen(book, live_server, opened, accessibility, size, colours):
    page = opened("sam", "/", viewport=SIZES[size], color_scheme=colours)
    found = {}
    for path in PAGES:
        page.goto(live_server.url + path)
        page.wait_for_load_state("networkidle")
        wide = page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
        if problems := accessibility(page) + ([f"{wide} px wider than the screen"] if wide > 0 else []):
            found[path] = problems
    assert found == {}


@pytest.mark.parametrize("colours", ["light", "dark"])
def test_the_sign_in_page_is_clean(db, live_server, new_page, accessibility, colours):
    page = new_page(viewport=browser.PHONE, color_scheme=colours)
    page.goto(live_server.url + "/sign-in/")
    assert accessibility(page) == []


def test_fingers_find_buttons_and_fields_large_enough(book, live_server, opened):
    page = opened("sam", "/w/TST/", viewport=browser.TABLET)
    small = {}
    for path in ("/w/TST/", "/w/TST/stock/", "/w/TST/readings/", "/password/"):
        page.goto(live_server.url + path)
        heights = page.eval_on_selector_all(
            ".button, .nav a, input:not([type=hidden]):not([type=range]), select, summary.person",
            "found => found.filter(one => one.offsetParent).map(one => [one.textContent.trim(), one.getBoundingClientRect().height])",
        )
        small |= {f"{path} {words}": height for words, height in heights if height < 48}
    assert small == {}


def test_the_face_is_served_from_here_and_used(book, opened):
    page = opened("sam", "/w/TST/")
    assert page.evaluate(
        "document.fonts.ready.then(() => [...document.fonts].map(one => one.family + ' ' + one.status).join())"
    ) in (
        "Inter loaded",
        '"Inter" loaded',
    )


def test_night_colours_are_chosen_without_a_script(book, live_server, new_page):
    page = new_page(java_script_enabled=False)
    page.goto(live_server.url + "/sign-in/")
    page.click("text=Night colours")
    assert page.locator("html").get_attribute("data-theme") == "night"


class TestBoard:
    def test_it_updates_itself_without_reloading(self, book, opened):
        page = opened("sam", "/w/TST/")
        page.clock.install()
        page.reload()
        page.evaluate("window.sameDocument = true")
        assert "3 things need someone." in page.inner_text("h1")
        books.raise_one(book, now=NOW, code="pH", parameter="pH", value="8.9")
        page.clock.run_for(61_000)
        page.wait_for_function("() => document.querySelector('h1').textContent.startsWith('4 things')")
        assert page.evaluate("window.sameDocument")
        # Read out, because the answer has changed.
        assert page.get_attribute("#board-clock", "aria-live") == "polite"

    def test_what_was_opened_stays_open(self, book, opened):
        for n, name in enumerate(("temperature", "alkalinity")):
            books.raise_one(book, now=NOW, code=f"m{n}", kind="missing", level="alert", subject="RAW", parameter=name)
        page = opened("sam", "/w/TST/")
        page.clock.install()
        page.reload()
        page.click("summary:has-text('Which ones')")
        with page.expect_response("**/now/"):
            page.clock.run_for(61_000)
        page.wait_for_function("() => document.querySelector('#board-now details').open")

    def test_it_rests_while_it_is_hidden(self, book, opened):
        page = opened("sam", "/w/TST/")
        page.clock.install()
        page.reload()
        asked = []
        page.on("request", lambda request: asked.append(request.url) if "/now/" in request.url else None)
        page.evaluate(
            "Object.defineProperty(document, 'hidden', {value: true, configurable: true});"
            "document.dispatchEvent(new Event('visibilitychange'))"
        )
        page.clock.run_for(300_000)
        assert asked == []
        with page.expect_response("**/now/"):
            page.evaluate(
                "Object.defineProperty(document, 'hidden', {value: false, configurable: true});"
                "document.dispatchEvent(new Event('visibilitychange'))"
            )

    def test_without_the_server_it_says_how_old_it_is(self, book, opened):
        page = opened("sam", "/w/TST/")
        page.clock.install()
        page.reload()
        page.route("**/now/", lambda route: route.abort())
        page.clock.run_for(61_000)
        page.wait_for_function("() => document.querySelector('#board-clock').textContent.startsWith('Not updated since 10:00')")

    def test_on_a_phone_the_menu_opens_and_leads_on(self, book, opened):
        page = opened("sam", "/w/TST/", viewport=browser.PHONE)
        assert not page.is_visible("nav.main")
        page.click("text=Menu")
        page.click("nav.main >> text=Stock")
        assert page.inner_text("h1") == "Stock"

    def test_printed_it_is_ink_on_white_without_the_menu(self, book, opened):
        page = opened("sam", "/w/TST/", color_scheme="dark")
        page.emulate_media(media="print")
        assert page.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"
        assert not page.is_visible("nav.main")
        assert page.is_visible("text=3 things need someone.")


class TestDosingPoint:
    def test_the_arrow_keys_read_the_run(self, book, opened):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/")
        slider = page.get_by_label("Read the values along the run")
        assert "9 Mar 2026" in page.inner_text(".cursor-readout")
        slider.press("ArrowLeft")
        assert page.inner_text(".cursor-readout").startswith("8 Mar 2026: ")
        assert slider.get_attribute("aria-valuetext") == page.inner_text(".cursor-readout")
        slider.press("Home")
        assert page.inner_text(".cursor-readout").endswith("not known")

    def test_a_touch_reads_it_too(self, book, opened):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/")
        picture = page.locator("[data-run] svg").first
        box = picture.bounding_box()
        page.mouse.move(box["x"] + box["width"] * 0.9, box["y"] + 100)
        assert "Mar 2026" in page.inner_text(".cursor-readout")
        assert not page.inner_text(".cursor-readout").startswith("9 Mar")

    def test_a_number_opens_beside_the_page_and_closes_by_key(self, book, opened):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/")
        page.click("#days a.trail >> nth=3")
        panel = page.get_by_role("dialog", name="How this number was made")
        panel.get_by_text("Dose is mass over volume").wait_for()
        assert "/dosing/" in page.url
        page.keyboard.press("Escape")
        assert not panel.is_visible()

    def test_a_number_in_the_picture_opens_too(self, book, opened):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/")
        page.locator('svg a[aria-label^="need"]:visible').first.click()
        page.get_by_role("dialog").get_by_text("Need model").wait_for()

    def test_on_a_phone_it_is_a_page(self, book, opened):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/", viewport=browser.PHONE)
        page.click("#days a.trail >> nth=0")
        page.wait_for_url("**/trail/**")
        assert page.is_visible("text=Water treated, CAUSTIC-PH")

    def test_the_panel_is_clean(self, book, opened, accessibility):
        page = opened("sam", "/w/TST/dosing/CAUSTIC-PH/")
        page.click("#days a.trail >> nth=3")
        page.get_by_role("dialog").get_by_text("Dose is mass over volume").wait_for()
        assert accessibility(page) == []
