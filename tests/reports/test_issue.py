"""Prepared, certified, issued once, revised with reasons; and what tampering leaves behind."""

from __future__ import annotations

import datetime as dt
import io
from pathlib import Path
from typing import Any

import pypdf
import pytest
from django.db import connection

from plant.ledger import actions as ledger
from plant.ledger import locks, verify
from plant.ledger.models import AppendOnlyError, Book
from plant.readings.models import Reading
from plant.reports import actions, checklist, content, queries
from plant.reports.models import Preparation, Report
from plant.reports.month import gather
from plant.works import actions as works
from tests import people
from tests.reports import plan

pytestmark = pytest.mark.django_db

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)
LATER = NOW + dt.timedelta(hours=5)


@pytest.fixture
def book(tmp_path: Path) -> Book:
    found, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=NOW - dt.timedelta(hours=2))
    return found


def prepare(book: Book, *, now: dt.datetime = NOW, who: str = "sam", **changed: Any) -> Preparation:
    """Prepares March with an explanation for all that is open."""
    items = checklist.of(gather(book, 2026, 3, now=now))
    given: dict[str, Any] = {
        "year": 2026,
        "month": 3,
        "by": people.person(who),
        "password": people.PASSWORD,
        "explanations": {item.key: f"known: {item.key}" for item in items},
        "now": now,
    }
    return actions.prepare(book=book, **(given | changed))


def certify(
    book: Book, *, now: dt.datetime = NOW, who: str = "mira", password: str = people.PASSWORD, reason: str = ""
) -> actions.Issued:
    return actions.certify_and_issue(
        book=book, year=2026, month=3, by=people.person(who), password=password, now=now, reason=reason
    )


def shell(book: Book, *, now: dt.datetime = NOW, **more: Any) -> actions.Issued:
    return actions.issue_from_shell(book=book, year=2026, month=3, now=now, **more)


def pages(report: Report) -> str:
    return "\n".join(page.extract_text() for page in pypdf.PdfReader(io.BytesIO(queries.pdf(report))).pages)


def correct(book: Book, *, site: str, parameter: str, at: str, value: str, reason: str, now: dt.datetime) -> Reading:
    """A correction as the reading's page makes it."""
    old = Reading.objects.get(book=book, site=site, parameter=parameter, taken_at=plan.local(at))
    new = Reading(
        site=old.site,
        parameter=old.parameter,
        taken_at=old.taken_at,
        typed=value,
        typed_unit=old.typed_unit,
        value=float(value),
        value_text=value,
        unit=old.unit,
        supersedes=old,
        reason=reason,
    )
    ledger.append(
        book=book,
        client_id=f"correct {old.ref}",
        kind="correction",
        received={"value": value},
        rows=[new],
        by=people.person("sam"),
        now=now,
    )
    return new


# Signing.


def test_prepared_and_certified_stand_on_the_cover_with_licence_and_time(book: Book) -> None:
    prepare(book)
    done = certify(book, now=LATER)
    assert done.created
    first_page = pypdf.PdfReader(io.BytesIO(queries.pdf(done.report))).pages[0].extract_text()
    for words in (
        "Sam Sundby",
        "Mira Maas",
        "Licence L-1001, class III",
        "2026-04-02 12:00 local time",
        "2026-04-02 17:00 local time",
    ):
        assert words in first_page
    assert "Not the regulator's form" in first_page
    assert "known: missing:ENTRY:free_chlorine" in pages(done.report)


def test_who_may_sign_what(book: Book) -> None:
    for who in ("olga", "ira", "adam", "stan"):
        with pytest.raises(actions.MayNotSign):
            prepare(book, who=who)
    prepare(book)
    for who in ("sam", "olga", "ira", "adam", "stan"):
        with pytest.raises(actions.MayNotSign):
            certify(book, who=who)
    assert not Report.objects.exists()


def test_a_signature_needs_the_password(book: Book) -> None:
    with pytest.raises(actions.WrongPassword):
        prepare(book, password="water over the weir 8")
    prepare(book)
    with pytest.raises(actions.WrongPassword):
        certify(book, password="")
    assert not Report.objects.exists()


def test_what_hinders_is_mended_or_explained(book: Book) -> None:
    with pytest.raises(actions.NotReady) as caught:
        prepare(book, explanations={})
    assert "missing:ENTRY:free_chlorine" in {item.key for item in caught.value.open_items}


def test_a_month_that_still_runs_is_never_issued(book: Book) -> None:
    early = dt.datetime(2026, 4, 1, 4, tzinfo=dt.UTC)
    running = gather(book, 2026, 3, now=early)
    assert [item.key for item in checklist.of(running) if item.must] == ["not-over"]
    with pytest.raises(actions.NotReady, match="runs until 2026-04-01 07:00"):
        shell(book, now=early)


def test_nothing_is_certified_that_was_not_prepared(book: Book) -> None:
    with pytest.raises(actions.NotPrepared):
        certify(book)


