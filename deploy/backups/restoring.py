"""Restoring a back-up into an empty database, and looking whether all of it is there."""

from __future__ import annotations

import contextlib
import os
import shutil
import tempfile
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import environ
from django.conf import settings
from django.core.management import call_command
from django.core.management.color import no_style
from django.db import DEFAULT_DB_ALIAS, connection, connections, transaction
from django.db.migrations.executor import MigrationExecutor

from deploy.backups import archive, rows, sealing
from plant.ledger import verify


class CannotRestore(RuntimeError):
    """Why nothing was restored, or why what was restored must not be used."""


@dataclass(frozen=True)
class Restored:
    """What came back. ``findings`` is empty when every record is as it was written."""

    contents: archive.Contents
    rows: int
    findings: tuple[str, ...]


def stand_on(target: str) -> None:
    """Makes a database of this address or file the one that this process works on.

    For a command that does nothing else afterwards. Raises CannotRestore when it is there and not empty.
    """
    if "://" in target:
        described: dict[str, Any] = environ.Env.db_url_config(target)
    else:
        path = Path(target).resolve()
        if path.exists():
            raise CannotRestore(f"{path} exists already. A back-up is only ever restored into a new database.")
        path.parent.mkdir(parents=True, exist_ok=True)
        described = {"ENGINE": "django.db.backends.sqlite3", "NAME": str(path), "OPTIONS": settings.SQLITE_OPTIONS}
    connections.close_all()
    del connections[DEFAULT_DB_ALIAS]
    connections.settings[DEFAULT_DB_ALIAS] = connections.configure_settings({DEFAULT_DB_ALIAS: described})[DEFAULT_DB_ALIAS]
    if connection.introspection.table_names():
        raise CannotRestore("This database has tables already. A back-up is only ever restored into an empty one.")


def restore(*, file: Path, files: Path, secret: bytes | None, say: Callable[[str], None]) -> Restored:
    """Restores into the database this process stands on and the documents into `files`, then checks every record.

    Raises CannotRestore, archive.NotABackUp, sealing.CannotOpen.
    """
    if files.is_dir() and any(files.iterdir()):
        raise CannotRestore(f"{files} holds documents already; name an empty folder with --files")
    with tempfile.TemporaryDirectory(prefix=".restoring-", dir=_roomy(files)) as scratch_name:
        scratch = Path(scratch_name)
        folder = scratch / "unpacked"
        folder.mkdir()
        contents = archive.unpack(_opened(file, scratch, secret), folder)
        say(f"Made {contents.made_at} from {contents.vendor}; whole and unaltered.")
        count = _load(folder, contents, say)
        if (folder / "files").is_dir():
            shutil.copytree(folder / "files", files, dirs_exist_ok=True)
    say("Bringing the tables up to this version, and their locks back …")
    call_command("migrate", interactive=False, verbosity=0)
    say("Checking every record …")
    return Restored(contents, count, tuple(verify.everything()))


def _roomy(files: Path) -> Path:
    files.mkdir(mode=0o750, parents=True, exist_ok=True)
    return files.parent


def _opened(file: Path, scratch: Path, secret: bytes | None) -> Path:
    if not file.is_file():
        raise CannotRestore(f"there is no file {file}")
    if not sealing.is_sealed(file):
        return file
    if secret is None:
        raise CannotRestore(f"{file.name} is sealed: name its key with --key-file")
    opened = scratch / "opened"
    with file.open("rb") as source, opened.open("wb") as out:
        sealing.unseal(source, out, secret)
    return opened


def _load(folder: Path, contents: archive.Contents, say: Callable[[str], None]) -> int:
    executor = MigrationExecutor(connection)
    known = set(executor.loader.graph.nodes)
    applied = {(app, name) for app, name in contents.migrations}
    if later := sorted(applied - known):
        raise CannotRestore(
            f"this back-up was made by a newer version (it has {later[0][0]} {later[0][1]}): restore it with that version"
        )
    targets = [node for node in sorted(applied) if not {child.key for child in _children(executor, node)} & applied]
    say("Making the tables …")
    state = executor.migrate(targets)
    historical = {model._meta.label_lower: model for model in state.apps.get_models(include_auto_created=True)}
    if missing := sorted(set(contents.tables) - set(historical)):
        raise CannotRestore(f"the back-up holds tables that its own version does not have: {', '.join(missing)}")
    say("Filling them …")
    count = 0
    with _any_order(), transaction.atomic():
        for label, table in contents.tables.items():
            model = historical[label]
            model._base_manager.all().delete()  # what migrations themselves put there
            with (folder / archive.table_name(label)).open("rb") as lines:
                count += rows.load(model, table.columns, lines, DEFAULT_DB_ALIAS)
        _continue_numbering(list(historical.values()))
    connection.check_constraints()
    _compare(historical, contents)
    return count


def _children(executor: MigrationExecutor, node: tuple[str, str]) -> list[Any]:
    """The migrations of the same app that follow this one."""
    return [child for child in executor.loader.graph.node_map[node].children if child.key[0] == node[0]]


@contextlib.contextmanager
def _any_order() -> Iterator[None]:
    """Rows may name rows that come later. PostgreSQL looks at the end of the transaction, SQLite when it is asked."""
    with connection.constraint_checks_disabled():
        yield


def _continue_numbering(models: list[Any]) -> None:
    """The next new row gets a number after the last restored one."""
    with connection.cursor() as cursor:
        for statement in connection.ops.sequence_reset_sql(no_style(), models):
            cursor.execute(statement)


def _compare(historical: dict[str, Any], contents: archive.Contents) -> None:
    """Reads everything back and holds it against the digests of the back-up. Raises CannotRestore."""
    for label, table in contents.tables.items():
        with open(os.devnull, "wb") as nowhere:
            _, sha256 = rows.write(historical[label], table.columns, DEFAULT_DB_ALIAS, nowhere)
        if sha256 != table.sha256:
            raise CannotRestore(f"{label} does not read back as it was saved")
