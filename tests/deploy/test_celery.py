"""With a broker: beat and a worker, real processes, on a real PostgreSQL and real servers of the Redis protocol.

Everything is tried with the wheel's server and with the system's (Debian's redis-server).
"""

import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import psycopg
import pytest

from tests import services

pytestmark = [pytest.mark.service, pytest.mark.slow]
ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module", params=services.BROKER_SOURCES)
def broker(request: pytest.FixtureRequest) -> Iterator[services.Broker]:
    server = services.broker_from(request.param)
    yield server
    server.remove()


@pytest.fixture(scope="module")
def environment(
    postgres: services.Postgres, broker: services.Broker, tmp_path_factory: pytest.TempPathFactory
) -> dict[str, str]:
    """Settings by environment as on a server, on a migrated database of its own."""
    here = {
        "PATH": os.environ["PATH"],
        "DJANGO_SETTINGS_MODULE": "deploy.settings.development",
        "WEIRBOOK_DATA": str(tmp_path_factory.mktemp("data")),
        "DATABASE_URL": postgres.url,
        "REDIS_URL": broker.url,
    }
    subprocess.run([sys.executable, "manage.py", "migrate", "--verbosity", "0"], cwd=ROOT, env=here, check=True, timeout=120)
    return here


@pytest.fixture
def celery(environment: dict[str, str]) -> Iterator[Callable[..., subprocess.Popen[bytes]]]:
    """Starts Celery processes, and ends them after the test."""
    running = []

    def start(*words: str) -> subprocess.Popen[bytes]:
        process = subprocess.Popen(
            [sys.executable, "-m", "celery", "--app", "deploy.celery:app", *words],
            cwd=ROOT,
            env=environment,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
            start_new_session=True,
        )
        running.append(process)
        return process

    yield start
    for process in running:
        process.terminate()
    for process in running:
        try:
            process.wait(20)
        except subprocess.TimeoutExpired:
            os.killpg(process.pid, signal.SIGKILL)
            process.wait()


def add_job(url: str, key: str) -> None:
    """A row of a kind that nobody does: trying it leaves a trace, and nothing else changes."""
    with psycopg.connect(url.replace("postgres://", "postgresql://", 1)) as connection:
        connection.execute(
            "INSERT INTO jobs_job (kind, key, arguments, state, run_after, created_at, attempts, owner, progress, error)"
            " VALUES ('trial', %s, %s, 'queued', now(), now(), 0, '', '', '')",
            [key, json.dumps({})],
        )


def attempts(url: str, key: str) -> int:
    with psycopg.connect(url.replace("postgres://", "postgresql://", 1)) as connection:
        row = connection.execute("SELECT attempts FROM jobs_job WHERE key = %s", [key]).fetchone()
    assert row is not None
    return int(row[0])


def wait_for(found: Callable[[], bool], seconds: float) -> None:
    end = time.monotonic() + seconds
    while not found():
        assert time.monotonic() < end, f"not seen within {seconds} s"
        time.sleep(0.1)


def test_rows_are_worked_off_and_survive_a_broker_that_dies(celery, environment, broker, tmp_path):
    url = environment["DATABASE_URL"]
    keys = [f"{name}, {broker.url}" for name in ("one", "two", "three")]
    for key in keys:
        add_job(url, key)
    celery("worker", "--concurrency", "1", "--without-gossip", "--without-mingle")
    # Two beats: what they send twice finds the row taken.
    celery("beat", "--schedule", str(tmp_path / "beat-1"), "--max-interval", "1")
    celery("beat", "--schedule", str(tmp_path / "beat-2"), "--max-interval", "1")
    wait_for(lambda: all(attempts(url, key) for key in keys), 40)
    assert [attempts(url, key) for key in keys] == [1, 1, 1]

    broker.kill()
    late = f"while the broker was away, {broker.url}"
    add_job(url, late)
    time.sleep(2)
    broker.start()
    wait_for(lambda: attempts(url, late) == 1, 60)


def test_another_worker_carries_on_after_one_is_killed(celery, environment):
    url = environment["DATABASE_URL"]
    first = celery("worker", "--concurrency", "1")
    time.sleep(1)
    os.killpg(first.pid, signal.SIGKILL)
    first.wait()
    key = f"after the kill, {environment['REDIS_URL']}"
    add_job(url, key)
    celery("worker", "--concurrency", "1", "--beat", "--schedule", environment["WEIRBOOK_DATA"] + "/beat")
    wait_for(lambda: attempts(url, key) == 1, 40)
