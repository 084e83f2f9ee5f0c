"""A whole site of real processes for the tests: web servers, workers, beat, on a database and a broker of their own."""

from __future__ import annotations

import contextlib
import http.client
import itertools
import json
import os
import re
import shutil
import signal
import subprocess
import sys
import tempfile
import threading
import time
import uuid
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any
from urllib.parse import urlencode

from tests import services

ROOT = Path(__file__).resolve().parents[2]
PASSWORD = "water over the weir 7"
MAKE_PEOPLE = "import django; django.setup(); from tests import people; people.small_works()"


class Site:
    """One installation. Every process it starts is ended by `close`, by its handle."""

    def __init__(self, *, database_url: str = "", redis_url: str = "", more: dict[str, str] | None = None) -> None:
        self.folder = Path(tempfile.mkdtemp(prefix="weirbook-site-"))
        self.environment = {
            "PATH": os.environ["PATH"],
            "DJANGO_SETTINGS_MODULE": "deploy.settings.development",
            "WEIRBOOK_DATA": str(self.folder / "data"),
            "PYTHONDONTWRITEBYTECODE": "1",
            **({"DATABASE_URL": database_url} if database_url else {}),
            **({"REDIS_URL": redis_url} if redis_url else {}),
            **(more or {}),
        }
        (self.folder / "data").mkdir()
        (self.folder / "data" / "secret_key").write_text(uuid.uuid4().hex * 2)
        self.processes: list[subprocess.Popen[bytes]] = []
        self.manage("migrate", "--verbosity", "0")
        self.python(MAKE_PEOPLE)

    @property
    def database(self) -> Path:
        """The file, where it is SQLite."""
        return self.folder / "data" / "weirbook.sqlite3"

    def manage(self, *words: str, check: bool = True) -> subprocess.CompletedProcess[str]:
        return self._run([sys.executable, "manage.py", *words], check)

    def python(self, code: str, check: bool = True) -> str:
        return self._run([sys.executable, "-c", code], check).stdout

    def ask(self, expression: str) -> Any:
        """The value of an expression over the models, by way of JSON."""
        code = (
            "import django; django.setup(); import json\n"
            "from django.apps import apps\n"
            "Job, Entry = apps.get_model('jobs.Job'), apps.get_model('ledger.Entry')\n"
            "Reading = apps.get_model('readings.Reading')\n"
            f"print(json.dumps({expression}))"
        )
        return json.loads(self.python(code))

    def _run(self, command: list[str], check: bool) -> subprocess.CompletedProcess[str]:
        ran = subprocess.run(
            command, cwd=ROOT, env=self.environment, capture_output=True, text=True, check=False, timeout=180
        )
        assert not check or ran.returncode == 0, f"{command[1:4]} ended with {ran.returncode}:\n{ran.stdout}\n{ran.stderr}"
        return ran

    def start(self, *command: str, name: str) -> subprocess.Popen[bytes]:
        """A process in a group of its own, with its output in a file."""
        with (self.folder / f"{name}.log").open("ab") as log:
            process = subprocess.Popen(
                [sys.executable, *command],
                cwd=ROOT,
                env=self.environment,
                stdin=subprocess.DEVNULL,
                stdout=log,
                stderr=log,
                start_new_session=True,
            )
        self.processes.append(process)
        return process

    def web(self, port: int, *, workers: int = 1, threads: int = 8) -> subprocess.Popen[bytes]:
        process = self.start(
            *("-m", "gunicorn", "deploy.wsgi:application", "--bind", f"127.0.0.1:{port}", "--worker-class", "gthread"),
            *("--workers", str(workers), "--threads", str(threads), "--graceful-timeout", "5", "--no-control-socket"),
            name=f"web-{port}",
        )

        def answers() -> None:
            with contextlib.closing(http.client.HTTPConnection("127.0.0.1", port, timeout=2)) as link:
                link.request("GET", "/readyz")
                assert link.getresponse().status == 200

        services.wait_until(answers, process)
        return process

    def worker(self, name: str) -> subprocess.Popen[bytes]:
        words = ("worker", "--concurrency", "1", "--hostname", f"{name}@%h", "--without-gossip", "--without-mingle")
        return self.celery(*words, name=name)

    def beat(self, name: str = "beat") -> subprocess.Popen[bytes]:
        return self.celery("beat", "--schedule", str(self.folder / name), "--max-interval", "1", name=name)

    def celery(self, *words: str, name: str) -> subprocess.Popen[bytes]:
        return self.start("-m", "celery", "--app", self.environment.get("CELERY_APP", "deploy.celery:app"), *words, name=name)

    def log(self, name: str) -> str:
        return (self.folder / f"{name}.log").read_text(errors="replace")

    def close(self) -> None:
        for process in self.processes:
            if process.poll() is None:
                process.terminate()
        for process in self.processes:
            try:
                process.wait(10)
            except subprocess.TimeoutExpired:
                kill_all_of(process)
        shutil.rmtree(self.folder, ignore_errors=True)


