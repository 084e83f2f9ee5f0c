"""A back-up taken while eight writers write, restored on both databases; and a row altered behind the program's back."""

import contextlib
import json
import shutil
import sqlite3
import subprocess
import sys
import time
import uuid
from pathlib import Path

import psycopg
import pytest

from tests import services
from tests.operations.site import ROOT, Site, wait_for

pytestmark = [pytest.mark.service, pytest.mark.slow]
WRITERS = 8
SIGN_INS = """
import django; django.setup()
from django.test import Client
from tests import people
for password in ("wrong", people.PASSWORD):
    Client(headers={"Host": "localhost"}).post("/sign-in/", {"username": "sam", "password": password})
from axes.models import AccessAttempt, AccessLog
assert AccessLog.objects.count() == 1 and AccessAttempt.objects.count() <= 1
"""
"""What libraries keep beside our own tables comes back too: theirs fill some of their fields by the clock."""


def database(postgres: services.Postgres) -> str:
    """A new, empty database on the server."""
    name = f"drill_{uuid.uuid4().hex[:12]}"
    with psycopg.connect(postgres.url.replace("postgres://", "postgresql://", 1), autocommit=True) as link:
        link.execute(f"CREATE DATABASE {name}")
    return postgres.url.rpartition("/")[0] + f"/{name}"


@pytest.fixture(scope="module", params=["sqlite", "postgres"])
def saved(request, tmp_path_factory):
    """A site, the back-up made while it was written to (sealed), its key, and what the writers said."""
    url = database(request.getfixturevalue("postgres")) if request.param == "postgres" else ""
    site = Site(database_url=url)
    try:
        yield site, *under_load(site, tmp_path_factory.mktemp("back-ups")), request.param
    finally:
        site.close()


def under_load(site: Site, folder: Path) -> tuple:
    """The back-up, its key, what the writers said, and how many entries there were before and after it was made."""
    key, stop, count = folder / "key", folder / "stop", "Entry.objects.count()"
    site.manage("back_up", "--make-key", str(key))
    site.python(SIGN_INS)
    site.manage("api_token", "make", "control system", "--works", "TST", "--scope", "readings.write")
    documents = site.folder / "data" / "files" / "photos"
    documents.mkdir(parents=True)
    (documents / "seal.jpg").write_bytes(b"a photograph of a seal" * 1000)
    running = [
        site.start("-m", "tests.operations.writing", str(number), "90", str(stop), name=f"writer-{number}")
        for number in range(WRITERS)
    ]
    try:
        wait_for(lambda: site.ask(count) > 20, 60, "eight writers at work")
        before = site.ask(count)
        made = site.manage("back_up", "--to", str(folder / "kept"), "--key-file", str(key))
        assert "restored into a scratch database, every record checked" in made.stdout
        after = site.ask(count)
    finally:
        stop.touch()
        for process in running:
            process.wait(60)
    said = [json.loads(site.log(f"writer-{number}").splitlines()[-1]) for number in range(WRITERS)]
    return Path(made.stdout.splitlines()[-1]), key, said, (before, after)


def restored_counts(out: str) -> int:
    line = next(line for line in out.splitlines() if line.startswith("TST: "))
    return int(line.split()[1])


def test_writers_are_never_told_that_the_database_is_locked(saved, figure):
    _, _, _, said, _, vendor = saved
    seconds = sorted(second for one in said for second in one["seconds"])
    errors = [error for one in said for error in one["errors"]]
    figure(
        f"{WRITERS} processes writing to {vendor}, a back-up made in their midst: {len(seconds)} entries tried,"
        f" {len(errors)} refused; p50 {seconds[len(seconds) // 2] * 1000:.0f} ms,"
        f" p95 {seconds[int(len(seconds) * 0.95)] * 1000:.0f} ms, longest {seconds[-1] * 1000:.0f} ms"
    )
    assert errors == []


def test_nothing_written_is_lost_or_doubled(saved):
    site, _, _, said, _, _ = saved
    written = [ident for one in said for ident in one["written"]]
    found = site.ask("list(Entry.objects.filter(kind='round').values_list('client_id', flat=True))")
    assert sorted(found) == sorted(written)
    assert site.ask("Reading.objects.count()") == 5 * len(written)


