"""Asking for work, claiming it, and asking again. What a worker does with a claimed row stands in running.py."""

from __future__ import annotations

import datetime as dt
import logging
from typing import Any

from django.db import IntegrityError, transaction
from django.db.models import F, Q

from plant.jobs import models, registry
from plant.ledger.models import Book

logger = logging.getLogger(__name__)

LEASE = dt.timedelta(seconds=60)
"""How long a silent holder keeps a row: what a worker that was killed delays its job by."""
MOST_ATTEMPTS = 5
KEEP_DONE = dt.timedelta(days=30)
KEEP_FAILED = dt.timedelta(days=365)
CLEARED_AT_ONCE = 5000


class CannotRunAgain(ValueError):
    """The message says why a job is not run again."""


def enqueue(
    *,
    kind: str,
    key: str,
    now: dt.datetime,
    book: Book | None = None,
    arguments: dict[str, Any] | None = None,
    run_after: dt.datetime | None = None,
) -> None:
    """Notes that a piece of work is to be done. The same kind and key waiting already is enough.

    Workers are woken once the transaction is committed, never before; a broker that is away costs the caller nothing.
    """
    after = run_after or now
    models.Job.objects.bulk_create(
        [models.Job(kind=kind, key=key, book=book, arguments=arguments or {}, run_after=after, created_at=now)],
        ignore_conflicts=True,
    )
    if after <= now:
        transaction.on_commit(registry.wake, robust=True)


def claim(*, owner: str, now: dt.datetime) -> models.Job | None:
    """Takes the next due row, or one whose holder has gone silent. One conditional UPDATE decides who has it.

    A row that has cost five holders their lives is not given to a sixth; it fails, and the page of jobs shows it.
    """
    state = models.Job.State
    silent = Q(state=state.RUNNING, lease_until__lt=now)
    models.Job.objects.filter(silent, attempts__gte=MOST_ATTEMPTS).update(
        state=state.FAILED,
        finished_at=now,
        lease_until=None,
        error=f"Its worker ended before the work did, {MOST_ATTEMPTS} times.",
    )
    due = Q(state=state.QUEUED, run_after__lte=now) | silent
    for pk in models.Job.objects.filter(due).order_by("run_after", "pk").values_list("pk", flat=True)[:20]:
        taken = models.Job.objects.filter(due, pk=pk).update(
            state=state.RUNNING,
            owner=owner,
            lease_until=now + LEASE,
            started_at=now,
            finished_at=None,
            attempts=F("attempts") + 1,
            progress="",
        )
        if taken:
            return models.Job.objects.get(pk=pk)
    return None


def settle(*, kind: str, key: str, now: dt.datetime) -> None:
    """Somebody has done a waiting piece of work already: its row is done, so that no worker does it again."""
    models.Job.objects.filter(kind=kind, key=key, state=models.Job.State.QUEUED).update(
        state=models.Job.State.DONE, finished_at=now, error=""
    )


def run_again(*, job: models.Job, by: Any, now: dt.datetime) -> None:
    """Puts a failed job back, or one that waits for its next try, to be done now. Raises CannotRunAgain."""
    state = models.Job.State
    try:
        with transaction.atomic():
            changed = models.Job.objects.filter(pk=job.pk, state__in=[state.FAILED, state.QUEUED]).update(
                state=state.QUEUED, run_after=now, attempts=0, finished_at=None, owner="", asked_again_by=by
            )
    except IntegrityError:
        raise CannotRunAgain("The same work is waiting already.") from None
    if not changed:
        raise CannotRunAgain("It is running or done; there is nothing to run again.")
    logger.info("job asked for again", extra={"job": job.pk, "by": getattr(by, "pk", None)})
    transaction.on_commit(registry.wake, robust=True)


def keep_schedule(*, now: dt.datetime) -> list[str]:
    """Asks for the regular work whose time has come; returns the names of what was asked for.

    Any number of workers and beats may call this as often as they like: the row of each name is moved on by one of them.
    """
    asked = []
    for regular in registry.schedule():
        try:
            with transaction.atomic():
                if _takes_turn(regular, now):
                    regular.ask(now=now)
                    asked.append(regular.name)
        except Exception:  # the turn is rolled back with it; one kind of regular work must not stop the others
            logger.exception("asking for regular work failed", extra={"regular": regular.name})
    return asked


def _takes_turn(regular: registry.Regular, now: dt.datetime) -> bool:
    turns = models.Turn.objects.filter(name=regular.name)
    if turns.filter(last_at__lte=now - regular.every).update(last_at=now):
        return True
    if turns.exists():
        return False
    try:
        with transaction.atomic():
            models.Turn.objects.create(name=regular.name, last_at=now)
    except IntegrityError:
        return False
    return True


def clear_out(*, now: dt.datetime) -> int:
    """Removes rows of work long done (30 days) or long failed (a year). Returns how many."""
    state = models.Job.State
    old = Q(state=state.DONE, finished_at__lt=now - KEEP_DONE) | Q(state=state.FAILED, finished_at__lt=now - KEEP_FAILED)
    keys = list(models.Job.objects.filter(old).order_by("pk").values_list("pk", flat=True)[:CLEARED_AT_ONCE])
    for start in range(0, len(keys), 500):
        models.Job.objects.filter(pk__in=keys[start : start + 500]).delete()
    return len(keys)