def kill_all_of(process: subprocess.Popen[bytes]) -> None:
    """kill -9 for a process started by `Site.start` and what it has started."""
    os.killpg(process.pid, signal.SIGKILL)
    process.wait(10)


def wait_for(found: Callable[[], Any], seconds: float, what: str) -> float:
    """Waits until it is so, and returns the seconds it took; fails when it does not come."""
    began = time.monotonic()
    while not found():
        assert time.monotonic() - began < seconds, f"{what}: not within {seconds} s"
        time.sleep(0.1)
    return time.monotonic() - began


class Tablet:
    """A browser signed in as somebody, reduced to what it says to the server."""

    def __init__(self, port: int, username: str) -> None:
        self.port, self.cookies = port, dict[str, str]()
        self.link: http.client.HTTPConnection | None = None
        _, page = self.request("GET", "/sign-in/")
        token = re.search(r'name="csrfmiddlewaretoken" value="(\w+)"', page)
        assert token, page[:500]
        form = {"username": username, "password": PASSWORD, "csrfmiddlewaretoken": token[1], "next": "/"}
        status, page = self.request("POST", "/sign-in/", urlencode(form), "application/x-www-form-urlencoded")
        assert status == 302, f"{username} can't sign in: {status} {page[:500]}"

    def request(self, verb: str, path: str, body: str | None = None, kind: str = "text/plain") -> tuple[int, str]:
        if self.link is None or self.link.port != self.port:
            self.drop()
            self.link = http.client.HTTPConnection("127.0.0.1", self.port, timeout=30)
        headers = {"Cookie": "; ".join(f"{name}={value}" for name, value in self.cookies.items()), "Content-Type": kind}
        if "csrftoken" in self.cookies:
            headers["X-CSRFToken"] = self.cookies["csrftoken"]
        try:
            self.link.request(verb, path, body, headers)
            answer = self.link.getresponse()
            text = answer.read().decode()
        except BaseException:
            self.drop()
            raise
        for line in answer.headers.get_all("Set-Cookie") or []:
            name, _, value = line.partition(";")[0].partition("=")
            self.cookies[name] = value
        return answer.status, text

    def drop(self) -> None:
        if self.link is not None:
            self.link.close()
            self.link = None


