"""The month's pages in Chromium: as wide as the screen, without serious findings, in both colours."""

from __future__ import annotations

import datetime as dt
import os
from pathlib import Path

import pytest
from django.contrib.auth import BACKEND_SESSION_KEY, HASH_SESSION_KEY, SESSION_KEY
from django.contrib.sessions.backends.db import SessionStore

from plant import clock
from plant.reports import actions, checklist
from plant.reports.month import gather
from tests import browser, people
from tests.reports import plan

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)
PICTURES = os.environ.get("WEIRBOOK_PICTURES", "")  # a folder: keep pictures of what was looked at


@pytest.fixture
def book(monkeypatch, tmp_path):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    found, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=NOW - dt.timedelta(hours=2))
    return found


@pytest.mark.parametrize(("size", "colours"), [("desk", "light"), ("tablet", "dark"), ("phone", "light")])
def test_month_list_and_check_are_clean(book, live_server, new_page, accessibility, size, colours):
    viewport = {"desk": browser.DESK, "tablet": browser.TABLET, "phone": browser.PHONE}[size]
    page = new_page(viewport=viewport, color_scheme=colours)
    _sign_in(page, live_server, "mira")
    found = {}
    for name, path in (("months", ""), ("month", "2026-03/"), ("check", "check/")):
        page.goto(f"{live_server.url}/w/TST/reports/{path}")
        page.wait_for_load_state("networkidle")
        wide = page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
        found[name] = [*accessibility(page), *([f"{wide} px too wide"] if wide > 0 else [])]
        if PICTURES:
            page.screenshot(path=Path(PICTURES) / f"reports-{name}-{size}.png")
    assert found == {"months": [], "month": [], "check": []}


def test_from_the_draft_to_the_issued_pdf(book, live_server, new_page):
    """The manager prepares and certifies in the page, and the file checks out."""
    page = new_page(viewport=browser.DESK)
    _sign_in(page, live_server, "mira")
    page.goto(f"{live_server.url}/w/TST/reports/")
    page.get_by_role("link", name="March 2026").click()
    for field in page.locator("textarea").all():
        field.fill("the analyser was being cleaned")
    page.locator("input[type=password]").fill(people.PASSWORD)
    page.get_by_role("button", name="Sign as prepared").click()
    page.locator("input[type=password]").fill(people.PASSWORD)
    page.get_by_role("button", name="Certify and issue").click()
    page.get_by_text("TST-2026-03, revision 1, is issued.").wait_for()
    with page.expect_download() as waiting:
        page.get_by_role("link", name="PDF as issued").click()
    file = waiting.value.path()
    page.goto(f"{live_server.url}/w/TST/reports/check/")
    page.locator("input[type=file]").set_input_files(
        {"name": "report.pdf", "mimeType": "application/pdf", "buffer": file.read_bytes()}
    )
    page.get_by_role("button", name="Check it").click()
    page.get_by_text("Issued, and unaltered").wait_for()
    if PICTURES:
        page.goto(f"{live_server.url}/w/TST/reports/2026-03/")
        page.screenshot(path=Path(PICTURES) / "reports-issued.png")


def test_a_prepared_month_offers_one_button(book, live_server, new_page):
    items = checklist.of(gather(book, 2026, 3, now=NOW))
    actions.prepare(
        book=book, year=2026, month=3, by=people.person("sam"), password=people.PASSWORD, now=NOW,
        explanations={item.key: "known" for item in items},
    )  # fmt: skip
    page = new_page(viewport=browser.DESK)
    _sign_in(page, live_server, "mira")
    page.goto(f"{live_server.url}/w/TST/reports/2026-03/")
    assert page.locator("aside button").all_inner_texts() == ["Certify and issue"]


def _sign_in(page, live_server, username: str) -> None:
    person = people.person(username)
    session = SessionStore()
    session[SESSION_KEY] = str(person.pk)
    session[BACKEND_SESSION_KEY] = "django.contrib.auth.backends.ModelBackend"
    session[HASH_SESSION_KEY] = person.get_session_auth_hash()
    session.save()
    page.context.add_cookies([{"name": "sessionid", "value": session.session_key, "url": live_server.url}])
