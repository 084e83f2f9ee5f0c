"""Tokens are made and withdrawn in Chromium; the pages are as wide as the screen and without findings."""

import pytest

from tests import browser, people
from tests.api import machines

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
SIZES = pytest.mark.parametrize("viewport", [browser.TABLET, browser.DESK, browser.PHONE], ids=["tablet", "desk", "phone"])


@SIZES
def test_a_token_is_made_shown_once_and_withdrawn(live_server, new_page, accessibility, viewport):
    book = people.small_works()
    machines.machine(book)
    wrong = {}
    page = new_page(viewport=viewport)

    def look(name: str) -> None:
        assert page.locator("h1").count() == 1, name
        width = page.evaluate("document.documentElement.scrollWidth")
        if width > viewport["width"]:
            wrong[name, "width"] = width
        if found := accessibility(page):
            wrong[name, "axe"] = found

    browser.sign_in(page, live_server.url, "adam")
    page.goto(f"{live_server.url}/w/TST/settings/")
    page.get_by_role("link", name="Devices and tokens").click()
    look("tokens")
    page.get_by_label("Name of the device").fill("laboratory")
    page.get_by_label("send readings").check()
    page.get_by_role("button", name="Make a token").click()
    page.get_by_role("heading", name="Put this into laboratory").wait_for()
    look("new token")
    secret = page.locator("dd").first.inner_text()
    asked = machines.Machine(secret)
    assert asked.get("/api/w/TST/").json()["device"] == "laboratory"
    page.get_by_role("link", name="Done").click()
    assert secret not in page.content()
    row = page.locator("li", has_text="laboratory").filter(has_text="last used")
    row.get_by_text("Withdraw this token").click()
    row.get_by_label("Why").fill("written on a wall")
    row.get_by_role("button", name="Withdraw laboratory").click()
    page.get_by_text("laboratory is refused from now on").wait_for()
    look("withdrawn")
    assert asked.get("/api/w/TST/").status_code == 401
    for name in ("/api/", "/help/devices/"):
        page.goto(live_server.url + name)
        look(name)
    assert wrong == {}
