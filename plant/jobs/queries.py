"""Reads of the jobs: what waits, what runs, what was lost, and whether anybody is working."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from django.db.models import Max, Q

from plant.jobs import models, registry
from plant.ledger.models import Book

LATE = dt.timedelta(minutes=2)
"""A due row that nobody has taken for so long says that no worker runs."""
ASLEEP_AFTER = dt.timedelta(minutes=15)
"""Some regular work comes every five minutes; when none was asked for this long, nobody keeps the schedule."""
FAILED_SHOWN = dt.timedelta(days=30)


@dataclass(frozen=True)
class JobView:
    """One job as the page of jobs shows it. ``level`` is one of normal, settled, alert, action."""

    pk: int
    words: str
    key: str
    state: str
    level: str
    since: dt.datetime
    attempts: int
    progress: str
    error: str
    next_try_at: dt.datetime | None
    can_run_again: bool
    of_site: bool


def of_book(book: Book, *, now: dt.datetime, with_site: bool = False) -> list[JobView]:
    """The jobs of a works, what needs attention first, then the newest; ``with_site`` adds those of no works."""
    mine = Q(book=book) | Q(book=None) if with_site else Q(book=book)
    state = models.Job.State
    waiting = models.Job.objects.filter(mine, state__in=[state.QUEUED, state.RUNNING]).order_by("run_after", "pk")[:200]
    failed = models.Job.objects.filter(mine, state=state.FAILED, finished_at__gte=now - FAILED_SHOWN)
    done = models.Job.objects.filter(mine, state=state.DONE)
    rows = [*failed.order_by("-finished_at", "-pk")[:100], *waiting, *done.order_by("-finished_at", "-pk")[:50]]
    return [view(job, now) for job in rows]


def view(job: models.Job, now: dt.datetime) -> JobView:
    """A row in words."""
    state = models.Job.State
    words, level, since, next_try = "done", "settled", job.finished_at or job.created_at, None
    if job.state == state.FAILED:
        words, level = "failed", "action"
    elif job.state == state.RUNNING:
        silent = job.lease_until is not None and job.lease_until < now
        since = job.started_at or job.created_at
        words, level = ("lost: another worker takes it over", "alert") if silent else ("running", "normal")
    elif job.state == state.QUEUED:
        since = job.created_at
        if job.run_after > now:
            words, level, next_try = ("waits for its next try" if job.attempts else "waits"), "normal", job.run_after
        elif now - job.run_after > LATE:
            words, level = "waits too long: no worker takes it", "alert"
        else:
            words, level = "waits", "normal"
    return JobView(
        pk=job.pk,
        words=registry.words(job.kind),
        key=job.key,
        state=words,
        level=level,
        since=since,
        attempts=job.attempts,
        progress=job.progress,
        error=job.error,
        next_try_at=next_try,
        can_run_again=job.state == state.FAILED or (next_try is not None and job.attempts > 0),
        of_site=job.book_id is None,
    )


def schedule_last_kept() -> dt.datetime | None:
    """When anybody last asked for regular work; None when nobody ever has."""
    found: dt.datetime | None = models.Turn.objects.aggregate(last=Max("last_at"))["last"]
    return found


def asked_for(kind: str, key: str) -> bool:
    """Whether this work was ever asked for, as far as rows are kept, whatever came of it."""
    return models.Job.objects.filter(kind=kind, key=key).exists()


def one(book: Book, pk: int, *, with_site: bool = False) -> models.Job | None:
    """A job of this works (or of none, if asked for)."""
    mine = Q(book=book) | Q(book=None) if with_site else Q(book=book)
    return models.Job.objects.filter(mine, pk=pk).first()
