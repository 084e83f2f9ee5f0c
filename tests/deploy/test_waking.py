"""A broker that is up wakes workers; one that is down or never answers holds nobody up. Measured."""

import datetime as dt
import socket
import threading
import time
from collections.abc import Iterator

import pytest
import redis
from celery import Celery
from django.db import transaction

from deploy import waking
from plant.jobs import actions, models, registry
from tests import services

NOW = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)
MOST_S = 0.1
"""What asking for a job may cost the one who asks; sending through a dead broker takes seconds."""


def waker_to(url: str, tried: threading.Event) -> waking.Waker:
    """A waker that sends as the site does, through the broker at this address."""
    app = Celery("trial", set_as_current=False)
    app.config_from_object("django.conf:settings", namespace="CELERY")
    app.conf.broker_url = url

    def send() -> None:
        try:
            app.send_task("weirbook.work", expires=60)
        finally:
            tried.set()

    return waking.Waker(send, rest_s=0.1)


def ask(key: str) -> float:
    """Asks for a job in a transaction, as a request does; the seconds it took from before to after the commit."""
    began = time.perf_counter()
    with transaction.atomic():
        actions.enqueue(kind="note", key=key, now=NOW)
    return time.perf_counter() - began


@pytest.fixture
def tried() -> threading.Event:
    return threading.Event()


@pytest.fixture
def mute() -> Iterator[str]:
    """Something that accepts connections and never says a word."""
    with socket.create_server(("127.0.0.1", 0), backlog=20) as listening:
        yield f"redis://127.0.0.1:{listening.getsockname()[1]}/0"


@pytest.mark.service
@pytest.mark.django_db(transaction=True)
def test_a_running_broker_is_told(broker, tried, monkeypatch):
    monkeypatch.setattr(registry, "_wakers", [waker_to(broker.url, tried).wake])
    with redis.Redis.from_url(broker.url) as client:
        client.delete("celery")
        took_s = ask("k")
        assert tried.wait(10)
        end = time.monotonic() + 5
        while not client.llen("celery") and time.monotonic() < end:
            time.sleep(0.02)
        assert client.llen("celery") == 1
        client.delete("celery")
    assert took_s < MOST_S


@pytest.mark.service
@pytest.mark.django_db(transaction=True)
def test_a_stopped_broker_holds_nobody_up(tried, monkeypatch, figure):
    try:
        broker = services.Broker()
    except services.NotHere as error:
        services.missing(str(error))
    broker.kill()
    monkeypatch.setattr(registry, "_wakers", [waker_to(broker.url, tried).wake])
    took_s = [ask(f"k{number}") for number in range(20)]
    assert tried.wait(20), "nothing was ever sent: this test shows nothing"
    broker.remove()
    figure(f"asking for work 20 times with the broker stopped: longest {max(took_s) * 1000:.1f} ms")
    assert max(took_s) < MOST_S
    assert models.Job.objects.count() == 20


@pytest.mark.django_db(transaction=True)
def test_a_mute_broker_holds_nobody_up(mute, tried, monkeypatch, figure):
    waker = waker_to(mute, tried)
    monkeypatch.setattr(registry, "_wakers", [waker.wake])
    began = time.perf_counter()
    took_s = [ask(f"k{number}") for number in range(20)]
    assert tried.wait(30), "nothing was ever sent: this test shows nothing"
    sending_s = time.perf_counter() - began
    figure(
        f"asking for work 20 times with a mute broker: longest {max(took_s) * 1000:.1f} ms; sending gave up after {sending_s:.1f} s"
    )
    assert sending_s > 1, "the socket was not mute: this test shows nothing"
    assert max(took_s) < MOST_S
    assert models.Job.objects.count() == 20


def test_many_wishes_are_few_messages():
    sent, go = [], threading.Event()

    def send() -> None:
        sent.append(1)
        go.wait(5)

    waker = waking.Waker(send)
    for _ in range(100):
        waker.wake()
    go.set()
    time.sleep(0.2)
    assert 1 <= len(sent) <= 2
