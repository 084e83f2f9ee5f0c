"""Making a back-up while people go on working, and trying it before it counts."""

from __future__ import annotations

import contextlib
import datetime as dt
import os
import sqlite3
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from django.apps import apps
from django.conf import settings
from django.db import DEFAULT_DB_ALIAS, connections, transaction
from django.db.migrations.recorder import MigrationRecorder

from deploy.backups import archive, keeping, rows, sealing
from plant.ledger.models import Book

ALIAS = "back_up"
ROOT = Path(__file__).resolve().parents[2]


class CannotBackUp(RuntimeError):
    """Why there is no back-up."""


@dataclass(frozen=True)
class Made:
    """A back-up that was made, and what it holds."""

    path: Path
    contents: archive.Contents
    removed: tuple[Path, ...]

    @property
    def rows(self) -> int:
        return sum(table.rows for table in self.contents.tables.values())


def make(*, folder: Path, now: dt.datetime, secret: bytes | None = None, try_it: bool = True) -> Made:
    """Writes a back-up into the folder, restores it into a scratch database, checks every record there, and only then
    gives it its name; older ones that need not be kept go. Raises CannotBackUp.
    """
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    target = folder / keeping.name_of(now, sealed=secret is not None)
    if target.exists():
        raise CannotBackUp(f"{target} exists already")
    with tempfile.TemporaryDirectory(prefix=".making-", dir=folder) as scratch_name:
        scratch = Path(scratch_name)
        contents = _write_tables(scratch, now)
        packed = scratch / "packed"
        archive.pack(scratch, Path(settings.WEIRBOOK_FILES), contents, packed)
        for label in contents.tables:
            (scratch / f"{label}.jsonl").unlink()
        if secret is not None:
            sealed = scratch / "sealed"
            with packed.open("rb") as source, sealed.open("wb") as out:
                sealing.seal(source, out, secret)
            packed.unlink()
            packed = sealed
        if try_it:
            _try(packed, scratch, secret)
        packed.chmod(0o600)
        with packed.open("rb") as file:
            os.fsync(file.fileno())
        packed.rename(target)
    return Made(target, contents, tuple(keeping.remove_superfluous(folder, now)))


def _write_tables(scratch: Path, now: dt.datetime) -> archive.Contents:
    with _standing_still(scratch) as using:
        connection = connections[using]
        contents = archive.Contents(
            format=archive.FORMAT,
            made_at=now.astimezone(dt.UTC).isoformat(timespec="seconds"),
            vendor=connection.vendor,
            migrations=sorted(map(list, MigrationRecorder(connection).applied_migrations())),
            heads=[
                list(head) for head in Book.objects.using(using).order_by("code").values_list("code", "head_seq", "head_hash")
            ],
        )
        for model in rows.kept_models(apps):
            label, names = model._meta.label_lower, rows.columns(model)
            with (scratch / f"{label}.jsonl").open("wb") as out:
                count, sha256 = rows.write(model, names, using, out)
            contents.tables[label] = archive.Table(names, count, sha256)
    return contents


@contextlib.contextmanager
def _standing_still(scratch: Path) -> Iterator[str]:
    """A second connection that sees the database as it is at one moment, while others go on writing."""
    described: dict[str, Any] = {**connections[DEFAULT_DB_ALIAS].settings_dict, "CONN_MAX_AGE": 0}
    copy = scratch / "copy.sqlite3"
    is_sqlite = connections[DEFAULT_DB_ALIAS].vendor == "sqlite"
    if is_sqlite:
        _copy_sqlite(described["NAME"], copy)
        described["NAME"] = str(copy)
    else:
        import psycopg

        described["OPTIONS"] = {**described["OPTIONS"], "isolation_level": psycopg.IsolationLevel.REPEATABLE_READ}
    connections.settings[ALIAS] = described
    try:
        with transaction.atomic(using=ALIAS):
            if not is_sqlite:
                with connections[ALIAS].cursor() as cursor:
                    cursor.execute("SET TRANSACTION READ ONLY")
            yield ALIAS
    finally:
        connections[ALIAS].close()
        del connections[ALIAS]
        del connections.settings[ALIAS]
        for path in scratch.glob("copy.sqlite3*"):
            path.unlink()


def _copy_sqlite(source: Any, target: Path) -> None:
    """SQLite's own online copy, in one step: with write-ahead logging neither readers nor writers wait for it."""
    with (
        contextlib.closing(sqlite3.connect(f"file:{source}?mode=ro", uri=True, timeout=60)) as live,
        contextlib.closing(sqlite3.connect(target)) as copy,
    ):
        live.backup(copy, pages=-1)


def _try(packed: Path, scratch: Path, secret: bytes | None) -> None:
    """Restores into a scratch database in a process of its own, which also runs verify_records. Raises CannotBackUp."""
    command = [
        *(sys.executable, str(ROOT / "manage.py"), "restore", str(packed)),
        *("--into", str(scratch / "trial" / "trial.sqlite3"), "--files", str(scratch / "trial" / "files")),
    ]
    if secret is not None:
        key_file = scratch / "key"
        key_file.touch(mode=0o600)
        key_file.write_bytes(secret)
        command += ["--key-file", str(key_file)]
    tried = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)  # noqa: S603
    if tried.returncode:
        raise CannotBackUp(f"the back-up was made but can't be restored:\n{tried.stdout[-2000:]}{tried.stderr[-2000:]}")
