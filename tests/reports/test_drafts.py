"""Drafts made by a worker: each night, when asked for, once however often; a worker killed in the middle leaves the one before."""

from __future__ import annotations

import datetime as dt
import io
from pathlib import Path

import pypdf
import pytest
from django.test import Client

from plant import clock
from plant.jobs import running
from plant.jobs.actions import claim
from plant.jobs.models import Job
from plant.ledger.models import Book
from plant.reports import actions, drafts
from plant.reports.models import Draft, Report
from tests import people
from tests.operations.site import Site, kill_all_of, wait_for
from tests.reports import plan

NOW = dt.datetime(2026, 4, 1, 10, tzinfo=dt.UTC)
NIGHT = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)


@pytest.fixture
def book(db, tmp_path: Path) -> Book:
    found, _ = plan.works(tmp_path, dt.date(2026, 3, 1), dt.date(2026, 3, 31), now=NOW - dt.timedelta(hours=2))
    return found


def waiting() -> list[str]:
    return list(Job.objects.filter(kind=drafts.KIND, state=Job.State.QUEUED).values_list("key", flat=True))


def work(now: dt.datetime) -> None:
    while (job := claim(owner="test", now=now)) is not None:
        running.run(job=job, now=now)


class TestByNight:
    def test_of_the_month_that_is_over(self, book):
        drafts.ask_night(now=NOW)
        drafts.ask_night(now=NOW + dt.timedelta(minutes=30))
        assert waiting() == [f"{book.pk} 2026-03"]
        work(NOW)
        (made,) = Draft.objects.all()
        assert (made.month, made.known_seq) == ("2026-03", Book.objects.get(pk=book.pk).head_seq)
        text = pypdf.PdfReader(io.BytesIO(bytes(made.pdf))).pages[0].extract_text()
        assert "DRAFT of 2026-04-01" in text
        assert Report.objects.count() == 0

    def test_not_before_the_night_after_its_last_day(self, book):
        drafts.ask_night(now=dt.datetime(2026, 4, 1, 6, tzinfo=dt.UTC))
        assert waiting() == [f"{book.pk} 2026-02"]

    def test_again_only_when_something_of_the_month_came_since(self, book, tmp_path):
        drafts.ask_night(now=NOW)
        work(NOW)
        Job.objects.filter(kind=drafts.KIND).delete()
        drafts.ask_night(now=NIGHT)
        assert waiting() == []
        plan.bring(book, [plan.chlorine("2026-03-20T09:00", 77)], tmp_path, now=NIGHT)
        drafts.ask_night(now=NIGHT)
        assert waiting() == [f"{book.pk} 2026-03"]

    def test_no_more_once_it_is_issued(self, book):
        actions.issue_from_shell(book=book, year=2026, month=3, now=NOW)
        drafts.ask_night(now=NIGHT)
        assert waiting() == []

    def test_a_works_of_which_nothing_is_stated_stops_no_other(self, book):
        Book.objects.create(code="BLANK", opened_at=NOW, head_seq=1)
        drafts.ask_night(now=NOW)
        assert waiting() == [f"{book.pk} 2026-03"]


class TestAsked:
    @pytest.fixture
    def sam(self, book, monkeypatch):
        monkeypatch.setattr(clock, "now", lambda: NOW)
        out = Client()
        out.force_login(people.person("sam"))
        return out

    def test_twice_is_one_job_and_one_draft(self, book, sam):
        for _ in range(2):
            assert sam.post("/w/TST/reports/2026-03/draft/ask/").status_code == 302
        assert waiting() == [f"{book.pk} 2026-03"]
        assert "A draft is being made: waits" in sam.get("/w/TST/reports/2026-03/draft/").content.decode()
        assert sam.get("/w/TST/reports/2026-03/draft/night.pdf").status_code == 404
        work(NOW)
        drafts.ask(book=book, month="2026-03", now=NOW)
        work(NOW)
        assert Draft.objects.count() == 1
        page = sam.get("/w/TST/reports/2026-03/").content.decode()
        assert "nothing of the month has come since" in page
        assert sam.get("/w/TST/reports/2026-03/draft/night.pdf").content.startswith(b"%PDF")

    def test_what_came_since_is_counted(self, book, sam, tmp_path):
        drafts.ask(book=book, month="2026-03", now=NOW)
        work(NOW)
        plan.bring(book, [plan.chlorine("2026-03-20T09:00", 77)], tmp_path, now=NOW)
        assert "1 record or setting of the month since" in sam.get("/w/TST/reports/2026-03/draft/").content.decode()

    def test_is_for_whoever_prepares(self, book, sam):
        for who in ("olga", "ira"):
            other = Client()
            other.force_login(people.person(who))
            assert other.post("/w/TST/reports/2026-03/draft/ask/").status_code == 403
        assert sam.post("/w/TST/reports/soon/draft/ask/").status_code == 404
        assert waiting() == []

    def test_a_failure_is_said(self, book, sam, monkeypatch):
        drafts.ask(book=book, month="2026-03", now=NOW)
        monkeypatch.setattr(drafts.content, "render", lambda _: 1 / 0)
        at = NOW
        for _ in range(8):
            work(at)
            at += dt.timedelta(hours=2)
        assert "The last try failed" in sam.get("/w/TST/reports/2026-03/draft/").content.decode()
        assert Draft.objects.count() == 0


SLOWLY = """
import time, django; django.setup()
from django.core.management import call_command
from plant.reports import content
for key, section in list(content.SECTIONS.items()):
    content.SECTIONS[key] = lambda month, section=section: (time.sleep(0.5), section(month))[1]
call_command("work")
"""


@pytest.mark.service
@pytest.mark.slow
def test_a_worker_killed_in_the_middle_leaves_one_draft_made_by_the_next():
    site = Site(more={"WEIRBOOK_ALLOW_NOW": "1"})
    try:
        site.python(
            "import django; django.setup()\n"
            "from plant import clock; from plant.ledger import queries; from plant.reports import drafts\n"
            "import datetime as dt; now = clock.now(); last = now.replace(day=1) - dt.timedelta(days=3)\n"
            "drafts.ask(book=queries.book('TST'), month=f'{last:%Y-%m}', now=now)"
        )
        mine = "list(Job.objects.filter(kind='report_draft').values_list('state', 'attempts', 'progress'))"
        worker = site.start("-c", SLOWLY, name="slow")
        wait_for(lambda: "section" in site.ask(mine)[0][2], 60, "the draft half made")
        kill_all_of(worker)
        assert site.ask(mine)[0][:2] == ["running", 1]
        assert site.ask("apps.get_model('reports.Draft').objects.count()") == 0
        # The minute after which a silent worker is taken for dead.
        site.python(
            "import django; django.setup()\n"
            "from plant.jobs.models import Job; from plant import clock; import datetime as dt\n"
            "Job.objects.filter(kind='report_draft').update(lease_until=clock.now() - dt.timedelta(seconds=1))"
        )
        site.manage("work", "--once")
        assert site.ask(mine)[0][:2] == ["done", 2]
        assert site.ask("apps.get_model('reports.Draft').objects.count()") == 1
    finally:
        site.close()