def test_it_is_restored_and_goes_on_from_there(saved, postgres, tmp_path, figure):
    site, path, key, _, (before, after), vendor = saved
    # PostgreSQL into SQLite is what the trial of the back-up itself has just done.
    targets = {"postgres": database(postgres)} | ({"sqlite": str(tmp_path / "restored.sqlite3")} if vendor == "sqlite" else {})
    for into, target in targets.items():
        files = tmp_path / into / "files"
        began = time.monotonic()
        out = site.manage("restore", str(path), "--into", target, "--key-file", str(key), "--files", str(files)).stdout
        took_s = time.monotonic() - began
        assert "all as written" in out
        entries = restored_counts(out)
        # All that was there before the back-up began, nothing of what came after it ended.
        assert before <= entries <= after
        assert (files / "photos" / "seal.jpg").read_bytes() == b"a photograph of a seal" * 1000
        figure(f"back-up of {vendor} under load restored into {into} and checked: {entries} entries in {took_s:.1f} s")
        goes_on(site, target if "://" in target else f"sqlite:///{target}", entries)


def goes_on(site: Site, url: str, entries: int) -> None:
    """Numbering, chain and locks carry on where the back-up ended."""
    environment = {**site.environment, "DATABASE_URL": url}
    more = run(environment, "-m", "tests.operations.writing", "0", "0.2", "no stop")
    assert more.returncode == 0, more.stderr
    checked = run(environment, "manage.py", "verify_records")
    assert f"{entries + len(json.loads(more.stdout)['written'])} entries, locks in place" in checked.stdout


def run(environment: dict[str, str], *words: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, *words], cwd=ROOT, env=environment, capture_output=True, text=True, check=False, timeout=120
    )


def test_a_sealed_back_up_opens_with_its_key_only(saved, tmp_path):
    site, path, _, _, _, _ = saved
    other = tmp_path / "other-key"
    site.manage("back_up", "--make-key", str(other))
    answer = site.manage("restore", str(path), "--into", str(tmp_path / "x.sqlite3"), "--key-file", str(other), check=False)
    assert answer.returncode == 1
    assert "the key does not fit" in answer.stderr
    assert b"free_chlorine" not in path.read_bytes()


def test_one_altered_row_is_found(saved, tmp_path):
    site, path, key, _, _, _ = saved
    copy = tmp_path / "copy.sqlite3"
    site.manage("restore", str(path), "--into", str(copy), "--key-file", str(key))
    environment = {**site.environment, "DATABASE_URL": f"sqlite:///{copy}"}
    with contextlib.closing(sqlite3.connect(copy)) as link:
        pk, seq, line = link.execute("SELECT id, seq, line FROM readings_reading ORDER BY id LIMIT 1 OFFSET 17").fetchone()
        with pytest.raises(sqlite3.IntegrityError, match="append-only"):
            link.execute("UPDATE readings_reading SET value = 9.9 WHERE id = ?", [pk])
        lock = link.execute("SELECT sql FROM sqlite_master WHERE name = 'lock_readings_reading_update'").fetchone()[0]
        link.execute("DROP TRIGGER lock_readings_reading_update")
        link.execute("UPDATE readings_reading SET value = 9.9 WHERE id = ?", [pk])
        link.execute(lock)
        link.commit()
    answer = run(environment, "manage.py", "verify_records")
    assert answer.returncode == 1
    found = answer.stdout.splitlines()
    assert found == [f"TST entry {seq}: line {line} (readings.reading) differs in value"]


def test_a_full_disk_of_back_ups_is_said_in_words(saved, tmp_path):
    site, _, _, _, _, _ = saved
    (tmp_path / "file").touch()
    answer = site.manage("back_up", "--to", str(tmp_path / "file" / "x"), check=False)
    assert answer.returncode == 1
    assert "There is no new back-up" in answer.stderr


def test_a_back_up_is_never_restored_over_something(saved, tmp_path):
    site, path, key, _, _, _ = saved
    there = tmp_path / "there.sqlite3"
    shutil.copy(path, there)
    answer = site.manage("restore", str(path), "--into", str(there), "--key-file", str(key), check=False)
    assert answer.returncode == 1
    assert "exists already" in answer.stderr
