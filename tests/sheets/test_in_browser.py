"""The sheets in Chromium: as wide as the screen, without findings, and worked out by keyboard."""

from __future__ import annotations

import pytest

from plant.sheets import book as sheets
from tests import browser, people

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]

PAGES = ("", "checked/", *(f"{sheet.slug}/" for sheet in sheets.SHEETS))


@pytest.fixture
def book():
    return people.small_works()


@pytest.mark.parametrize("viewport", [browser.TABLET, browser.PHONE], ids=["tablet", "phone"])
def test_no_page_is_wider_than_the_screen_and_axe_finds_nothing(book, live_server, new_page, accessibility, viewport):
    page = new_page(viewport=viewport)
    browser.sign_in(page, live_server.url, "olga")
    wrong = {}
    for path in PAGES:
        page.goto(f"{live_server.url}/w/TST/sheets/{path}")
        if found := browser.faults(page, viewport, accessibility):
            wrong[path] = found
    assert wrong == {}


def test_a_sheet_is_worked_out_with_the_keyboard(book, live_server, new_page):
    page = new_page(viewport=browser.TABLET)
    browser.sign_in(page, live_server.url, "olga")
    page.goto(f"{live_server.url}/w/TST/sheets/hardness/")
    page.get_by_label("Calcium").fill("100")
    page.get_by_label("Magnesium").fill("0")
    page.keyboard.press("Enter")
    page.wait_for_url("**calcium=100**")
    assert page.get_by_role("region", name="Result").get_by_text("249.7").is_visible()
    page.get_by_label("Calcium").fill("a lot")
    page.keyboard.press("Enter")
    page.wait_for_url("**calcium=a**")
    assert page.get_by_label("Calcium").input_value() == "a lot"
    assert page.get_by_text("Enter a number").is_visible()
