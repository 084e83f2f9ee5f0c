"""The nightly back-up as a job: asked for once a night, done by whichever worker is free."""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import Any

from django.conf import settings

from deploy.backups import making, sealing
from plant.jobs import actions, queries, running

KIND = "back_up"
NOT_BEFORE_HOUR_UTC = 1


def ask(*, now: dt.datetime) -> None:
    """Asks for tonight's back-up, where a folder for back-ups is named."""
    if settings.WEIRBOOK_BACKUPS and now.hour >= NOT_BEFORE_HOUR_UTC and not queries.asked_for(KIND, now.date().isoformat()):
        actions.enqueue(kind=KIND, key=now.date().isoformat(), now=now)


def back_up(*, now: dt.datetime, **later_version: Any) -> None:
    """The job. A try that failed leaves no file, so it is simply made again."""
    key_file = settings.WEIRBOOK_BACKUP_KEY_FILE
    running.tell("writing, then restoring into a scratch database")
    making.make(folder=Path(settings.WEIRBOOK_BACKUPS), now=now, secret=sealing.read_key(Path(key_file)) if key_file else None)
