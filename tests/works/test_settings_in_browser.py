"""The settings pages in Chromium: as wide as the screen and without findings, on tablet, desk and phone."""

import datetime as dt

import pytest

from plant import clock
from plant.works import actions
from tests import browser, people

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]

NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
PAGES = (
    "",
    "vessel/",
    "limit/",
    "limit/entry-ph/",
    "vessel/NAOH-BULK/change/",
    "dosing_point/CAUSTIC-PH/change/",
    "limit/new/",
    "file/",
    "people/",
    "people/olga/",
)


@pytest.fixture
def book(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    book = people.small_works()
    actions.state(
        book=book, kind="limit", subject="entry-ph", effective_from=NOW + dt.timedelta(days=3), by=people.person("sam"),
        value={"sample_point": "ENTRY", "parameter": "pH", "kind": "bound", "level": "alert", "low": 7.9, "high": 8.5},
        now=NOW, reason="softer water",
    )  # fmt: skip
    return book


@pytest.fixture
def opened(live_server, new_page):
    def go(username, path, **options):
        page = new_page(**options)
        browser.sign_in(page, live_server.url, username)
        page.goto(f"{live_server.url}/w/TST/settings/{path}")
        return page

    return go


@pytest.mark.parametrize("viewport", [browser.TABLET, browser.DESK, browser.PHONE], ids=["tablet", "desk", "phone"])
def test_no_page_is_wider_than_the_screen_and_axe_finds_nothing(book, opened, accessibility, viewport):
    wrong = {}
    for path in PAGES:
        page = opened("adam", path, viewport=viewport)
        if found := browser.faults(page, viewport, accessibility):
            wrong[path] = found
    assert wrong == {}


def test_a_design_dose_is_changed_by_hand(book, opened):
    page = opened("sam", "design_dose/CAUSTIC-PH/change/", viewport=browser.TABLET)
    page.get_by_label("Dose (mg/L)").fill("7,5")
    page.get_by_label("Why").fill("softer water")
    page.get_by_role("button", name="Show what changes").click()
    assert page.get_by_role("row", name="Dose (mg/L) 8 7.5").is_visible()
    page.get_by_role("button", name="State it", exact=True).click()
    page.get_by_text("Stated: CAUSTIC-PH").wait_for()
    assert "softer water" in page.locator("main").inner_text()
