"""back_up: everything into one file, tried by restoring it. `manage.py back_up --to DIR [--key-file FILE]`."""

import os
from pathlib import Path
from typing import Any

from django.conf import settings
from django.core.management.base import BaseCommand, CommandError, CommandParser

from deploy.backups import making, sealing
from plant import clock


class Command(BaseCommand):
    help = "Saves database and documents into one file while people go on working, and tries it by restoring it."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--to", type=Path, help="folder for back-ups (WEIRBOOK_BACKUPS where left out)")
        parser.add_argument("--key-file", type=Path, help="seals it with this key (WEIRBOOK_BACKUP_KEY_FILE where left out)")
        parser.add_argument("--make-key", type=Path, metavar="FILE", help="only makes a key for --key-file, and ends")
        parser.add_argument("--untried", action="store_true", help="leaves out the trial restore")

    def handle(self, *args: Any, **options: Any) -> None:
        if options["make_key"]:
            self._make_key(options["make_key"])
            return
        folder = options["to"] or (Path(settings.WEIRBOOK_BACKUPS) if settings.WEIRBOOK_BACKUPS else None)
        if folder is None:
            raise CommandError("Where to? Name a folder with --to, best on another disk.")
        key_file = options["key_file"] or settings.WEIRBOOK_BACKUP_KEY_FILE
        try:
            secret = sealing.read_key(Path(key_file)) if key_file else None
            made = making.make(folder=folder, now=clock.now(), secret=secret, try_it=not options["untried"])
        except (sealing.BadKey, making.CannotBackUp) as problem:
            raise CommandError(str(problem)) from None
        except OSError as problem:
            raise CommandError(f"{problem.filename or folder}: {problem.strerror}. There is no new back-up.") from None
        for code, seq, head_hash in made.contents.heads:
            self.stdout.write(f"{code}: {seq} entries, head {head_hash}")
        tried = "not tried" if options["untried"] else "restored into a scratch database, every record checked"
        self.stdout.write(f"{made.rows} rows, {len(made.contents.files)} documents; {tried}")
        for path in made.removed:
            self.stdout.write(f"removed, no longer kept: {path.name}")
        self.stdout.write(str(made.path))

    def _make_key(self, path: Path) -> None:
        try:
            descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
        except FileExistsError:
            raise CommandError(f"{path} exists already; a key is never overwritten") from None
        with os.fdopen(descriptor, "w") as file:
            file.write(sealing.new_key() + "\n")
        self.stdout.write(f"{path}: keep a copy where the back-ups are not. Without it they can't be opened by anybody.")
