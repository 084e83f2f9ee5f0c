"""Every comparison with figures from outside stays within its limit; see agreement.py."""

import pytest

from chemistry import sources
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