@dataclass
class Day:
    """Rounds sent by several people at once, each until the server has said that it has it, as a tablet does."""

    ports: list[int]
    started_at: datetime = field(default_factory=lambda: datetime.now(UTC))
    tried: list[str] = field(default_factory=list)
    taken: list[str] = field(default_factory=list)
    answers: Counter[str] = field(default_factory=Counter)
    seen: list[str] = field(default_factory=list)
    seconds: list[float] = field(default_factory=list)
    numbers: Iterator[int] = field(default_factory=lambda: itertools.count(1))
    over: threading.Event = field(default_factory=threading.Event)
    threads: list[threading.Thread] = field(default_factory=list)
    failures: list[BaseException] = field(default_factory=list)

    def body(self, number: int) -> str:
        """A round of three values; each round has a minute of its own."""
        at = (self.started_at - timedelta(minutes=number)).isoformat()
        lines = [
            {"key": f"{site}:{parameter}", "site": site, "parameter": parameter, "value": value, "unit": unit, "taken_at": at}
            for site, parameter, value, unit in (
                ("ENTRY", "free_chlorine", f"{0.4 + number % 20 / 100:.2f}", "mg/L"),
                ("ENTRY", "pH", f"{8.0 + number % 30 / 100:.2f}", ""),
                ("RAW", "temperature", f"{10 + number % 40 / 10:.1f}", "°C"),
            )
        ]
        return json.dumps({"kind": "round", "lines": lines})

    def begin(self, people: int, pause_s: float = 0.0) -> None:
        for place in range(people):
            thread = threading.Thread(target=self._guarded, args=(place, pause_s), daemon=True)
            self.threads.append(thread)
            thread.start()

    def end(self) -> None:
        self.over.set()
        for thread in self.threads:
            thread.join(90)
        if self.failures:
            raise self.failures[0]
        assert not any(thread.is_alive() for thread in self.threads)

    def _guarded(self, place: int, pause_s: float) -> None:
        try:
            self._send_rounds(place, pause_s)
        except BaseException as problem:  # noqa: BLE001 — raised again by `end`
            self.failures.append(problem)

    def _send_rounds(self, place: int, pause_s: float) -> None:
        tablet = Tablet(self.ports[place % len(self.ports)], "olga")
        try:
            while not self.over.is_set():
                number, ident = next(self.numbers), str(uuid.uuid4())
                self.tried.append(ident)
                self.send(tablet, ident, self.body(number))
                self.over.wait(pause_s)
        finally:
            tablet.drop()

    def send(self, tablet: Tablet, ident: str, body: str, patience_s: float = 60) -> None:
        """Sends one round until it is acknowledged; a server that does not answer is left for the other one."""
        end = time.monotonic() + patience_s
        while True:
            began = time.monotonic()
            try:
                status, text = tablet.request("PUT", f"/w/TST/entries/{ident}", body, "application/json")
            except OSError:
                status, text = 0, ""
            except http.client.HTTPException:
                status, text = 0, ""
            self.answers[str(status)] += 1
            if status in (200, 201):
                self.seconds.append(time.monotonic() - began)
                self.taken.append(ident)
                return
            self.seen.append(text)
            assert status in (0, 500, 502, 503), f"{status}: {text[:300]}"
            assert time.monotonic() < end, f"not acknowledged within {patience_s} s; last answer {status}"
            tablet.port = self.ports[(self.ports.index(tablet.port) + 1) % len(self.ports)]
            time.sleep(0.2)

    def account(self, site: Site) -> tuple[int, int, int]:
        """Rounds tried, lost and doubled, by what the book holds."""
        found = Counter(site.ask("list(Entry.objects.values_list('client_id', flat=True))"))
        values = Counter(
            tuple(row)
            for row in site.ask(
                "[[r.site, r.parameter, r.taken_at.isoformat()] for r in Reading.objects.filter(entry__kind='round')]"
            )
        )
        lost = [ident for ident in self.taken if not found[ident]]
        never = [ident for ident in self.tried if ident not in set(self.taken)]
        doubled = [ident for ident in self.tried if found[ident] > 1] + [row for row, count in values.items() if count > 1]
        assert sum(values.values()) == 3 * sum(1 for ident in self.tried if found[ident]), "rounds are not whole"
        return len(self.tried), len(lost) + len(never), len(doubled)

    def spread(self) -> str:
        ordered = sorted(self.seconds)
        if not ordered:
            return "nothing was answered"
        p50, p95 = ordered[len(ordered) // 2], ordered[int(len(ordered) * 0.95)]
        return f"p50 {p50 * 1000:.0f} ms, p95 {p95 * 1000:.0f} ms, longest {ordered[-1] * 1000:.0f} ms"
