"""The servers that other tests rely on start, answer, stop and start again, from every source on this machine."""

import psycopg
import pytest
import redis

from tests import services

pytestmark = pytest.mark.service


@pytest.mark.parametrize("source", services.BROKER_SOURCES)
def test_a_redis_protocol_server_restarts(source):
    server = services.broker_from(source)
    try:
        with redis.Redis.from_url(server.url) as client:
            assert client.ping()
            assert int(client.info()["redis_version"].split(".")[0]) >= 6
        server.kill()
        server.start()
        with redis.Redis.from_url(server.url) as client:
            assert client.ping()
    finally:
        server.remove()
    assert not server.folder.exists()


def test_postgresql_keeps_what_was_committed():
    server = services.Postgres(durable=True)
    address = server.url.replace("postgres://", "postgresql://", 1)
    try:
        with psycopg.connect(address) as connection:
            assert connection.info.server_version >= 150_000
            connection.execute("CREATE TABLE kept (reading float)")
            connection.execute("INSERT INTO kept VALUES (0.42)")
        server.kill()
        server.start()
        with psycopg.connect(address) as connection:
            assert connection.execute("SELECT reading FROM kept").fetchall() == [(0.42,)]
    finally:
        server.remove()
    assert not server.folder.exists()


def test_a_server_that_ends_at_once_is_reported(monkeypatch):
    with pytest.raises(RuntimeError, match="before it was ready"):
        services.Broker("/bin/false")
