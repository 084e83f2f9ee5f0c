"""Asking for work, claiming it, and writing down what came of it."""

from __future__ import annotations

import datetime as dt
import logging
from typing import Any

from django.db import transaction
from django.db.models import F, Q

from plant.jobs import models, registry
from plant.ledger.models import Book

logger = logging.getLogger(__name__)

LEASE = dt.timedelta(minutes=10)
MOST_ATTEMPTS = 5


def enqueue(
    *,
    kind: str,
    key: str,
    now: dt.datetime,
    book: Book | None = None,
    arguments: dict[str, Any] | None = None,
    run_after: dt.datetime | None = None,
) -> None:
    """Notes that a piece of work is to be done. The same kind and key waiting already is enough."""
    models.Job.objects.bulk_create(
        [models.Job(kind=kind, key=key, book=book, arguments=arguments or {}, run_after=run_after or now, created_at=now)],
        ignore_conflicts=True,
    )


def claim(*, owner: str, now: dt.datetime) -> models.Job | None:
    """Takes the next due row, or one whose holder has gone silent. One conditional UPDATE decides who has it."""
    due = Q(state=models.Job.State.QUEUED, run_after__lte=now) | Q(state=models.Job.State.RUNNING, lease_until__lt=now)
    for pk in models.Job.objects.filter(due).order_by("run_after", "pk").values_list("pk", flat=True)[:20]:
        taken = models.Job.objects.filter(due, pk=pk).update(
            state=models.Job.State.RUNNING, owner=owner, lease_until=now + LEASE, attempts=F("attempts") + 1
        )
        if taken:
            return models.Job.objects.get(pk=pk)
    return None


def run(*, job: models.Job, now: dt.datetime) -> bool:
    """Does a claimed job. True when it is done; on an error it waits longer each time, and fails after five attempts."""
    try:
        registry.function(job.kind)(now=now, **job.arguments)
    except Exception as problem:
        logger.exception("job failed", extra={"job": job.pk, "kind": job.kind})
        _put_back(job, now, f"{type(problem).__name__}: {problem}")
        return False
    models.Job.objects.filter(pk=job.pk, owner=job.owner, state=models.Job.State.RUNNING).update(
        state=models.Job.State.DONE, finished_at=now, lease_until=None, error=""
    )
    return True


def _put_back(job: models.Job, now: dt.datetime, error: str) -> None:
    held = models.Job.objects.filter(pk=job.pk, owner=job.owner, state=models.Job.State.RUNNING)
    wait = dt.timedelta(seconds=30 * 2**job.attempts)
    with transaction.atomic():
        waiting = models.Job.objects.filter(kind=job.kind, key=job.key, state=models.Job.State.QUEUED).exists()
        if job.attempts >= MOST_ATTEMPTS or waiting:
            held.update(state=models.Job.State.FAILED, finished_at=now, lease_until=None, error=error[:2000])
        else:
            held.update(state=models.Job.State.QUEUED, run_after=now + wait, lease_until=None, owner="", error=error[:2000])


def run_due(*, owner: str, now: dt.datetime, most: int = 100) -> int:
    """Claims and runs what is due, up to ``most``. Returns how many were taken."""
    taken = 0
    while taken < most:
        job = claim(owner=owner, now=now)
        if job is None:
            break
        run(job=job, now=now)
        taken += 1
    return taken


def settle(*, kind: str, key: str, now: dt.datetime) -> None:
    """Somebody has done a waiting piece of work already: its row is done, so that no worker does it again."""
    models.Job.objects.filter(kind=kind, key=key, state=models.Job.State.QUEUED).update(
        state=models.Job.State.DONE, finished_at=now, error=""
    )
