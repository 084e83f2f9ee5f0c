"""The rights of deploy/services/roles.sql: the program can add a record and never change one."""

import re
from pathlib import Path

import pytest
from django.apps import apps
from django.db import connection

from plant.ledger import locks

ROLES = (Path(__file__).parents[2] / "deploy" / "services" / "roles.sql").read_text()
# Filled by `migrate` alone.
FIXED = {"auth_group", "auth_group_permissions", "auth_permission", "django_content_type"}


def changeable() -> set[str]:
    array = ROLES.partition("FOREACH name IN ARRAY ARRAY[")[2].partition("]")[0]
    return set(re.findall(r"'(\w+)'", array))


def test_every_table_has_its_place():
    tables = {model._meta.db_table for model in apps.get_models(include_auto_created=True)}
    assert tables - set(locks.tables()) - FIXED == changeable() & tables
    assert changeable() & set(locks.tables()) == set()
    assert changeable() <= tables


@pytest.mark.django_db
def test_the_role_adds_and_never_changes():
    if connection.vendor != "postgresql":
        pytest.skip("rights of roles are PostgreSQL's; the run on PostgreSQL tries them")

    def may(table: str, right: str) -> bool:
        with connection.cursor() as cursor:
            cursor.execute("SELECT has_table_privilege('weirbook', %s, %s)", [table, right])
            return bool(cursor.fetchone()[0])

    with connection.cursor() as cursor:
        for _ in range(2):
            cursor.execute(ROLES)
    for table in locks.tables():
        assert [may(table, right) for right in ("SELECT", "INSERT")] == [True, True]
        assert [may(table, right) for right in ("UPDATE", "DELETE", "TRUNCATE")] == [False, False, False]
    for table in changeable():
        assert [may(table, right) for right in ("SELECT", "INSERT", "UPDATE", "DELETE")] == [True] * 4
    assert not may("django_migrations", "INSERT")
