"""Work done later: asked for once, claimed by one, put back when it fails, taken over when its holder falls silent."""

import datetime as dt
import threading
import time

import pytest

from plant.jobs import actions, models, queries, registry, running
from tests import people

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 3, 1, 6, tzinfo=dt.UTC)
STATE = models.Job.State


@pytest.fixture
def done(monkeypatch):
    calls = []
    kind(monkeypatch, lambda **given: calls.append(given))
    return calls


def kind(monkeypatch, function, **more):
    monkeypatch.setattr(registry, "_kinds", dict(registry._kinds))
    registry.register("note", function, **more)


def ask(key="k", **more):
    actions.enqueue(kind="note", key=key, now=NOW, arguments={"text": "hello"}, **more)


def test_asking_twice_is_asking_once(done):
    ask()
    ask()
    assert models.Job.objects.count() == 1
    assert running.run_due(owner="a", now=NOW) == 1
    assert done == [{"now": NOW, "text": "hello"}]


def test_what_is_done_can_be_asked_for_again(done):
    ask()
    running.run_due(owner="a", now=NOW)
    ask()
    running.run_due(owner="a", now=NOW)
    assert len(done) == 2


def test_one_row_is_claimed_once():
    ask()
    assert actions.claim(owner="a", now=NOW) is not None
    assert actions.claim(owner="b", now=NOW) is None


def test_a_silent_holder_loses_the_row_after_a_minute(done):
    ask()
    job = actions.claim(owner="a", now=NOW)
    assert dt.timedelta(minutes=1) >= actions.LEASE
    assert actions.claim(owner="b", now=NOW + actions.LEASE) is None
    later = NOW + actions.LEASE + dt.timedelta(seconds=1)
    taken = actions.claim(owner="b", now=later)
    assert taken.pk == job.pk
    # The first holder wakes up: what it writes down changes nothing any more.
    assert running.run(job=job, now=later) is False
    row = models.Job.objects.get()
    assert (row.state, row.owner) == (STATE.RUNNING, "b")
    assert running.run(job=taken, now=later) is True
    assert models.Job.objects.get().state == STATE.DONE


def test_the_same_worker_coming_back_to_its_own_lost_row_is_fenced_too(done):
    ask()
    first = actions.claim(owner="a", now=NOW)
    later = NOW + actions.LEASE * 2
    second = actions.claim(owner="a", now=later)
    assert running.run(job=first, now=later) is False
    assert running.run(job=second, now=later) is True


def test_a_holder_that_says_how_far_it_is_learns_that_it_lost_the_row(monkeypatch):
    went_on = []

    def work(**given):
        running.tell("3 of 10")
        models.Job.objects.update(owner="b")
        running.tell("4 of 10")
        went_on.append(True)

    kind(monkeypatch, work)
    ask()
    running.run_due(owner="a", now=NOW)
    row = models.Job.objects.get()
    assert (row.state, row.owner, row.progress) == (STATE.RUNNING, "b", "3 of 10")
    assert went_on == []


def test_outside_a_job_saying_how_far_does_nothing():
    running.tell("on its own")


def test_an_error_waits_longer_each_time_and_ends(monkeypatch):
    def fail(**given):
        raise RuntimeError("mail server away")

    kind(monkeypatch, fail)
    ask()
    now, waits = NOW, []
    for _ in range(actions.MOST_ATTEMPTS):
        assert running.run_due(owner="a", now=now) == 1
        job = models.Job.objects.get()
        waits.append(job.run_after - now)
        now = max(now, job.run_after)
    assert job.state == STATE.FAILED
    assert "mail server away" in job.error
    assert waits[:4] == sorted(waits[:4])
    assert waits[0] < waits[3]


def test_jobs_that_failed_together_do_not_come_back_together():
    waits = {running.wait_before(1).total_seconds() for _ in range(20)}
    assert len(waits) > 10
    assert 45 <= min(waits) <= max(waits) <= 75


def test_a_row_that_kills_its_workers_is_given_up():
    ask()
    now = NOW
    for attempt in range(actions.MOST_ATTEMPTS):
        assert actions.claim(owner=f"worker {attempt}", now=now) is not None
        now += actions.LEASE * 2
    assert actions.claim(owner="one more", now=now) is None
    row = models.Job.objects.get()
    assert row.state == STATE.FAILED
    assert "5 times" in row.error


