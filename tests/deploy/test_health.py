"""The two pages for machines, and whose address a request is taken to have."""

import pytest
from django.db import DatabaseError
from django.test import RequestFactory

from deploy import health, proxy


def test_alive_needs_nobody_signed_in_and_no_database(client):
    answer = client.get("/healthz")
    assert (answer.status_code, answer.content) == (200, b"alive\n")
    assert "no-store" in answer["Cache-Control"]


@pytest.mark.django_db
def test_ready_with_every_migration(client):
    assert client.get("/readyz").status_code == 200


@pytest.mark.django_db
def test_not_ready_while_a_migration_waits(client, monkeypatch):
    monkeypatch.setattr(health.MigrationExecutor, "migration_plan", lambda self, targets: [("one", False)])
    answer = client.get("/readyz")
    assert (answer.status_code, answer.content) == (503, b"1 migrations to apply\n")


def test_not_ready_without_a_database(client, monkeypatch):
    def gone(connection):
        raise DatabaseError("the address and password of the server")

    monkeypatch.setattr(health, "MigrationExecutor", gone)
    answer = client.get("/readyz")
    assert answer.status_code == 503
    assert b"password" not in answer.content


def test_only_questions_are_answered(client):
    assert client.post("/healthz").status_code == 405


@pytest.mark.parametrize(
    ("forwarded", "address"),
    [
        (None, "127.0.0.1"),
        ("203.0.113.7", "203.0.113.7"),
        # What a browser claims comes first, what the proxy saw comes last.
        ("10.0.0.1, 203.0.113.7", "203.0.113.7"),
    ],
)
def test_the_address_is_the_one_the_proxy_saw(forwarded, address):
    headers = {} if forwarded is None else {"X-Forwarded-For": forwarded}
    assert proxy.client_address(RequestFactory().get("/", headers=headers)) == address
