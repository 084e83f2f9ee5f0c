"""What deploy/start.sh does once it has found a Python: set up, then serve, or with --once issue a report.

Standard library only; Weirbook itself runs in the virtual environment made here.
"""

from __future__ import annotations

import argparse
import calendar
import contextlib
import fcntl
import itertools
import os
import secrets
import shutil
import signal
import socket
import subprocess
import sys
import tempfile
import time
import urllib.request
from collections.abc import Callable, Iterator
from pathlib import Path

from deploy import environment, supervise
from deploy.environment import CannotMake, say

ROOT = Path(__file__).resolve().parents[1]
PEOPLE_FILE = "people.txt"
DATA_ROOM_MB = 300


class CannotStart(Exception):
    """Why nothing was started, and what to do about it."""


class Installation:
    """One data folder and the Python that works on it."""

    def __init__(self, python: Path, data: Path) -> None:
        self.python, self.data = python, data

    @property
    def environment(self) -> dict[str, str]:
        return {
            # Of one's own records a back-up is made each night, unless another folder is named.
            **({"WEIRBOOK_BACKUPS": str(self.data / "backups")} if self.data.name == "own" else {}),
            **os.environ,
            "WEIRBOOK_DATA": str(self.data),
            "DJANGO_SETTINGS_MODULE": "deploy.settings.development",
            "PYTHONUNBUFFERED": "1",
        }

    def manage(self, *words: str, doing: str, may_take_long: bool = False) -> str:
        """Runs a command of manage.py and returns what it printed. Its own progress passes through if it may
        take long; otherwise a line is shown after two seconds. Raises CannotStart with its last lines."""
        with tempfile.TemporaryFile("w+") as output, tempfile.TemporaryFile("w+") as errors:
            process = subprocess.Popen(
                [str(self.python), "manage.py", *words],
                cwd=ROOT,
                env=self.environment,
                stdout=output,
                stderr=None if may_take_long else errors,
            )
            started = time.monotonic()
            try:
                for pause_s in itertools.chain((2, 8), itertools.repeat(20)):
                    with contextlib.suppress(subprocess.TimeoutExpired):
                        process.wait(pause_s)
                        break
                    say(f"{doing} … ({time.monotonic() - started:.0f} s)")
            except BaseException:
                process.terminate()
                raise
            output.seek(0)
            errors.seek(0)
            if process.returncode:
                tail = "\n".join(f"    {line}" for line in errors.read().strip().splitlines()[-8:])
                raise CannotStart(f"{doing}: manage.py {words[0]} ended with {process.returncode}.\n{tail}")
            return output.read()


@contextlib.contextmanager
def only_one(folder: Path) -> Iterator[None]:
    """Two starts at the same moment set up one after the other."""
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    with (folder / ".set-up").open("w") as lock:
        try:
            fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            say("Waiting for another start that is setting up …")
            fcntl.flock(lock, fcntl.LOCK_EX)
        yield


def check_port(port: int) -> None:
    """Raises CannotStart when something already listens there."""
    with socket.socket() as probe:
        probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            probe.bind(("127.0.0.1", port))
        except PermissionError:
            raise CannotStart(f"Port {port} needs more rights than this user has. Try PORT=8000.") from None
        except OSError:
            raise CannotStart(
                f"Port {port} is taken, perhaps by a Weirbook that is already running.\n"
                f"Stop that one, or choose another port: PORT={port + 1} sh deploy/start.sh"
            ) from None


def private_file(path: Path, text: str) -> None:
    """Writes a file that only this user can read."""
    descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
    with os.fdopen(descriptor, "w") as file:
        file.write(text)


def prepare(installation: Installation) -> None:
    """Secret key and migrations."""
    data = installation.data
    data.mkdir(mode=0o700, parents=True, exist_ok=True)
    environment.check_room(data, DATA_ROOM_MB)
    key = data / "secret_key"
    if not key.exists():
        private_file(key, secrets.token_urlsafe(50) + "\n")
    installation.manage("migrate", "--noinput", "--verbosity", "0", doing="Bringing the database up to date")


def prepare_demo(python: Path, base: Path) -> Installation:
    """The demo works in a folder of its own.

    It is built beside it and moved there whole, so a stop in the middle leaves nothing half made.
    """
    done, making = base / "demo", base / "demo.making"
    if not (done / PEOPLE_FILE).exists():
        shutil.rmtree(making, ignore_errors=True)
        unfinished = Installation(python, making)
        prepare(unfinished)
        say("Making the demo works: fourteen months of readings, once …")
        started = time.monotonic()
        unfinished.manage("make_demo", doing="Making the demo works", may_take_long=True)
        (making / PEOPLE_FILE).chmod(0o600)
        if done.exists():
            raise CannotStart(f"{done} exists but holds no demo works. Move it away and start again.")
        making.rename(done)
        say(f"  done ({time.monotonic() - started:.0f} s)")
    demo = Installation(python, done)
    prepare(demo)
    return demo


def prepare_own(python: Path, base: Path) -> Installation:
    """An empty database for a works of one's own, and its first administrator."""
    own = Installation(python, base / "own")
    prepare(own)
    people = own.data / PEOPLE_FILE
    if not people.exists():
        name = os.environ.get("WEIRBOOK_ADMINISTRATOR") or "admin"
        if sys.stdin.isatty() and "WEIRBOOK_ADMINISTRATOR" not in os.environ:
            name = input(f"Sign-in name of the first administrator [{name}]: ").strip() or name
        line = own.manage("first_administrator", name, doing="Making the first administrator")
        if line:
            private_file(people, line)
    return own


