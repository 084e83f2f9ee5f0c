"""A day's work on two web processes, two workers, beat, PostgreSQL and a Redis-protocol server, each of which is killed.

Nothing may be lost and nothing doubled; the figures are printed.
"""

import os
from datetime import UTC, datetime

import pytest

from tests import services
from tests.operations.site import Day, Site, kill_all_of, wait_for

pytestmark = [pytest.mark.service, pytest.mark.slow]
PEOPLE = 4
TAKEOVER_S = 80
"""Lease of a minute, and the few seconds until somebody looks."""

ENQUEUE = """
import django; django.setup()
from plant import clock; from plant.jobs import actions; from plant.ledger import queries
for number in range({first}, {last}):
    actions.enqueue(kind="trial", key=f"trial {{number}}", now=clock.now(), book=queries.book("TST"), arguments={{"number": number}})
"""


class Link:
    """Looks into the database without starting a process for each look."""

    def __init__(self, url: str) -> None:
        self.url = url.replace("postgres://", "postgresql://", 1)

    def rows(self, query: str) -> list[tuple]:
        import psycopg

        with psycopg.connect(self.url, connect_timeout=2) as link:
            return link.execute(query).fetchall()


def running_in(site: Site, link: Link, worker) -> list[str]:
    """Keys of the jobs that this worker's processes are doing now."""
    found = []
    for key, owner in link.rows("SELECT key, owner FROM jobs_job WHERE kind = 'trial' AND state = 'running'"):
        try:
            if os.getpgid(int(owner.split("-")[-2])) == worker.pid:
                found.append(key)
        except ProcessLookupError:
            continue
    return found


@pytest.fixture
def servers():
    try:
        postgres, broker = services.Postgres(durable=True), services.Broker()
    except services.NotHere as error:
        services.missing(str(error))
    yield postgres, broker
    broker.remove()
    postgres.remove()


def test_nothing_is_lost_and_nothing_doubled(servers, figure):
    postgres, broker = servers
    site = Site(database_url=postgres.url, redis_url=broker.url, more={"CELERY_APP": "tests.operations.trial:app"})
    link = Link(postgres.url)
    try:
        ports = [services.free_port(), services.free_port()]
        web = [site.web(port) for port in ports]
        workers = [site.worker("a"), site.worker("b")]
        site.beat()
        day = Day(ports)
        day.begin(PEOPLE, pause_s=0.2)

        # A worker is killed in the middle of a job.
        site.python(ENQUEUE.format(first=0, last=6))
        wait_for(lambda: running_in(site, link, workers[0]), 60, "worker a at work")
        (killed_job,) = running_in(site, link, workers[0])
        killed_at = datetime.now(UTC)
        kill_all_of(workers[0])
        site.worker("c")
        assert link.rows(f"SELECT state FROM jobs_job WHERE key = '{killed_job}'") == [("running",)]

        # The broker is killed; work is asked for meanwhile, and rounds go on.
        answered = len(day.taken)
        broker.kill()
        site.python(ENQUEUE.format(first=6, last=10))
        wait_for(lambda: len(day.taken) >= answered + PEOPLE, 60, "rounds taken without a broker")
        broker.start()

        # One of the two web processes is killed in the middle of rounds.
        before = day.answers["0"]
        kill_all_of(web[0])
        wait_for(lambda: day.answers["0"] > before, 20, "a round cut off")
        answered = len(day.taken)
        wait_for(lambda: len(day.taken) >= answered + PEOPLE, 60, "rounds taken by the other web process")
        site.web(ports[0])

        # The database is restarted.
        told_before = len(day.seen)
        postgres.stop()
        wait_for(lambda: len(day.seen) > told_before + 1, 30, "people told")
        postgres.start()
        told = [text for text in day.seen[told_before:] if text]
        answered = len(day.taken)
        wait_for(lambda: len(day.taken) >= answered + PEOPLE, 60, "rounds taken after the restart")

        day.end()
        waiting = "SELECT key, state, error FROM jobs_job WHERE kind = 'trial' AND state <> 'done'"
        wait_for(lambda: not link.rows(waiting), TAKEOVER_S + 30, "all jobs done")
        ((attempts, started_at),) = link.rows(f"SELECT attempts, started_at FROM jobs_job WHERE key = '{killed_job}'")
        takeover_s = (started_at - killed_at).total_seconds()

        tried, lost, doubled = day.account(site)
        jobs = link.rows("SELECT client_id, count(*) FROM ledger_entry WHERE kind = 'trial' GROUP BY client_id")
        figure(
            f"a bad day: {tried} rounds tried, {lost} lost, {doubled} doubled; {day.spread()}; answers {dict(day.answers)};"
            f" 10 jobs tried, {10 - len(jobs)} lost, {sum(count - 1 for _, count in jobs)} doubled;"
            f" the killed worker's job was taken over after {takeover_s:.0f} s"
        )
        assert (lost, doubled) == (0, 0)
        assert sorted(jobs) == sorted((f"trial {number}", 1) for number in range(10))
        assert attempts == 2
        assert takeover_s < TAKEOVER_S
        assert told
        assert all("database" in text and "kept" in text for text in told), told[0][:500]
        assert "All as written" in site.manage("verify_records").stdout
        assert link.rows("SELECT kind, key, error FROM jobs_job WHERE state = 'failed'") == []
    finally:
        site.close()