def test_a_record_that_comes_after_preparing_asks_for_preparing_again(book: Book, tmp_path: Path) -> None:
    prepare(book)
    correct(book, site="ENTRY", parameter="pH", at="2026-03-10T07:00", value="8.44", reason="read wrongly", now=LATER)
    with pytest.raises(actions.NotPrepared, match="ENTRY pH"):
        certify(book, now=LATER)
    prepare(book, now=LATER)
    assert certify(book, now=LATER).created


def test_a_reading_of_april_does_not_undo_the_preparation_of_march(book: Book, tmp_path: Path) -> None:
    prepare(book)
    plan.bring(book, [("ENTRY", "2026-04-02T07:00", "pH", "8.10", "", "")], tmp_path, now=LATER)
    assert certify(book, now=LATER).created


def test_issuing_twice_gives_the_one_report(book: Book) -> None:
    prepare(book)
    first, second = certify(book, now=LATER), certify(book, now=LATER + dt.timedelta(hours=1))
    assert (first.created, second.created) == (True, False)
    assert first.report.pk == second.report.pk
    assert Report.objects.count() == 1


def test_preparing_again_without_any_change_makes_no_second_issue_without_a_reason(book: Book) -> None:
    prepare(book)
    certify(book)
    prepare(book, now=LATER)
    with pytest.raises(actions.ReasonMissing):
        certify(book, now=LATER)


# From the shell.


def test_from_the_shell_nobody_has_signed_and_the_cover_says_so(book: Book) -> None:
    done = shell(book)
    first_page = pages(done.report)[:3000]
    assert first_page.count("Issued from the shell, not signed") == 2
    assert first_page.count("Not signed") >= 2
    assert "not explained" in pages(done.report)


def test_names_given_at_the_shell_are_no_signatures(book: Book) -> None:
    done = shell(book, prepared_by=people.person("sam"), certified_by=people.person("mira"))
    text = pages(done.report)
    assert "Mira Maas" in text
    assert text.count("Named at the shell; no password was entered") == 2
    with pytest.raises(actions.MayNotSign):
        shell(book, certified_by=people.person("olga"))


def test_the_shell_gives_the_same_bytes_again(book: Book) -> None:
    first = shell(book)
    second = shell(book, now=LATER)
    assert not second.created
    assert queries.pdf(first.report) == queries.pdf(second.report)


# Revisions.


def test_a_correction_after_issue_makes_a_revision_with_old_and_new(book: Book) -> None:
    first = shell(book).report
    before = queries.pdf(first)
    correct(
        book,
        site="NAOH-BULK",
        parameter="level",
        at="2026-03-11T07:00",
        value="2.300",
        reason="read from the wrong side of the glass",
        now=LATER,
    )
    month = gather(book, 2026, 3, now=LATER)
    since = queries.changed_since_issue(first, month)
    assert [(change.new, change.who) for change in since.found] == [("2.300 m", "Sam Sundby")]
    assert any("CAUSTIC-PH used" in which for which, _, _ in since.moved)
    second = shell(book, now=LATER, reason="corrected level").report
    assert (second.revision, second.supersedes_id) == (2, first.pk)
    text = pages(second)
    for words in (
        "What this revision changes",
        "read from the wrong side of the glass",
        "2.300 m",
        "Sam Sundby",
        "corrected level",
    ):
        assert words in text
    # The first issue is what it was.
    assert queries.pdf(Report.objects.get(pk=first.pk)) == before
    assert [report.revision for report in queries.issues(book, "2026-03")] == [2, 1]


def test_a_late_reading_is_found_by_itself(book: Book, tmp_path: Path) -> None:
    first = shell(book).report
    plan.bring(book, [("ENTRY", "2026-03-15T12:30", "free_chlorine", "0.31", "mg/L", "entered late")], tmp_path, now=LATER)
    since = queries.changed_since_issue(first, gather(book, 2026, 3, now=LATER))
    assert [(change.what, change.old, change.new) for change in since.found] == [
        ("ENTRY free chlorine", "not on record", "0.31 mg/L")
    ]


def test_the_first_reading_after_the_month_moves_its_last_day(tmp_path: Path) -> None:
    """Issued before the morning round of the 1st was in: the boundary reading comes later, and the last day becomes known."""
    now = dt.datetime(2026, 4, 1, 6, tzinfo=dt.UTC)
    book = people.small_works()
    rows: list[tuple[str, ...]] = list(plan.lines(dt.date(2026, 2, 20), dt.date(2026, 3, 31)))
    closing = [row for row in rows if row[1].startswith("2026-04-01")]
    plan.bring(book, [row for row in rows if row not in closing], tmp_path, now=now)
    plan.deliver(book, now=now)
    first = shell(book, now=now).report
    plan.bring(book, closing, tmp_path, now=LATER)
    since = queries.changed_since_issue(first, gather(book, 2026, 3, now=LATER))
    assert any("· 31 Mar · CAUSTIC-PH used" in which and was == "–" for which, was, _ in since.moved)
    assert shell(book, now=LATER).report.revision == 2


