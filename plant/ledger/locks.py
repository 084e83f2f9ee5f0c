"""Triggers that refuse UPDATE and DELETE on every append-only table, on SQLite and on PostgreSQL.

They are put in place at the end of every ``migrate`` and checked by ``verify_records``. Nothing in the program lifts
them; the test suite does, around its own flush.
"""

from __future__ import annotations

from typing import Any

from django.apps import apps
from django.db import connections
from django.db.backends.base.base import BaseDatabaseWrapper

from plant.ledger import models


def tables() -> list[str]:
    """All append-only tables, from the models themselves."""
    return sorted(
        model._meta.db_table for model in apps.get_models() if issubclass(model, models.AppendOnly) and not model._meta.abstract
    )


def install(connection: BaseDatabaseWrapper, wanted: list[str]) -> None:
    """Puts the locks on the named tables; those already there stay."""
    present = set(connection.introspection.table_names())
    with connection.cursor() as cursor:
        if connection.vendor == "postgresql":
            cursor.execute(
                "CREATE OR REPLACE FUNCTION ledger_refuse() RETURNS trigger LANGUAGE plpgsql AS "
                "$$ BEGIN RAISE EXCEPTION 'append-only: rows of this table are never changed or removed'; END $$"
            )
        for table in wanted:
            if table not in present:
                continue
            for statement in _statements(connection.vendor, table):
                cursor.execute(statement)


def _statements(vendor: str, table: str) -> list[str]:
    if vendor == "postgresql":
        return [
            f'CREATE OR REPLACE TRIGGER lock_{table} BEFORE UPDATE OR DELETE OR TRUNCATE ON "{table}" '
            f"FOR EACH STATEMENT EXECUTE FUNCTION ledger_refuse()"
        ]
    return [
        f'CREATE TRIGGER IF NOT EXISTS lock_{table}_{verb.lower()} BEFORE {verb} ON "{table}" '
        f"BEGIN SELECT RAISE(ABORT, 'append-only: rows of this table are never changed or removed'); END"
        for verb in ("UPDATE", "DELETE")
    ]


def missing(connection: BaseDatabaseWrapper) -> list[str]:
    """Append-only tables whose locks are not in place."""
    with connection.cursor() as cursor:
        if connection.vendor == "postgresql":
            cursor.execute("SELECT tgname FROM pg_trigger WHERE NOT tgisinternal AND tgenabled <> 'D'")
        else:
            cursor.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'")
        there = {name for (name,) in cursor.fetchall()}
    if connection.vendor == "postgresql":
        return [table for table in tables() if f"lock_{table}" not in there]
    return [table for table in tables() if not {f"lock_{table}_update", f"lock_{table}_delete"} <= there]


def after_migrate(sender: Any, using: str, **kwargs: Any) -> None:
    """Django calls this for each app at the end of migrate."""
    own = {model._meta.db_table for model in sender.get_models()}
    install(connections[using], [table for table in tables() if table in own])
