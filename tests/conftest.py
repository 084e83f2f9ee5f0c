"""What every test may use. Servers and the data folder: services.py; Chromium: browser.py."""

from collections.abc import Iterator

import pytest
from django.db import connection
from django.test import TransactionTestCase

from plant.ledger import locks


def _lift_locks() -> None:
    with connection.cursor() as cursor:
        if connection.vendor == "postgresql":
            cursor.execute(
                "SELECT tgname, tgrelid::regclass::text FROM pg_trigger WHERE NOT tgisinternal AND starts_with(tgname, 'lock_')"
            )
            drops = [f"DROP TRIGGER {name} ON {table}" for name, table in cursor.fetchall()]
        else:
            cursor.execute("SELECT name FROM sqlite_master WHERE type = 'trigger' AND name GLOB 'lock_*'")
            drops = [f"DROP TRIGGER {name}" for (name,) in cursor.fetchall()]
        for drop in drops:
            cursor.execute(drop)


@pytest.fixture(scope="session", autouse=True)
def _records_are_cleared_after_tests() -> Iterator[None]:
    """Tests that commit end in a flush, which the locks on records refuse: lift them for it, and only for it."""
    flush = TransactionTestCase._fixture_teardown  # type: ignore[attr-defined]

    def flush_without_locks(case: TransactionTestCase) -> None:
        _lift_locks()
        try:
            flush(case)
        finally:
            locks.install(connection, locks.tables())

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(TransactionTestCase, "_fixture_teardown", flush_without_locks)
        yield
