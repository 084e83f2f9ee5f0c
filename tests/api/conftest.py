import datetime as dt

import pytest
import time_machine

from tests import people
from tests.api import machines

NOW = dt.datetime(2026, 3, 10, 12, 0, tzinfo=dt.UTC)


@pytest.fixture
def book(db):
    return people.small_works()


@pytest.fixture
def clock_stands():
    """The clock of the tests: it goes on by hand only."""
    with time_machine.travel(NOW, tick=False) as clock:
        yield clock


@pytest.fixture
def machine(book, clock_stands):
    return machines.machine(book)
