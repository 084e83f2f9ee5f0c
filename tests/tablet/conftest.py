"""A works with a round of 25 lines, a page of somebody signed in, and an enrolled tablet that nobody has taken."""

from __future__ import annotations

import pytest

from plant.works.tablets import gate
from tests import browser as chromium
from tests.tablet import walked

ROUND = "/w/TST/round/"


@pytest.fixture
def book():
    return walked.book()


@pytest.fixture
def page(live_server, new_page, book):
    """Olga, fully signed in, on a page that is ready for the time without a network."""
    made = new_page(viewport=chromium.TABLET)
    chromium.sign_in(made, live_server.url, "olga")
    made.goto(live_server.url + ROUND)
    walked.ready(made)
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
