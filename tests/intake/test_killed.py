"""Two imports of one file at the same moment, one of them killed: nothing doubled, nothing half done, the rest comes later."""

from __future__ import annotations

import datetime as dt
import os
import signal
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
LINES = 24_000

pytestmark = [pytest.mark.service, pytest.mark.slow]


@pytest.fixture
def machine(tmp_path):
    """A machine of its own: a data folder, and commands run in processes of their own."""
    kept = ("PATH", "HOME", "LANG", "VIRTUAL_ENV")
    environment = {name: os.environ[name] for name in kept if name in os.environ} | {
        "WEIRBOOK_DATA": str(tmp_path),
        "DJANGO_SETTINGS_MODULE": "deploy.settings.development",
        "PYTHONPATH": str(ROOT),
    }

    def start(*arguments):
        return subprocess.Popen(
            [sys.executable, str(ROOT / "manage.py"), *arguments],
            env=environment,
            cwd=tmp_path,
            stdout=subprocess.PIPE,
            stderr=subprocess.STDOUT,
            text=True,
        )

    def run(*arguments):
        process = start(*arguments)
        out, _ = process.communicate(timeout=300)
        assert process.returncode == 0, out
        return out

    return start, run, tmp_path / "weirbook.sqlite3"


def count(database, table):
    with sqlite3.connect(f"file:{database}?mode=ro", uri=True, timeout=30) as connection:
        return connection.execute(f"SELECT count(*) FROM {table}").fetchone()[0]


def test_two_at_once_and_one_of_them_killed(machine, tmp_path):
    start, run, database = machine
    path = tmp_path / "year.csv"
    first = dt.datetime(2026, 1, 1)
    path.write_text(
        "site,timestamp,parameter,value,unit\n"
        + "".join(
            f"ENTRY,{first + dt.timedelta(minutes=2 * line):%Y-%m-%dT%H:%M}Z,pH,{7 + line % 90 / 100:.2f},\n"
            for line in range(LINES)
        )
    )
    run("migrate", "--verbosity", "0")
    run("load_works", str(ROOT / "tests" / "data" / "three_days" / "works.toml"))
    importing = [start("import_records", str(path), "--works", "EXA") for _ in range(2)]
    end = time.monotonic() + 240
    while count(database, "readings_reading") == 0:
        assert time.monotonic() < end
        time.sleep(0.05)
    importing[0].send_signal(signal.SIGKILL)
    importing[1].send_signal(signal.SIGKILL)
    for process in importing:
        process.communicate(timeout=60)
    there = count(database, "readings_reading")
    assert 0 < there <= LINES
    assert there % 10_000 in (0, LINES % 10_000)
    said = run("import_records", str(path), "--works", "EXA")
    assert f"{LINES - there} added, {there} there already" in said
    assert count(database, "readings_reading") == LINES
    assert f"0 added, {LINES} there already" in run("import_records", str(path), "--works", "EXA")
    run("verify_records")
