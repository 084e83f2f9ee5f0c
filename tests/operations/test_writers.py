"""Eight people write at once into SQLite: nobody is told that the database is locked."""

import time

import pytest

from tests import services
from tests.operations.site import Day, Site

pytestmark = [pytest.mark.service, pytest.mark.slow]
SECONDS = 12


def test_eight_writers_on_sqlite(figure):
    site = Site()
    try:
        port = services.free_port()
        site.web(port, workers=2)
        site.start("manage.py", "work", name="work")
        day = Day([port])
        day.begin(8)
        time.sleep(SECONDS)
        day.end()
        tried, lost, doubled = day.account(site)
        figure(
            f"8 writers on SQLite for {SECONDS} s: {tried} rounds tried, {lost} lost, {doubled} doubled; {day.spread()};"
            f" answers {dict(day.answers)}"
        )
        assert set(day.answers) == {"201"}
        assert (lost, doubled) == (0, 0)
        assert tried > 8
        assert "database is locked" not in site.log(f"web-{port}") + "".join(day.seen)
    finally:
        site.close()