def once(demo: Installation) -> Path:
    """Reviews the demo's last full month and issues its report."""
    code, month = demo.manage("demo_month", doing="Looking for the demo's last full month").split()
    year, number = map(int, month.split("-"))
    last = calendar.monthrange(year, number)[1]
    say(f"Reviewing {month} of {code} …")
    days = ("--from", f"{month}-01", "--to", f"{month}-{last:02d}")
    demo.manage("review", "--works", code, *days, doing="Reviewing")
    folder = demo.data / "reports"
    folder.mkdir(exist_ok=True)
    output = folder / f"{code}-{month}.pdf"
    say(f"Issuing the report of {month} …")
    demo.manage("issue_report", "--works", code, "--month", month, "--output", str(output), doing="Issuing")
    if not output.exists():
        raise CannotStart(f"issue_report ended well but left no {output}.")
    return output


def serve(installation: Installation, port: int) -> None:
    """The web server and one worker, until Ctrl-C or TERM."""
    logs = installation.data / "log"
    logs.mkdir(exist_ok=True)
    gunicorn = [
        *(str(installation.python), "-m", "gunicorn", "deploy.wsgi:application"),
        *("--bind", f"127.0.0.1:{port}", "--worker-class", "gthread", "--workers", "2", "--threads", "8"),
        *("--graceful-timeout", "20", "--timeout", "60", "--no-control-socket", "--chdir", str(ROOT)),
        *(("--worker-tmp-dir", "/dev/shm") if os.access("/dev/shm", os.W_OK) else ()),  # noqa: S108
    ]
    worker = [str(installation.python), str(ROOT / "manage.py"), "work"]
    children = [
        supervise.Child("web server", gunicorn, installation.environment, logs / "web.log"),
        supervise.Child("worker", worker, installation.environment, logs / "work.log"),
    ]

    def announce(still_wanted: Callable[[], bool]) -> None:
        if wait_for(f"http://127.0.0.1:{port}/healthz", still_wanted):
            print(welcome(installation, port), flush=True)

    supervise.Supervisor(children, say).run(when_started=announce)
    say("Stopped.")


def wait_for(address: str, still_wanted: Callable[[], bool]) -> bool:
    """True once the address answers, False when it is no longer wanted."""
    direct = urllib.request.build_opener(urllib.request.ProxyHandler({}))
    started = time.monotonic()
    said = False
    while still_wanted():
        with contextlib.suppress(OSError):
            direct.open(address, timeout=5).close()
            return True
        if not said and time.monotonic() - started > 2:
            said = True
            say("Waiting for the web server …")
        time.sleep(0.1)
    return False


def welcome(installation: Installation, port: int) -> str:
    """What the person who started it needs to know."""
    people = installation.data / PEOPLE_FILE
    lines = ["", f"Weirbook is at http://127.0.0.1:{port}/", ""]
    if people.exists():
        lines += [people.read_text().strip(), ""]
    if installation.data.name == "own":
        lines += ["A works is described in a file and brought in with: load_works FILE.toml", ""]
    return "\n".join(
        [
            *lines,
            f"Data, logs and these passwords: {installation.data}",
            f"For commands: WEIRBOOK_DATA={installation.data} .venv/bin/python manage.py help",
            "Stop with Ctrl-C.",
            "",
        ]
    )


def arguments(words: list[str]) -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="sh deploy/start.sh", description="Sets Weirbook up and serves it.")
    kind = parser.add_mutually_exclusive_group()
    kind.add_argument("--own", action="store_true", help="a works of your own, empty at first, instead of the demo")
    kind.add_argument("--once", action="store_true", help="issue the demo's last full month and print the PDF's path")
    parser.epilog = "Environment: PORT, WEIRBOOK_DATA, WEIRBOOK_ADMINISTRATOR, DATABASE_URL, REDIS_URL."
    return parser.parse_args(words)


def main(words: list[str]) -> int:
    options = arguments(words)
    signal.signal(signal.SIGTERM, signal.default_int_handler)
    base = Path(os.environ.get("WEIRBOOK_DATA") or ROOT / ".weirbook").resolve()
    try:
        port = int(os.environ.get("PORT") or 8000)
        if not 0 < port < 65536:
            raise ValueError
    except ValueError:
        say(f"PORT is {os.environ['PORT']!r}; a number from 1 to 65535 is needed.")
        return 2
    own = options.own
    if os.environ.get("DATABASE_URL") and not own:
        say("DATABASE_URL is set, and the demo never goes into a database of yours: unset it, or use --own.")
        return 2
    try:
        if not options.once:
            check_port(port)
        with only_one(base):
            python = environment.make(
                ROOT / ".venv", ROOT / "requirements.txt", needed_mb=environment.ROOM_MB["requirements.txt"]
            )
            installation = prepare_own(python, base) if own else prepare_demo(python, base)
        if options.once:
            print(once(installation), flush=True)
        else:
            serve(installation, port)
    except (CannotMake, CannotStart, supervise.KeepsEnding) as problem:
        say(f"\n{problem}")
        return 1
    except OSError as problem:
        full = " The disk is full." if problem.errno == 28 else ""
        say(f"\n{problem.filename or ''}: {problem.strerror}.{full}")
        return 1
    except KeyboardInterrupt:
        say("\nStopped. What was begun is begun again at the next start.")
        return 130
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
