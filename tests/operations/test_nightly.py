"""The nightly back-up as a worker does it."""

import pytest

from deploy.backups import keeping
from tests.operations.site import Site

pytestmark = [pytest.mark.service, pytest.mark.slow]
ASK = """
import django; django.setup()
from plant import clock; from plant.jobs import actions; from deploy.backups import nightly
actions.enqueue(kind=nightly.KIND, key="tonight", now=clock.now())
"""


def test_a_worker_makes_it_and_tries_it(tmp_path):
    site = Site(more={"WEIRBOOK_BACKUPS": str(tmp_path)})
    try:
        site.python(ASK)
        site.manage("work", "--once")
        row = site.ask("list(Job.objects.filter(kind='back_up', key='tonight').values_list('state', 'error'))")
        assert row == [["done", ""]]
    finally:
        site.close()
    assert [keeping.moment_of(path) is not None for path in tmp_path.iterdir()][:1] == [True]
