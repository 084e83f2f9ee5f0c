"""Tests that commit leave an empty database with its locks on; outside that flush the locks hold."""

import datetime as dt
import uuid

import pytest
from django.db import DatabaseError, connection, transaction

from plant.ledger import actions, locks
from plant.ledger.models import Entry

NOW = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)


@pytest.mark.django_db(transaction=True)
@pytest.mark.parametrize("time", ["first", "second"])
def test_each_starts_empty_and_locked(time):
    assert Entry.objects.count() == 0
    assert locks.missing(connection) == []
    book = actions.open_book(code="KFW", now=NOW)
    with transaction.atomic():
        actions.append(
            book=book, client_id=str(uuid.uuid4()), kind="trial", received={}, rows=[], by=None, now=NOW
        )
    table = Entry._meta.db_table
    for statement in (f"UPDATE {table} SET kind = 'other'", f"DELETE FROM {table}"):
        with pytest.raises(DatabaseError, match="append-only"), connection.cursor() as cursor:
            cursor.execute(statement)
    assert Entry.objects.count() == 1
