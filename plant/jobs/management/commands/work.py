"""work: does waiting jobs and keeps the schedule, until told to stop. ``--once`` does what is due now and ends."""

from __future__ import annotations

import datetime as dt
import logging
import os
import signal
import threading
from typing import Any

from django.core.management.base import BaseCommand, CommandParser
from django.db import close_old_connections

from plant import clock
from plant.jobs import actions, registry

logger = logging.getLogger(__name__)
PAUSE_SECONDS = 1.0


class Command(BaseCommand):
    help = "Does waiting jobs and keeps the schedule. Where no broker is configured, one of these runs beside the web server."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--once", action="store_true", help="do what is due now, then end")

    def handle(self, *args: Any, **options: Any) -> None:
        owner = f"work-{os.getpid()}"
        if options["once"]:
            keep_schedule(clock.now(), {})
            done = actions.run_due(owner=owner, now=clock.now())
            self.stdout.write(f"{done} job(s) taken")
            return
        stop = threading.Event()
        for number in (signal.SIGTERM, signal.SIGINT):
            signal.signal(number, lambda *_: stop.set())
        asked: dict[str, dt.datetime] = {}
        while not stop.is_set():
            try:
                close_old_connections()
                now = clock.now()
                keep_schedule(now, asked)
                taken = actions.run_due(owner=owner, now=now)
            except Exception:
                # The database may be away for a moment; the rows wait for it.
                logger.exception("work: a round failed")
                taken = 0
            if not taken:
                stop.wait(PAUSE_SECONDS)


def keep_schedule(now: dt.datetime, asked: dict[str, dt.datetime]) -> None:
    """Asks for regular work whose time has come; ``asked`` remembers when each was asked last."""
    for regular in registry.schedule():
        last = asked.get(regular.name)
        if last is None or now - last >= regular.every:
            regular.ask(now=now)
            asked[regular.name] = now
