"""The two messages a broker carries. Both only wake somebody up: what is to be done stands in the database.

A message that is lost costs a few seconds, since beat sends the next one; a message that comes twice finds the row
taken. Workers and `manage.py work` may run side by side, for they claim the same rows in the same way.
"""

from celery import Task, shared_task

from plant import clock
from plant.jobs import actions, registry


@shared_task(bind=True, name="weirbook.work")
def work(self: Task) -> int:
    """Does one due job, and wakes another worker for the next. Returns how many jobs were taken: 0 or 1."""
    taken = actions.run_due(owner=f"celery-{self.request.id}", now=clock.now(), most=1)
    if taken:
        self.apply_async()
    return taken


@shared_task(name="weirbook.keep_schedule")
def keep_schedule() -> None:
    """Asks for all regular work. Asking too often adds nothing, so two beats do no harm."""
    for regular in registry.schedule():
        regular.ask(now=clock.now())
