"""Eight people write at once into SQLite, through two web processes: how long each waits, and whether anything was refused.

    python -m tests.benchmarks.writers [seconds]

A minute by default. tests/operations/test_writers.py runs the same for a shorter time on every run of the suite.
"""

from __future__ import annotations

import sys
import time

from tests import services
from tests.operations.site import Day, Site

WRITERS = 8


def trial(seconds: float) -> tuple[Day, tuple[int, int, int], str]:
    """The day as it went; rounds tried, lost and doubled; and all that the server logged and answered besides."""
    site = Site()
    try:
        port = services.free_port()
        site.web(port, workers=2)
        site.start("manage.py", "work", name="work")
        day = Day([port])
        day.begin(WRITERS)
        time.sleep(seconds)
        day.end()
        return day, day.account(site), site.log(f"web-{port}") + site.log("work") + "".join(day.seen)
    finally:
        site.close()


def in_words(day: Day, account: tuple[int, int, int], seconds: float) -> str:
    tried, lost, doubled = account
    return (
        f"{WRITERS} writers on SQLite for {seconds:.0f} s: {tried} rounds tried, {lost} lost, {doubled} doubled;"
        f" {day.spread()}; answers {dict(day.answers)}"
    )


if __name__ == "__main__":
    length = float(sys.argv[1]) if sys.argv[1:] else 60.0
    found, counted, said = trial(length)
    print(in_words(found, counted, length))
    print(f"“database is locked”: {said.count('database is locked')} times in logs and answers")
