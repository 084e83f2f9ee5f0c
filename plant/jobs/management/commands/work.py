"""work: does waiting jobs and keeps the schedule, until told to stop. ``--once`` does what is due now and ends."""

from __future__ import annotations

import logging
import signal
import threading
import time
from typing import Any

from django.core.management.base import BaseCommand, CommandParser
from django.db import close_old_connections

from plant import clock
from plant.jobs import actions, running

logger = logging.getLogger(__name__)
PAUSE_SECONDS = 1.0
SCHEDULE_SECONDS = 20.0


class Command(BaseCommand):
    help = "Does waiting jobs and keeps the schedule. Where no broker is configured, one of these runs beside the web server."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--once", action="store_true", help="do what is due now, then end")

    def handle(self, *args: Any, **options: Any) -> None:
        if options["once"]:
            actions.keep_schedule(now=clock.now())
            done = running.run_due(owner=running.new_owner(), now=clock.now())
            self.stdout.write(f"{done} job(s) taken")
            return
        stop = threading.Event()
        for number in (signal.SIGTERM, signal.SIGINT):
            signal.signal(number, lambda *_: stop.set())
        kept_s = float("-inf")
        while not stop.is_set():
            taken = 0
            try:
                close_old_connections()
                if time.monotonic() - kept_s > SCHEDULE_SECONDS:
                    actions.keep_schedule(now=clock.now())
                    kept_s = time.monotonic()
                taken = running.run_due(owner=running.new_owner(), now=clock.now(), most=1, may_exit=True)
            except Exception:
                # The database may be away for a moment; the rows wait for it.
                logger.exception("work: a round failed")
            if not taken:
                stop.wait(PAUSE_SECONDS)
