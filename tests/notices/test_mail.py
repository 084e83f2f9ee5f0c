"""Mail about deviations, through a mail server that listens on this machine, dies and comes back."""

from __future__ import annotations

import contextlib
import datetime as dt
import email
import email.policy
import socketserver
import threading

import pytest

from plant import clock
from plant.deviations import queries as deviations
from plant.jobs import running
from plant.jobs.actions import claim
from plant.jobs.models import Job
from plant.notices import mailing
from plant.notices.models import Notice
from plant.works import actions as works_actions
from tests import people, services
from tests.board import books

pytestmark = pytest.mark.django_db(transaction=True)
NOW = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)


class Speaker(socketserver.StreamRequestHandler):
    """As much of SMTP (RFC 5321) as it takes to receive a mail."""

    def handle(self) -> None:
        def say(text: str) -> None:
            self.wfile.write(f"{text}\r\n".encode())

        say("220 here")
        while line := self.rfile.readline():
            word = line[:4].upper()
            if word == b"DATA":
                say("354 go on")
                lines = iter(self.rfile.readline, b".\r\n")
                self.server.mails.append(email.message_from_bytes(b"".join(lines), policy=email.policy.default))
                say("250 kept")
            elif word == b"QUIT":
                say("221 bye")
                return
            else:
                say("250 so be it")


@contextlib.contextmanager
def mail_server(port: int, mails: list):
    socketserver.ThreadingTCPServer.allow_reuse_address = True
    with socketserver.ThreadingTCPServer(("127.0.0.1", port), Speaker) as server:
        server.mails = mails
        thread = threading.Thread(target=server.serve_forever, daemon=True)
        thread.start()
        yield
        server.shutdown()
        thread.join()


@pytest.fixture
def book(settings, monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    settings.WEIRBOOK_MAIL = True
    settings.EMAIL_BACKEND = "django.core.mail.backends.smtp.EmailBackend"
    settings.EMAIL_HOST, settings.EMAIL_PORT = "127.0.0.1", services.free_port()
    book = books.with_history(days=3, now=NOW)
    books.raise_one(book, now=NOW)
    state(book, "1", {"name": "Nora", "telephone": "0555 1", "email": "nora@works.example", "digest": True})
    state(book, "2", {"name": "Emil", "email": "emil@works.example", "minutes": 20})
    return book


def state(book, code, value):
    works_actions.state(
        book=book, kind="call", subject=code, value=value, effective_from=NOW - dt.timedelta(days=1), by=people.person("sam"),
        now=NOW, reason="the list",
    )  # fmt: skip


def work(now: dt.datetime) -> None:
    while (job := claim(owner="test", now=now)) is not None:
        running.run(job=job, now=now)


def after(minutes: float) -> dt.datetime:
    return NOW + dt.timedelta(minutes=minutes)


def test_each_is_written_to_once_when_the_turn_comes(book, settings):
    mails: list = []
    with mail_server(settings.EMAIL_PORT, mails):
        for minute in (1, 2, 3):
            mailing.look(now=after(minute))
            work(after(minute))
        assert [mail["To"] for mail in mails] == ["nora@works.example"]
        mailing.look(now=after(25))
        work(after(25))
    assert [mail["To"] for mail in mails] == ["nora@works.example", "emil@works.example"]
    text = mails[0].get_content()
    (view,) = (one for one in deviations.open_ones(book) if one.state == "raised")
    assert view.sentence[:20] in text or view.value in text
    assert f"/w/TST/deviations/{view.ref}/" in text
    assert "Call Nora, 0555 1." in text
    assert "The local regulator's rules govern." in text


def test_a_dead_server_delays_and_loses_nothing(book, settings):
    mailing.look(now=after(1))
    work(after(1))
    assert Notice.objects.get().sent_at is None
    at = 1.0
    for _ in range(8):  # more tries than a job has
        at += 40
        mailing.look(now=after(at))
        work(after(at))
    assert Job.objects.filter(kind=mailing.SEND, state=Job.State.FAILED).exists()
    mails: list = []
    with mail_server(settings.EMAIL_PORT, mails):
        for _ in range(2):
            at += 60
            mailing.look(now=after(at))
            work(after(at))
    assert sorted(mail["To"] for mail in mails) == ["emil@works.example", "nora@works.example"]
    assert not Notice.objects.filter(sent_at=None).exists()


def test_what_is_taken_on_goes_to_nobody_else(book, settings):
    from plant.deviations import actions

    (view,) = (one for one in deviations.open_ones(book) if one.state == "raised")
    actions.acknowledge(book=book, ref=view.ref, by=people.person("olga"), now=NOW)
    mailing.look(now=after(60))
    assert Notice.objects.count() == 0


def test_a_digest_in_the_first_hour_of_the_day_once(book, settings):
    mails: list = []
    morning = dt.datetime(2026, 3, 11, 6, 10, tzinfo=dt.UTC)  # 07:10, ten minutes into the operating day
    with mail_server(settings.EMAIL_PORT, mails):
        for minute in (0, 1, 2):
            mailing.look(now=morning + dt.timedelta(minutes=minute))
            work(morning + dt.timedelta(minutes=minute))
    digests = [mail for mail in mails if "open" in mail["Subject"]]
    assert [mail["To"] for mail in digests] == ["nora@works.example"]


def test_without_a_mail_server_named_nothing_is_made(book, settings):
    settings.WEIRBOOK_MAIL = False
    mailing.look(now=after(60))
    assert Notice.objects.count() == 0
    assert not Job.objects.filter(kind=mailing.SEND).exists()