def test_a_setting_stated_later_for_the_month_is_found(book: Book) -> None:
    first = shell(book).report
    works.state(
        book=book,
        kind="design_dose",
        subject="CAUSTIC-PH",
        value={"dose_mg_per_L": 9.0},
        effective_from=plan.local("2026-03-20T07:00").astimezone(dt.UTC),
        reason="softer water",
        by=people.person("sam"),
        now=LATER,
    )
    since = queries.changed_since_issue(first, gather(book, 2026, 3, now=LATER))
    assert len(since.found) == 1
    change = since.found[0]
    assert (change.kind, change.why) == ("setting", "softer water")
    assert "8" in change.old
    assert "9" in change.new


def test_records_of_april_make_no_revision_of_march(book: Book, tmp_path: Path) -> None:
    first = shell(book).report
    plan.bring(book, [("ENTRY", "2026-04-01T19:00", "free_chlorine", "0.44", "mg/L", "")], tmp_path, now=LATER)
    assert not queries.changed_since_issue(first, gather(book, 2026, 3, now=LATER)).anything


def test_an_old_issue_shows_what_was_known_then(book: Book) -> None:
    known = shell(book).report.known_seq
    old = content.sections(gather(book, 2026, 3, now=NOW, known=known))
    correct(book, site="NAOH-BULK", parameter="level", at="2026-03-11T07:00", value="2.300", reason="wrong", now=LATER)
    assert content.sections(gather(book, 2026, 3, now=NOW, known=known)) == old
    assert content.sections(gather(book, 2026, 3, now=LATER)) != old


# Proof.


def test_the_head_of_the_book_is_printed(book: Book) -> None:
    report = shell(book).report
    assert report.head_hash[:32] in pages(report)
    assert report.head_hash[32:] in pages(report)


def test_one_changed_byte_is_found(book: Book) -> None:
    report = shell(book).report
    data = queries.pdf(report)
    assert queries.check_file(book, data).verdict == "issued"
    for place in (20, len(data) // 3, len(data) - 20):
        other = bytearray(data)
        other[place] ^= 1
        assert queries.check_file(book, bytes(other)).verdict == "altered"
    assert queries.check_file(book, b"%PDF-1.4 something else").verdict == "unknown"
    draft = content.render(content.draft(gather(book, 2026, 3, now=NOW)))
    assert queries.check_file(book, draft).verdict == "altered"


def test_a_replaced_issue_is_told_from_the_newest(book: Book) -> None:
    first = shell(book).report
    correct(book, site="ENTRY", parameter="pH", at="2026-03-10T07:00", value="8.44", reason="read wrongly", now=LATER)
    shell(book, now=LATER)
    assert queries.check_file(book, queries.pdf(first)).superseded


def test_reports_are_never_changed_or_removed(book: Book) -> None:
    report = shell(book).report
    with pytest.raises(AppendOnlyError):
        report.delete()
    with pytest.raises(AppendOnlyError):
        Report.objects.filter(pk=report.pk).update(number="other")
    with pytest.raises(AppendOnlyError):
        report.file.save()


def test_tampering_with_pdf_content_or_record_is_told(book: Book) -> None:
    report = shell(book).report
    assert list(queries.verify(book)) == []
    assert list(verify.chain(book)) == []

    def tampered(sql: str, value: object) -> list[str]:
        with connection.cursor() as cursor:
            cursor.execute(sql, [value, report.pk])
        return [*queries.verify(book), *verify.chain(book)]

    _lift("reports_reportfile", "reports_report")
    try:
        data = bytearray(queries.pdf(report))
        kept = report.file.content
        data[500] ^= 1
        found = tampered("UPDATE reports_reportfile SET pdf = %s WHERE report_id = %s", bytes(data))
        assert any("stored PDF is not what was issued" in words for words in found)
        tampered("UPDATE reports_reportfile SET pdf = %s WHERE report_id = %s", queries.pdf(report))
        found = tampered("UPDATE reports_reportfile SET content = %s WHERE report_id = %s", kept.replace("2026", "2025", 1))
        assert any("stored content is not what was issued" in words for words in found)
        tampered("UPDATE reports_reportfile SET content = %s WHERE report_id = %s", kept)
        found = tampered("UPDATE reports_report SET pdf_hash = %s WHERE id = %s", "0" * 64)
        assert any("differs in pdf_hash" in words for words in found)
    finally:
        locks.install(connection, ["reports_reportfile", "reports_report"])


def _lift(*tables: str) -> None:
    with connection.cursor() as cursor:
        for table in tables:
            if connection.vendor == "postgresql":
                cursor.execute(f"DROP TRIGGER lock_{table} ON {table}")
            else:
                cursor.execute(f"DROP TRIGGER lock_{table}_update")
                cursor.execute(f"DROP TRIGGER lock_{table}_delete")
