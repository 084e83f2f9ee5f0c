"""Work done later: asked for once, claimed by one, put back when it fails, taken over when its holder falls silent."""

import datetime as dt

import pytest

from plant.jobs import actions, models, registry

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)


@pytest.fixture
def done(monkeypatch):
    calls = []
    monkeypatch.setitem(registry._functions, "note", lambda **given: calls.append(given))
    return calls


def ask(key="k", **more):
    actions.enqueue(kind="note", key=key, now=NOW, arguments={"text": "hello"}, **more)


def test_asking_twice_is_asking_once(done):
    ask()
    ask()
    assert models.Job.objects.count() == 1
    assert actions.run_due(owner="a", now=NOW) == 1
    assert done == [{"now": NOW, "text": "hello"}]


def test_what_is_done_can_be_asked_for_again(done):
    ask()
    actions.run_due(owner="a", now=NOW)
    ask()
    actions.run_due(owner="a", now=NOW)
    assert len(done) == 2


def test_one_row_is_claimed_once():
    ask()
    assert actions.claim(owner="a", now=NOW) is not None
    assert actions.claim(owner="b", now=NOW) is None


def test_a_silent_holder_loses_the_row(done):
    ask()
    job = actions.claim(owner="a", now=NOW)
    later = NOW + actions.LEASE + dt.timedelta(seconds=1)
    taken = actions.claim(owner="b", now=later)
    assert taken.pk == job.pk
    actions.run(job=taken, now=later)
    # The first holder wakes up: what he writes down changes nothing any more.
    models.Job.objects.filter(pk=job.pk).update(state=models.Job.State.DONE)
    actions.run(job=job, now=later)
    assert models.Job.objects.get().owner == "b"


def test_an_error_waits_longer_each_time_and_ends(monkeypatch):
    def fail(**given):
        raise RuntimeError("mail server away")

    monkeypatch.setitem(registry._functions, "note", fail)
    ask()
    now, waits = NOW, []
    for _ in range(actions.MOST_ATTEMPTS):
        assert actions.run_due(owner="a", now=now) == 1
        job = models.Job.objects.get()
        waits.append(job.run_after - now)
        now = max(now, job.run_after)
    assert job.state == models.Job.State.FAILED
    assert "mail server away" in job.error
    assert waits[:4] == sorted(waits[:4])
    assert waits[0] < waits[3]


def test_an_unknown_kind_is_a_failure_not_a_crash():
    actions.enqueue(kind="nobody knows", key="k", now=NOW)
    assert actions.run_due(owner="a", now=NOW) == 1
    assert "nobody knows" in models.Job.objects.get().error


def test_not_before_its_time(done):
    ask(run_after=NOW + dt.timedelta(minutes=5))
    assert actions.run_due(owner="a", now=NOW) == 0
    assert actions.run_due(owner="a", now=NOW + dt.timedelta(minutes=5)) == 1
