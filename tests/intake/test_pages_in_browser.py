"""The other pages of the door in Chromium, in both themes and at three sizes: nothing serious for axe, nothing too wide."""

from __future__ import annotations

import pytest

from plant import clock
from plant.intake import records
from plant.readings.models import Reading
from tests import browser, people

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def doubtful(sheet):
    """A works with two records of one sample."""
    book = people.small_works()
    path = sheet(
        "ENTRY,2026-03-28T07:00,pH,7.3,", "ENTRY,2026-03-28T07:00,pH,7.9,", header="site,timestamp,parameter,value,unit"
    )
    records.bring_in(book=book, sheet=records.open_file(path), wanted=records.Wanted(), by=None, now=clock.now(), judge=False)
    return Reading.objects.get(typed="7.9").ref


def faults(page, accessibility):
    wide = page.evaluate("document.documentElement.scrollWidth > window.innerWidth")
    return accessibility(page) + (["wider than the screen"] if wide else [])


@pytest.mark.parametrize(
    ("size", "theme"), [(browser.TABLET, "light"), (browser.DESK, "dark"), (browser.PHONE, "light"), (browser.PHONE, "dark")]
)
def test_pages_have_nothing_serious(live_server, new_page, accessibility, doubtful, sheet, size, theme):
    page = new_page(viewport=size, color_scheme=theme)
    browser.sign_in(page, live_server.url, "sam")
    at = f"{live_server.url}/w/TST"
    found = {}
    for name in (f"reading/{doubtful}", "transfer", "import", "delivery"):
        page.goto(f"{at}/{name}/")
        found[name] = faults(page, accessibility)
    page.select_option("#id_vessel", "NAOH-BULK")
    page.select_option("#id_product", "HYPO")
    page.fill("#id_quantity", "90000")
    page.check("#id_checked")
    page.get_by_role("button", name="Record the delivery").click()
    page.get_by_text("It has already been unloaded").wait_for()
    found["delivery refused"] = faults(page, accessibility)
    path = sheet(
        "ENTRY,2026-03-28T08:00,pH,7.3,", "GONE,2026-03-28T08:00,pH,7.9,", header="site,timestamp,parameter,value,unit"
    )
    page.goto(f"{at}/import/")
    page.set_input_files("#file", str(path))
    page.get_by_role("button", name="Look at it first").click()
    page.get_by_text("Nothing has been written yet").wait_for()
    found["import looked at"] = faults(page, accessibility)
    assert {name: faulty for name, faulty in found.items() if faulty} == {}
