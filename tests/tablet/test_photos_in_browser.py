"""Photos without a network, in Chromium: shrunk, kept over a reload, sent once after their line, shown beside the reading."""

from __future__ import annotations

import io

import pytest
from PIL import Image

from plant.files import queries
from plant.files.models import Document
from plant.ledger import verify
from plant.readings.models import Reading
from tests import browser as chromium
from tests.tablet import walked

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
KEY = "ENTRY:pH"


@pytest.fixture
def page(live_server, new_page, settings, tmp_path):
    settings.WEIRBOOK_FILES = tmp_path / "files"
    walked.book()
    made = new_page(viewport=chromium.TABLET)
    chromium.sign_in(made, live_server.url, "olga")
    made.goto(live_server.url + "/w/TST/round/")
    walked.ready(made)
    return made


def photograph(page, key=KEY):
    """A picture as a camera makes it: 12 megapixels, with its place written into it."""
    out = io.BytesIO()
    exif = Image.Exif()
    exif[0x010E] = "taken at the works"
    Image.effect_noise((4000, 3000), 40).convert("RGB").save(out, "JPEG", exif=exif)
    line = page.locator(f'li.line[data-key="{key}"]')
    line.locator("summary").click()
    line.get_by_label("Photo of the gauge").set_input_files(
        {"name": "IMG.jpg", "mimeType": "image/jpeg", "buffer": out.getvalue()}
    )
    return line


def test_a_photo_taken_without_a_network_goes_with_its_value_and_is_shown_beside_it(page, live_server):
    page.context.set_offline(True)
    line = photograph(page)
    line.get_by_role("img", name="Photo 1").wait_for()
    page.reload()
    page.wait_for_selector("form[data-ready=yes]")
    line.get_by_role("img", name="Photo 1").wait_for()
    assert line.get_by_text("goes with the value").is_visible()
    walked.field(page, KEY).fill("8.1")
    page.click("#send")
    line.get_by_text("waiting to be sent").last.wait_for()
    page.wait_for_function("() => document.getElementById('queue-count').textContent.includes('1 photo')")
    assert Document.objects.count() == 0
    page.context.set_offline(False)
    line.get_by_text("1 photo in the book").wait_for(timeout=15_000)

    kept = Document.objects.get()
    reading = Reading.objects.get()
    assert kept.about == reading.entry.client_id
    assert (kept.site, kept.parameter) == ("ENTRY", "pH")
    with Image.open(queries.path_of(kept.sha256)) as picture:
        assert max(picture.size) == 1600
        assert dict(picture.getexif()) == {}
    assert list(verify.everything()) == []
    page.goto(f"{live_server.url}/w/TST/reading/{reading.ref}/")
    shown = page.get_by_role("region", name="Photos and documents").get_by_role("img")
    assert shown.evaluate("picture => picture.decode().then(() => picture.naturalWidth)") == 1600


def test_a_photo_after_the_value_is_sent_goes_to_the_value_in_the_book(page):
    walked.field(page, KEY).fill("8.1")
    page.click("#send")
    page.locator(f'li.line[data-key="{KEY}"].sent').wait_for()
    page.reload()
    walked.ready(page)
    line = photograph(page)
    line.get_by_text("1 photo in the book").wait_for(timeout=15_000)
    assert Document.objects.get().about == Reading.objects.get().ref


def test_a_photo_can_be_taken_back_before_it_is_sent(page):
    line = photograph(page)
    line.get_by_role("button", name="Remove photo").click()
    line.get_by_role("img", name="Photo 1").wait_for(state="detached")
    walked.field(page, KEY).fill("8.1")
    page.click("#send")
    page.locator(f'li.line[data-key="{KEY}"].sent').wait_for()
    assert Document.objects.count() == 0


def test_what_is_no_picture_is_said_and_harms_nothing(page):
    line = page.locator(f'li.line[data-key="{KEY}"]')
    line.locator("summary").click()
    line.get_by_label("Photo of the gauge").set_input_files(
        {"name": "a.jpg", "mimeType": "image/jpeg", "buffer": b"no picture"}
    )
    walked.wait_for(page, "no picture this device can read")
    walked.field(page, KEY).fill("8.1")
    page.click("#send")
    page.locator(f'li.line[data-key="{KEY}"].sent').wait_for()
