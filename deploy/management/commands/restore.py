"""restore: a back-up into an empty database. `manage.py restore FILE --into URL_OR_PATH [--key-file FILE]`."""

from pathlib import Path
from typing import Any

from django.conf import settings
from django.core.management.base import BaseCommand, CommandError, CommandParser

from deploy.backups import archive, restoring, sealing


class Command(BaseCommand):
    help = "Restores a back-up into a new, empty database and checks every record there."
    requires_system_checks: list[str] = []
    requires_migrations_checks = False

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("file", type=Path)
        parser.add_argument("--into", required=True, help="a new SQLite file, or the address of an empty PostgreSQL database")
        parser.add_argument("--files", type=Path, help="where documents go (beside a SQLite file, else WEIRBOOK_DATA/files)")
        parser.add_argument("--key-file", type=Path, help="the key it was sealed with")

    def handle(self, *args: Any, **options: Any) -> None:
        into, key_file = options["into"], options["key_file"] or settings.WEIRBOOK_BACKUP_KEY_FILE
        beside = Path(settings.WEIRBOOK_FILES) if "://" in into else Path(into).resolve().parent / "files"
        try:
            secret = sealing.read_key(Path(key_file)) if key_file else None
            restoring.stand_on(into)
            restored = restoring.restore(
                file=options["file"], files=options["files"] or beside, secret=secret, say=self.stdout.write
            )
        except (restoring.CannotRestore, archive.NotABackUp, sealing.CannotOpen, sealing.BadKey) as problem:
            raise CommandError(str(problem)) from None
        for finding in restored.findings:
            self.stdout.write(finding)
        if restored.findings:
            raise CommandError(f"{len(restored.findings)} finding(s): what was restored is not as it was written")
        for code, seq, head_hash in restored.contents.heads:
            self.stdout.write(f"{code}: {seq} entries, head {head_hash}")
        self.stdout.write(f"Restored {restored.rows} rows and {len(restored.contents.files)} documents; all as written.")
