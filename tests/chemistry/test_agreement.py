"""Every comparison with figures from outside stays within its limit; see agreement.py."""

import pytest

from chemistry import checks, sources
from tests.chemistry import agreement

ROWS = agreement.rows()


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.function} {row.quantity} {row.checked_against}")
def test_agreement(row):
    assert row.worst <= row.allowed, row


def test_every_source_is_cited():
    assert {key for row in ROWS for key in row.sources} <= set(sources.SOURCES)


def test_what_rests_on_memory_says_so():
    for row in ROWS:
        if any("from memory" in sources.citation(key) for key in row.sources):
            assert row.from_memory, row


@pytest.mark.parametrize("key", agreement.CHECKS)
def test_the_table_of_checks_states_what_is_measured(key):
    (stated,) = [check for check in checks.checks() if check.key == key]
    measured = agreement.worst_of(key, ROWS)
    assert measured <= stated.worst_difference * 1.005
    assert measured > 0.7 * stated.worst_difference, "the table is worse than the truth: write the better figure"
