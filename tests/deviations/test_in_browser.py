"""The pages of deviations in Chromium: as wide as the screen, without findings in both colours, and a life walked by hand."""

from __future__ import annotations

import datetime as dt

import pytest

from plant import clock
from plant.deviations import queries as deviations
from tests import browser, people
from tests.board import books

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)


@pytest.fixture
def book(monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    book = books.with_history(days=10, now=NOW)
    books.raise_one(book, now=NOW)
    books.raise_one(book, now=NOW, code="d", level="alert", kind="dose_vs_design", subject="CAUSTIC-PH", parameter="")
    return book


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("viewport", [browser.TABLET, browser.DESK, browser.PHONE], ids=["tablet", "desk", "phone"])
def test_no_page_is_wider_than_the_screen_and_axe_finds_nothing(book, live_server, new_page, accessibility, viewport, theme):
    page = new_page(viewport=viewport, color_scheme=theme)
    browser.sign_in(page, live_server.url, "sam")
    refs = [view.ref for view in deviations.open_ones(book)]
    assert len(refs) > 1
    wrong = {}
    for path in ("", "try/", *(f"{ref}/" for ref in refs)):
        page.goto(f"{live_server.url}/w/TST/deviations/{path}")
        if found := browser.faults(page, viewport, accessibility):
            wrong[path] = found
    assert wrong == {}


def test_taking_it_on_ends_with_a_name_on_the_board(book, live_server, new_page):
    page = new_page(viewport=browser.TABLET)
    browser.sign_in(page, live_server.url, "olga")
    view = deviations.open_ones(book)[0]
    page.goto(f"{live_server.url}/w/TST/deviations/{view.ref}/")
    page.get_by_role("button", name="Take it on").or_(page.get_by_role("button", name="Acknowledge")).first.click()
    page.wait_for_load_state()
    assert deviations.one(book, view.ref).acknowledged_by
    page.goto(live_server.url + "/w/TST/")
    assert page.get_by_text(people.person("olga").display_name).count() >= 1
