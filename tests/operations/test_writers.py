"""Eight people write at once into SQLite: nobody is told that the database is locked."""

import pytest

from tests.benchmarks import writers

pytestmark = [pytest.mark.service, pytest.mark.slow]
SECONDS = 12
"""The whole minute: python -m tests.benchmarks.writers"""


def test_eight_writers_on_sqlite(figure):
    day, account, said = writers.trial(SECONDS)
    figure(writers.in_words(day, account, SECONDS))
    tried, lost, doubled = account
    assert set(day.answers) == {"201"}
    assert (lost, doubled) == (0, 0)
    assert tried > 8
    assert "database is locked" not in said