def test_a_job_that_takes_too_long_is_broken_off_even_if_it_catches_every_error(monkeypatch):
    def hang(**given):
        for _ in range(100):
            try:
                time.sleep(0.1)
            except Exception:  # noqa: BLE001 — what a careless job may do
                continue

    kind(monkeypatch, hang, limit=dt.timedelta(seconds=0.3))
    ask()
    began = time.monotonic()
    running.run_due(owner="a", now=NOW)
    assert time.monotonic() - began < 2
    row = models.Job.objects.get()
    assert row.state == STATE.QUEUED
    assert "longer than" in row.error
    assert row.run_after > NOW


def test_no_kind_may_take_longer_than_the_longest():
    with pytest.raises(ValueError, match="at most"):
        registry.register("x", lambda **given: None, limit=registry.LONGEST_LIMIT * 2)


@pytest.mark.django_db(transaction=True)
def test_a_running_job_keeps_its_row(monkeypatch):
    """Signs of life go out from a connection of their own while the job works."""
    monkeypatch.setattr(running, "RENEW_EVERY_S", 0.05)
    seen = threading.Event()

    def work(**given):
        models.Job.objects.update(lease_until=NOW)
        end = time.monotonic() + 10
        while models.Job.objects.get().lease_until == NOW and time.monotonic() < end:
            time.sleep(0.02)
        if models.Job.objects.get().lease_until > NOW:
            seen.set()

    kind(monkeypatch, work)
    ask()
    running.run_due(owner="a", now=NOW)
    assert seen.is_set()
    assert models.Job.objects.get().state == STATE.DONE


@pytest.mark.django_db(transaction=True)
def test_a_job_that_hangs_gives_no_more_signs_of_life(monkeypatch):
    monkeypatch.setattr(running, "RENEW_EVERY_S", 0.02)
    monkeypatch.setattr(running, "GRACE_S", 0.0)
    ask()
    job = actions.claim(owner="a", now=NOW)
    running._renew(job, 0.0, False, threading.Event())
    assert models.Job.objects.get().lease_until == job.lease_until


def test_an_unknown_kind_is_a_failure_not_a_crash():
    actions.enqueue(kind="nobody knows", key="k", now=NOW)
    assert running.run_due(owner="a", now=NOW) == 1
    assert "nobody knows" in models.Job.objects.get().error


def test_not_before_its_time(done):
    ask(run_after=NOW + dt.timedelta(minutes=5))
    assert running.run_due(owner="a", now=NOW) == 0
    assert running.run_due(owner="a", now=NOW + dt.timedelta(minutes=5)) == 1


# Waking ------------------------------------------------------------------------------------------------------


@pytest.fixture
def woken(monkeypatch):
    calls = []
    monkeypatch.setattr(registry, "_wakers", [lambda: calls.append(1)])
    return calls


def test_workers_are_woken_after_the_commit_only(woken, django_capture_on_commit_callbacks):
    with django_capture_on_commit_callbacks(execute=True):
        ask()
        assert woken == []
    assert woken == [1]


def test_what_is_for_later_wakes_nobody(woken, django_capture_on_commit_callbacks):
    with django_capture_on_commit_callbacks(execute=True):
        ask(run_after=NOW + dt.timedelta(minutes=1))
    assert woken == []


def test_a_waker_that_fails_fails_nobody(monkeypatch, django_capture_on_commit_callbacks):
    def broken():
        raise OSError("no broker")

    monkeypatch.setattr(registry, "_wakers", [broken])
    with django_capture_on_commit_callbacks(execute=True):
        ask()
    assert models.Job.objects.count() == 1


# Regular work ------------------------------------------------------------------------------------------------


def test_many_who_keep_the_schedule_ask_once(monkeypatch):
    asked = []
    monkeypatch.setattr(registry, "_schedule", [])
    registry.regularly("hourly", every=dt.timedelta(hours=1), ask=lambda now: asked.append(now))
    for minutes in (0, 0, 1, 59, 60, 60, 61):
        actions.keep_schedule(now=NOW + dt.timedelta(minutes=minutes))
    assert asked == [NOW, NOW + dt.timedelta(hours=1)]


