"""Chromium for the tests: a pytest plugin (`-p tests.browser` in .pytest.ini).

Chromium is the one named by WEIRBOOK_CHROMIUM, Debian's, or one that Playwright has downloaded. Every page
made by `new_page` fails its test when the browser reports a script error or something refused by the content
security policy.
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

from tests import services

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

TABLET = {"width": 820, "height": 1180}
DESK = {"width": 1280, "height": 800}
PHONE = {"width": 390, "height": 844}


def _chromium(bundled: str) -> str | None:
    named = os.environ.get("WEIRBOOK_CHROMIUM")
    on_path = (shutil.which(name) for name in ("chromium", "chromium-browser", "google-chrome"))
    bundled_if_there = bundled if Path(bundled).exists() else None
    return named or next(filter(None, on_path), None) or bundled_if_there


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    """A headless Chromium."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        program = _chromium(playwright.chromium.executable_path)
        if program is None:
            services.missing("no Chromium: install Debian's chromium, or name one in WEIRBOOK_CHROMIUM")
        # Playwright leaves its event loop marked as running in this thread, and Django then refuses the
        # database.
        os.environ["DJANGO_ALLOW_ASYNC_UNSAFE"] = "true"
        # A container's root has no user namespace for the sandbox; the pages are our own.
        chromium = playwright.chromium.launch(executable_path=program, args=["--no-sandbox"])
        yield chromium
        chromium.close()


@pytest.fixture
def new_page(browser: Browser) -> Iterator[Callable[..., Page]]:
    """Open pages, each in a profile of its own: `new_page(viewport=TABLET)`."""
    complaints: list[str] = []
    profiles = []

    def open_page(*, viewport: dict[str, int] = DESK, **options: Any) -> Page:
        profile = browser.new_context(viewport=viewport, **options)  # type: ignore[arg-type]
        profile.set_default_timeout(10_000)
        profiles.append(profile)
        page = profile.new_page()
        page.on("pageerror", lambda error: complaints.append(str(error)))
        page.on(
            "console",
            lambda message: (
                complaints.append(message.text) if "Content Security Policy" in message.text else None
            ),
        )
        return page

    yield open_page
    for profile in profiles:
        profile.close()
    assert complaints == []


def sign_in(page: Page, site: str, username: str) -> None:
    """Signs a person in by the session, without the sign-in page: its throttling and hashing have tests of their own."""
    from django.contrib.auth import BACKEND_SESSION_KEY, HASH_SESSION_KEY, SESSION_KEY
    from django.contrib.sessions.backends.db import SessionStore

    from tests import people

    person = people.person(username)
    session = SessionStore()
    session[SESSION_KEY] = str(person.pk)
    session[BACKEND_SESSION_KEY] = "django.contrib.auth.backends.ModelBackend"
    session[HASH_SESSION_KEY] = person.get_session_auth_hash()
    session.save()
    assert session.session_key
    page.context.add_cookies([{"name": "sessionid", "value": session.session_key, "url": site}])


def faults(page: Page, viewport: dict[str, int], accessibility: Callable[[Page], list[str]]) -> list[str]:
    """What is wrong with a page whatever it is about: no single heading, wider than the screen, or a finding of axe."""
    found = [] if page.locator("h1").count() == 1 else ["not one h1"]
    width = page.evaluate("document.documentElement.scrollWidth")
    if width > viewport["width"]:
        found.append(f"{width} wide")
    return found + accessibility(page)


@pytest.fixture
def accessibility() -> Callable[[Page], list[str]]:
    """The serious and critical findings of axe-core on a page, one line each; none is what is wanted."""
    from axe_playwright_python.sync_playwright import Axe

    def findings(page: Page) -> list[str]:
        found = Axe().run(page).response["violations"]
        return [
            f"{one['id']}: {one['help']} at {[node['target'] for node in one['nodes']][:5]}"
            for one in found
            if one["impact"] in {"serious", "critical"}
        ]

    return findings
