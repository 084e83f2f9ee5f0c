"""The two messages a broker carries. Both only wake somebody up: what is to be done stands in the database.

They carry nothing, so nothing in them can be out of date. A message that is lost costs a few seconds, since beat sends
the next one; a message that comes twice finds the row taken. Workers and `manage.py work` may run side by side, for they
claim the same rows in the same way.
"""

from typing import Any

from celery import Task, shared_task

from plant import clock
from plant.jobs import actions, running


@shared_task(bind=True, name="weirbook.work")
def work(self: Task, **later_version: Any) -> int:
    """Does one due job, and wakes another worker for the next. Returns how many jobs were taken: 0 or 1."""
    taken = running.run_due(owner=running.new_owner(), now=clock.now(), most=1, may_exit=True)
    if taken:
        self.apply_async(expires=60)
    return taken


@shared_task(name="weirbook.keep_schedule")
def keep_schedule(**later_version: Any) -> None:
    """Asks for the regular work whose time has come. Asking too often adds nothing, so two beats do no harm."""
    actions.keep_schedule(now=clock.now())
