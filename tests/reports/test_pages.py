"""The pages: who sees them, who may sign there, and that a wrong password signs nothing."""

from __future__ import annotations

import datetime as dt
import hashlib
from pathlib import Path

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile

from plant import clock
from plant.ledger.models import Book
from plant.reports import checklist, queries
from plant.reports.models import Preparation, Report
from plant.reports.month import gather
from tests import people
from tests.reports import plan
from tests.reports.test_issue import correct

pytestmark = pytest.mark.django_db

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)
MONTH = "/w/TST/reports/2026-03/"


@pytest.fixture
def book(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Book:
    monkeypatch.setattr(clock, "now", lambda: NOW)
    found, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=NOW - dt.timedelta(hours=2))
    return found


def explained(book: Book, password: str = people.PASSWORD) -> dict[str, str]:
    """What the form of preparing sends."""
    items = [item for item in checklist.of(gather(book, 2026, 3, now=NOW)) if not item.must]
    return {f"explain_{number}": f"because of {item.key}" for number, item in enumerate(items)} | {"password": password}


def issue(book: Book) -> Report:
    people.signed_in("sam").post(f"{MONTH}prepare/", explained(book))
    people.signed_in("mira").post(f"{MONTH}certify/", {"password": people.PASSWORD})
    return Report.objects.get()


PAGES = ("", "check/", "2026-03/", "2026-03/draft.pdf", "2026-03/draft.csv", "2026-03/draft.xlsx")


def test_members_see_every_page_and_a_stranger_none(book: Book) -> None:
    for who in ("olga", "sam", "mira", "ira", "adam"):
        client = people.signed_in(who)
        assert [client.get(f"/w/TST/reports/{path}").status_code for path in PAGES] == [200] * len(PAGES)
    client = people.signed_in("stan")
    assert [client.get(f"/w/TST/reports/{path}").status_code for path in PAGES] == [404] * len(PAGES)


def test_a_month_that_is_none_is_not_found(book: Book) -> None:
    client = people.signed_in("mira")
    for month in ("2026-13", "2026", "x", "2031-01", "0000-01"):
        assert client.get(f"/w/TST/reports/{month}/").status_code == 404


def test_unknown_kinds_and_revisions_are_not_found(book: Book) -> None:
    client = people.signed_in("mira")
    assert client.get(f"{MONTH}draft.exe").status_code == 404
    assert client.get(f"{MONTH}revision-7.pdf").status_code == 404


def test_no_signature_without_the_right(book: Book) -> None:
    for who, path in (
        ("olga", "prepare"),
        ("ira", "prepare"),
        ("adam", "prepare"),
        ("sam", "certify"),
        ("olga", "certify"),
        ("ira", "certify"),
    ):
        assert people.signed_in(who).post(f"{MONTH}{path}/", explained(book)).status_code == 403
    assert not Preparation.objects.exists()


def test_what_hinders_stands_at_the_left_each_with_its_place(book: Book) -> None:
    page = people.signed_in("sam").get(MONTH).content.decode()
    assert "ENTRY free chlorine" in page
    assert 'href="/w/TST/round/"' in page
    assert "Sign as prepared" in page
    assert "makes no determination of compliance" in page


def test_numbers_open(book: Book) -> None:
    page = people.signed_in("ira").get(MONTH).content.decode()
    assert "/w/TST/trail/?key=used%3ACAUSTIC-PH%3A2026-03-05" in page
    assert 'class="trail" href="/w/TST/reading/' in page


def test_a_wrong_password_keeps_what_was_written_and_signs_nothing(book: Book) -> None:
    answer = people.signed_in("sam").post(f"{MONTH}prepare/", explained(book, "not it"))
    assert answer.status_code == 422
    page = answer.content.decode()
    assert "That is not your password" in page
    assert "because of missing:ENTRY:free_chlorine" in page
    assert not Preparation.objects.exists()


def test_prepare_certify_download_and_check(book: Book) -> None:
    report = issue(book)
    client = people.signed_in("ira")
    page = client.get(MONTH).content.decode()
    assert report.pdf_hash in page
    answer = client.get(f"{MONTH}revision-1.pdf")
    data = answer.content
    assert hashlib.sha256(data).hexdigest() == report.pdf_hash
    assert answer["Content-Disposition"] == 'attachment; filename="TST-2026-03-revision-1.pdf"'
    assert b"TST-2026-03 revision 1" in client.get(f"{MONTH}revision-1.csv").content
    assert client.get(f"{MONTH}revision-1.xlsx").content[:2] == b"PK"

    def checked(content: bytes) -> str:
        return client.post("/w/TST/reports/check/", {"file": SimpleUploadedFile("a.pdf", content)}).content.decode()

    assert "Issued, and unaltered" in checked(data)
    assert "Not an issued report: altered, or a draft" in checked(data[:-10] + b"x" + data[-9:])
    assert "Not a report of this works" in checked(b"hello")


def test_a_change_after_issue_shows_in_the_list_and_on_the_page(book: Book) -> None:
    issue(book)
    correct(
        book,
        site="ENTRY",
        parameter="pH",
        at="2026-03-10T07:00",
        value="8.44",
        reason="read wrongly",
        now=NOW + dt.timedelta(minutes=5),
    )
    client = people.signed_in("mira")
    assert "a revision is due" in client.get("/w/TST/reports/").content.decode()
    page = client.get(MONTH).content.decode()
    assert "Something has changed since revision 1" in page
    assert "8.44" in page
    assert queries.latest(book, "2026-03") is not None


def test_the_due_day_of_the_form_is_kept_in_view(book: Book, monkeypatch: pytest.MonkeyPatch) -> None:
    from plant.works import actions as works

    works.state(
        book=book,
        kind="report",
        subject="form",
        value={"regulator": "Water desk", "due_day": 10, "approval_reference": "F-7"},
        effective_from=clock.BEGINNING,
        reason="stated",
        by=people.person("sam"),
        now=NOW,
    )
    client = people.signed_in("mira")
    assert "Due on 10 April." in client.get("/w/TST/reports/").content.decode()
    assert "Form approved under F-7." in client.get(MONTH).content.decode()
    monkeypatch.setattr(clock, "now", lambda: NOW + dt.timedelta(days=12))
    assert "Was due on 10 April." in client.get("/w/TST/reports/").content.decode()


def test_words_of_people_are_never_markup(book: Book) -> None:
    correct(
        book,
        site="ENTRY",
        parameter="pH",
        at="2026-03-10T07:00",
        value="8.44",
        reason="<script>alert(1)</script>",
        now=NOW - dt.timedelta(minutes=5),
    )
    page = people.signed_in("mira").get(MONTH).content.decode()
    assert "<script>alert" not in page
    assert "&lt;script&gt;alert" in page
