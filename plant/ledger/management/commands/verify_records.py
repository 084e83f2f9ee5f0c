"""verify_records: chain, rows against their payload, rebuilt caches, locks. Exit 1 and a list where something differs."""

from typing import Any

from django.core.management.base import BaseCommand, CommandError

from plant.ledger import models, verify


class Command(BaseCommand):
    help = "Checks that every book still says what was written into it."

    def handle(self, *args: Any, **options: Any) -> None:
        count = 0
        for finding in verify.everything():
            self.stdout.write(finding)
            count += 1
        if count:
            raise CommandError(f"{count} finding(s): the records are not as they were written", returncode=1)
        books, entries = models.Book.objects.count(), models.Entry.objects.count()
        self.stdout.write(f"All as written: {books} book(s), {entries} entries, locks in place.")
