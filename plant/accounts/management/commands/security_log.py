"""security_log: who signed in, who was refused, what was changed about it. One line an event."""

import datetime as dt
from typing import Any

from django.core.management.base import BaseCommand, CommandParser

from plant import clock
from plant.accounts import security


class Command(BaseCommand):
    help = "Shows sign-ins, refusals, and changes of passwords and second factors."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--days", type=int, default=30)
        parser.add_argument("--username", default="", help="of this person only")

    def handle(self, *args: Any, **options: Any) -> None:
        since = clock.now() - dt.timedelta(days=options["days"])
        for event in security.events(since=since, username=options["username"]):
            who = event.person.username if event.person else "(nobody known)"
            by = f" by {event.by.username}" if event.by and event.by_id != event.person_id else ""
            self.stdout.write(f"{event.at:%Y-%m-%d %H:%M:%S}Z {event.kind:<17} {who}{by} {event.address}".rstrip())
