"""The site's Celery application with one more kind of job, slow enough to be killed in its midst.

Its work is an entry in the book under an id of its own, as a report's would be: done twice it is there once.
"""

import time

from deploy.celery import app
from plant.jobs import registry

__all__ = ["app"]
SECONDS = 3.0


def work(*, now, number, **extra):
    from plant.jobs import running
    from plant.ledger import actions, queries

    for part in range(10):
        running.tell(f"{part} of 10")
        time.sleep(SECONDS / 10)
    actions.append(
        book=queries.book("TST"), client_id=f"trial {number}", kind="trial", received={"number": number}, rows=[], by=None, now=now
    )


registry.register("trial", work, words="Trial")
