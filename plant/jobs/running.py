"""What a worker does with a row it has claimed: the work itself, signs of life meanwhile, and what came of it.

Every write names the owner and the attempt, so that a worker which was taken for dead and comes back writes nothing.
"""

from __future__ import annotations

import contextvars
import datetime as dt
import logging
import os
import secrets
import signal
import socket
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType
from typing import Any

from django.db import DatabaseError, InterfaceError, connection, connections, transaction
from django.db.models import QuerySet

from plant import clock
from plant.jobs import actions, models, registry

logger = logging.getLogger(__name__)

RENEW_EVERY_S = 15.0
GRACE_S = 30.0
"""How long past its limit a job that does not end on being told to is borne, before its process ends itself."""
FIRST_WAIT_S = 30.0
_random = secrets.SystemRandom()
_current: contextvars.ContextVar[models.Job | None] = contextvars.ContextVar("job", default=None)


# Not under Exception: a job that catches every error of its own must not catch these.
class TookTooLong(BaseException):
    """The time limit of a kind of job is over."""


class LeaseLost(BaseException):
    """Another worker has this row now."""


def new_owner() -> str:
    """A name that no other claim has: machine, process, and chance."""
    return f"{socket.gethostname()[:24]}-{os.getpid()}-{secrets.token_hex(6)}"


def held(job: models.Job) -> QuerySet[models.Job]:
    """The row as long as it is still this claim's."""
    return models.Job.objects.filter(
        pk=job.pk, owner=job.owner, attempts=job.attempts, state=models.Job.State.RUNNING
    )


def tell(words: str) -> None:
    """Called by a job to say how far it has come; shown on the page of jobs. Outside a job it does nothing.

    Call it between transactions, not inside one: nobody sees it sooner. Raises LeaseLost when the row is another's now,
    so that a worker that was taken for dead stops.
    """
    job = _current.get()
    if job is not None and not held(job).update(progress=words[:120]):
        raise LeaseLost(f"job {job.pk} is done by another worker now")


def run_due(*, owner: str, now: dt.datetime, most: int = 100, may_exit: bool = False) -> int:
    """Claims and runs what is due, up to ``most``. Returns how many were taken.

    ``may_exit``: this process does nothing else, and may end itself when a job hangs past its limit.
    """
    taken = 0
    while taken < most:
        job = actions.claim(owner=owner, now=now)
        if job is None:
            break
        run(job=job, now=now, may_exit=may_exit)
        taken += 1
    return taken


def run(*, job: models.Job, now: dt.datetime, may_exit: bool = False) -> bool:
    """Does a claimed job. True when it is done; on an error it waits longer each time, and fails after five attempts."""
    token = _current.set(job)
    try:
        kind = registry.kind(job.kind)
        with _signs_of_life(job, kind.limit.total_seconds(), may_exit), _time_limit(kind.limit.total_seconds()):
            kind.function(now=now, **job.arguments)
    except LeaseLost:
        logger.warning("job was taken over by another worker", extra={"job": job.pk, "kind": job.kind})
        return False
    except TookTooLong:
        logger.exception("job took too long", extra={"job": job.pk, "kind": job.kind})
        _put_back(job, now, f"It took longer than {kind.limit.total_seconds():.0f} s and was broken off.")
        return False
    except Exception as problem:
        logger.exception("job failed", extra={"job": job.pk, "kind": job.kind})
        _put_back(job, now, f"{type(problem).__name__}: {problem}")
        return False
    finally:
        _current.reset(token)
    return bool(
        _write(job, state=models.Job.State.DONE, finished_at=max(now, clock.now()), lease_until=None, error="", progress="")
    )


def wait_before(attempt: int) -> dt.timedelta:
    """One, two, four … minutes after the first, second, third attempt, a quarter more or less by chance, so that jobs
    that failed together do not come back together.
    """
    return dt.timedelta(seconds=FIRST_WAIT_S * 2**attempt * _random.uniform(0.75, 1.25))


def _put_back(job: models.Job, now: dt.datetime, error: str) -> None:
    state = models.Job.State
    with transaction.atomic():
        waiting = models.Job.objects.filter(kind=job.kind, key=job.key, state=state.QUEUED).exists()
        if job.attempts >= actions.MOST_ATTEMPTS or waiting:
            changes: dict[str, Any] = {"state": state.FAILED, "finished_at": now}
        else:
            changes = {"state": state.QUEUED, "run_after": now + wait_before(job.attempts), "owner": ""}
        _write(job, lease_until=None, error=error[:2000], **changes)


def _write(job: models.Job, **changes: Any) -> int:
    """The last write of a claim. The work may have outlived its connection (a restarted database): three tries.

    If none succeeds the lease runs out, and the work is done again, which is safe.
    """
    for pause_s in (0.2, 1.0):
        try:
            return held(job).update(**changes)
        except (DatabaseError, InterfaceError):
            if connection.in_atomic_block:
                raise
            connection.close()
            time.sleep(pause_s)
    return held(job).update(**changes)


@contextmanager
def _time_limit(seconds: float) -> Iterator[None]:
    """Raises TookTooLong inside when the time is over. Only the main thread of a process can be interrupted so."""
    if threading.current_thread() is not threading.main_thread():
        yield
        return

    def over(number: int, frame: FrameType | None) -> None:
        raise TookTooLong(f"longer than {seconds:.0f} s")

    before = signal.signal(signal.SIGALRM, over)
    signal.setitimer(signal.ITIMER_REAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)


@contextmanager
def _signs_of_life(job: models.Job, limit_s: float, may_exit: bool) -> Iterator[None]:
    over = threading.Event()
    thread = threading.Thread(target=_renew, args=(job, limit_s, may_exit, over), name=f"lease of job {job.pk}", daemon=True)
    thread.start()
    try:
        yield
    finally:
        over.set()
        thread.join()


def _renew(job: models.Job, limit_s: float, may_exit: bool, over: threading.Event) -> None:
    """Moves the lease on until the work is over or its time is up; a connection of this thread's own does it."""
    end = time.monotonic() + limit_s + GRACE_S
    try:
        while not over.wait(RENEW_EVERY_S):
            if time.monotonic() > end:
                logger.error("job hangs past its limit; its lease is left to run out", extra={"job": job.pk, "kind": job.kind})
                if may_exit:
                    os._exit(70)
                return
            try:
                if not held(job).update(lease_until=clock.now() + actions.LEASE):
                    return
            except (DatabaseError, InterfaceError):
                # Busy or away; the next sign of life may get through before the lease is over.
                logger.warning("could not renew the lease", extra={"job": job.pk})
                connection.close()
    finally:
        connections.close_all()
