"""A database that is away is told apart from a page that is broken."""

import pytest
from django.db import OperationalError
from django.test import Client

from deploy import health


@pytest.mark.parametrize(
    ("problem", "status", "words"),
    [
        (OperationalError("server closed the connection"), 503, "The database does not answer"),
        (RuntimeError("something else"), 500, "Something broke"),
    ],
)
def test_what_people_are_told(problem, status, words, monkeypatch):
    def fail(*given, **more):
        raise problem

    monkeypatch.setattr(health, "MigrationExecutor", fail)
    monkeypatch.setattr(health, "DatabaseError", ZeroDivisionError)
    answer = Client(raise_request_exception=False).get("/readyz")
    assert answer.status_code == status
    assert words in answer.content.decode()
    assert "something else" not in answer.content.decode()