def test_regular_work_that_fails_stops_no_other_and_is_asked_again(monkeypatch):
    asked, broken = [], [True]

    def ask_badly(now):
        if broken:
            raise RuntimeError

    monkeypatch.setattr(registry, "_schedule", [])
    registry.regularly("bad", every=dt.timedelta(hours=1), ask=ask_badly)
    registry.regularly("good", every=dt.timedelta(hours=1), ask=lambda now: asked.append(now))
    assert actions.keep_schedule(now=NOW) == ["good"]
    broken.clear()
    assert actions.keep_schedule(now=NOW + dt.timedelta(minutes=1)) == ["bad"]


def test_old_rows_are_cleared_out(done):
    ask("done")
    running.run_due(owner="a", now=NOW)
    ask("waits")
    finished = models.Job.objects.get(key="done").finished_at
    assert actions.clear_out(now=finished + actions.KEEP_DONE - dt.timedelta(days=1)) == 0
    assert actions.clear_out(now=finished + actions.KEEP_DONE + dt.timedelta(days=1)) == 1
    assert models.Job.objects.get().key == "waits"


# The page ----------------------------------------------------------------------------------------------------


@pytest.fixture
def failed(monkeypatch):
    book = people.small_works()

    def fail(**given):
        raise RuntimeError("the printer is on fire")

    kind(monkeypatch, fail, words="printing")
    ask("page 3", book=book)
    models.Job.objects.update(attempts=actions.MOST_ATTEMPTS - 1)
    running.run_due(owner="a", now=NOW)
    job = models.Job.objects.get()
    models.Job.objects.update(finished_at=dt.datetime.now(dt.UTC))
    assert job.state == STATE.FAILED
    return job


def test_the_page_shows_what_failed_and_runs_it_again(failed):
    client = people.signed_in("sam")
    page = client.get("/w/TST/jobs/").content.decode()
    assert "printing" in page
    assert "the printer is on fire" in page
    answer = client.post(f"/w/TST/jobs/{failed.pk}/again/", follow=True)
    assert "waits for the next free worker" in answer.content.decode()
    row = models.Job.objects.get()
    assert (row.state, row.attempts, row.asked_again_by.username) == (STATE.QUEUED, 0, "sam")


def test_what_runs_is_not_run_again(failed):
    models.Job.objects.update(state=STATE.RUNNING, owner="a", lease_until=NOW + dt.timedelta(days=9999))
    answer = people.signed_in("sam").post(f"/w/TST/jobs/{failed.pk}/again/", follow=True)
    assert "nothing to run again" in answer.content.decode()
    assert models.Job.objects.get().state == STATE.RUNNING


def test_what_waits_already_is_not_asked_for_twice(failed):
    ask("page 3", book=failed.book)
    answer = people.signed_in("sam").post(f"/w/TST/jobs/{failed.pk}/again/", follow=True)
    assert "waiting already" in answer.content.decode()


@pytest.mark.parametrize(("who", "status"), [("olga", 403), ("ira", 403), ("stan", 404)])
def test_others_do_not_see_it(failed, who, status):
    client = people.signed_in(who)
    assert client.get("/w/TST/jobs/").status_code == status
    assert client.post(f"/w/TST/jobs/{failed.pk}/again/").status_code == status


def test_work_of_the_whole_site_is_for_administrators(failed):
    models.Job.objects.update(book=None)
    assert "printing" not in people.signed_in("sam").get("/w/TST/jobs/").content.decode()
    assert people.signed_in("sam").post(f"/w/TST/jobs/{failed.pk}/again/").status_code == 404
    assert "printing" in people.signed_in("adam").get("/w/TST/jobs/").content.decode()


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"state": STATE.RUNNING, "lease_until": NOW - dt.timedelta(seconds=1)}, "lost"),
        ({"state": STATE.RUNNING, "lease_until": NOW + dt.timedelta(seconds=30)}, "running"),
        ({"state": STATE.QUEUED, "run_after": NOW - dt.timedelta(minutes=5)}, "too long"),
        ({"state": STATE.QUEUED, "run_after": NOW + dt.timedelta(minutes=5), "attempts": 1}, "next try"),
        ({"state": STATE.DONE, "finished_at": NOW}, "done"),
    ],
)
def test_states_in_words(changes, words):
    ask()
    models.Job.objects.update(**changes)
    assert words in queries.view(models.Job.objects.get(), NOW).state
