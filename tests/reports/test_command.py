"""issue_report from the shell."""

from __future__ import annotations

import csv
import datetime as dt
from io import StringIO
from pathlib import Path
from typing import Any

import pypdf
import pytest
from django.core.management import CommandError, call_command

from plant.reports.models import Report
from tests.reports import plan
from tests.reports.test_issue import correct

pytestmark = pytest.mark.django_db

NOW = "2026-04-02T12:00"
LATER = "2026-04-02T18:00"


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=dt.datetime(2026, 4, 2, 8, tzinfo=dt.UTC))
    return tmp_path


def run(folder: Path, *options: str, now: str = NOW, month: str = "2026-03", name: str = "out.pdf") -> tuple[bytes, str]:
    """The bytes written, and what was said."""
    said: Any = StringIO()
    told: Any = StringIO()
    output = folder / name
    call_command(
        "issue_report",
        "--works",
        "TST",
        "--month",
        month,
        "--output",
        str(output),
        "--now",
        now,
        *options,
        stdout=said,
        stderr=told,
    )
    assert said.getvalue().strip() == str(output)
    return output.read_bytes(), told.getvalue()


def test_issued_once_the_second_run_writes_the_same_bytes(folder: Path) -> None:
    first, words = run(folder)
    second, again = run(folder, now=LATER, name="second.pdf")
    assert first == second
    assert "revision 1: issued; SHA-256" in words
    assert "nothing has changed" in again
    assert Report.objects.count() == 1


def test_after_a_change_the_next_run_issues_a_revision(folder: Path) -> None:
    run(folder)
    book = Report.objects.get().book
    correct(
        book,
        site="ENTRY",
        parameter="pH",
        at="2026-03-10T07:00",
        value="8.44",
        reason="read wrongly",
        now=dt.datetime(2026, 4, 2, 12, tzinfo=dt.UTC),
    )
    data, words = run(folder, "--reason", "pH of the 10th", now=LATER, name="second.pdf")
    assert "revision 2: issued" in words
    assert "pH of the 10th" in "".join(page.extract_text() for page in pypdf.PdfReader(folder / "second.pdf").pages)
    assert run(folder, now=LATER, name="third.pdf")[0] == data


def test_the_figures_are_those_of_the_pdf(folder: Path) -> None:
    run(folder, "--figures", str(folder / "figures.csv"))
    rows = list(csv.DictReader(StringIO((folder / "figures.csv").read_text())))
    assert rows[-1]["text"].startswith("The local regulator's rules govern.")
    assert {row["issue"] for row in rows} == {"TST-2026-03 revision 1"}
    text = "".join("".join(page.extract_text().split()) for page in pypdf.PdfReader(folder / "out.pdf").pages)
    numbers = [row for row in rows if row["value"]]
    assert len(numbers) > 800
    for row in numbers:
        assert row["value"].replace("-", "−") in text


def test_a_draft_issues_nothing(folder: Path) -> None:
    data, words = run(folder, "--draft")
    assert "draft, not issued" in words
    assert data.startswith(b"%PDF")
    assert not Report.objects.exists()


def test_a_draft_of_the_running_month_may_be_written_but_not_issued(folder: Path) -> None:
    run(folder, "--draft", month="2026-04")
    with pytest.raises(CommandError, match="nothing was issued: The month runs until 2026-05-01 07:00"):
        run(folder, month="2026-04")


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"month": "2026-13"}, "is not a month"),
        ({"month": "2031-01"}, "has not begun"),
        ({"now": "2026-01-01T00:00"}, "--now is refused"),
        ({"name": "nowhere/out.pdf"}, "can't be written"),
    ],
)
def test_bad_input_is_one_clear_sentence(folder: Path, options: dict[str, str], words: str) -> None:
    with pytest.raises(CommandError, match=words):
        run(folder, **options)


def test_unknown_works_and_people(folder: Path) -> None:
    with pytest.raises(CommandError, match="there is nobody called 'nobody'"):
        run(folder, "--certified-by", "nobody")
    with pytest.raises(CommandError, match="no right to this signature"):
        run(folder, "--certified-by", "olga")
    with pytest.raises(CommandError, match="NOPE"):
        call_command("issue_report", "--works", "NOPE", "--month", "2026-03", "--output", str(folder / "x.pdf"))
    assert not Report.objects.exists()
