"""The yearly summary against pandas over the months' own figure files, and several works in one run."""

from __future__ import annotations

import datetime as dt
import io
from pathlib import Path

import pandas as pd
import pypdf
import pytest
from django.core.management import CommandError, call_command
from django.test import Client

from plant import clock
from plant.ledger.models import Book
from plant.reports import actions, content, facts, yearly
from plant.reports.models import Report
from tests import people
from tests.reports import plan

pytestmark = pytest.mark.django_db
NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)


@pytest.fixture
def book(tmp_path: Path) -> Book:
    found, _ = plan.works(tmp_path, dt.date(2026, 1, 30), dt.date(2026, 3, 31), now=NOW - dt.timedelta(hours=2))
    return found


def issue(book: Book, *months: int) -> None:
    for month in months:
        actions.issue_from_shell(book=book, year=2026, month=month, now=NOW)


def figures(made) -> pd.DataFrame:
    return pd.read_csv(io.StringIO(facts.to_csv(made)), keep_default_na=False)


def test_the_sums_are_those_of_the_monthly_files(book):
    issue(book, 2, 3)
    months = pd.concat(figures(one.made) for one in yearly.issues(book, 2026) if one.made)
    used = months[(months["table"] == "use-month") & (months["row"] == "CAUSTIC-PH, NAOH")]
    wide = used.pivot_table(index="month", columns="quantity", values="full_value", aggfunc="first")
    treated, dosed = wide["Treated"].astype(float), wide["as dosed"].astype(float)

    made = figures(yearly.summary(book, 2026, now=NOW))
    year = made[(made["table"] == "year-CAUSTIC-PH-NAOH") & (made["row"] == "Year")].set_index("quantity")["full_value"]
    assert float(year["Treated"]) == pytest.approx(treated.sum())
    assert float(year["product"]) == pytest.approx(wide["product"].astype(float).sum())
    assert float(year["used"]) == pytest.approx(dosed.sum() / treated.sum(), rel=1e-9)
    design = wide["design"].astype(float)
    assert float(year["design"]) == pytest.approx((design * treated).sum() / treated.sum())


def test_a_month_that_is_not_issued_is_in_no_sum_and_is_named(book):
    issue(book, 3)
    made = yearly.summary(book, 2026, now=NOW)
    assert made.status == "Summary of 1 issued monthly report of 12"
    table = figures(made)
    rows = table[table["table"] == "year-CAUSTIC-PH-NAOH"].set_index(["row", "quantity"])["full_value"]
    assert rows["Year", "Treated"] == rows["March", "Treated"]
    assert rows["February", "Treated"] == ""
    text = "".join(page.extract_text() for page in pypdf.PdfReader(io.BytesIO(content.render(made))).pages)
    assert "Not issued, and in no sum below: January, February, April" in text
    assert Report.objects.get().pdf_hash[:20] in text.replace("\n", "")
    assert "This report makes no determination of compliance." in text
    assert "revision 0" not in text


def test_a_revision_takes_the_place_of_its_month(book, tmp_path):
    issue(book, 3)
    plan.bring(book, [plan.chlorine("2026-03-20T09:00", 77)], tmp_path, now=NOW)
    issue(book, 3)
    assert [one.report.revision for one in yearly.issues(book, 2026) if one.report] == [2]


def test_nothing_issued_is_said(book, tmp_path):
    with pytest.raises(yearly.NothingIssued, match=r"No report of 2026 has been issued yet"):
        yearly.summary(book, 2026, now=NOW)
    with pytest.raises(CommandError, match="No report of 2026"):
        call_command("yearly_summary", "--works", "TST", "--year", "2026", "--output", str(tmp_path / "y.pdf"))
    assert not (tmp_path / "y.pdf").exists()


def test_on_the_page_in_three_forms(book, monkeypatch):
    monkeypatch.setattr(clock, "now", lambda: NOW)
    issue(book, 2)
    ira = Client()
    ira.force_login(people.person("ira"))
    assert "Yearly summary" in ira.get("/w/TST/reports/").content.decode()
    starts = {"pdf": b"%PDF", "csv": b"month,", "xlsx": b"PK"}
    for kind, start in starts.items():
        assert ira.get(f"/w/TST/reports/year/2026.{kind}").content.startswith(start)
    assert ira.get("/w/TST/reports/year/2025.pdf").status_code == 404
    assert ira.get("/w/TST/reports/year/2026.exe").status_code == 404


class TestSeveralWorks:
    def test_each_gets_its_own_file_and_a_second_run_issues_nothing(self, book, tmp_path, capsys):
        text = people.SMALL.read_text().replace('code = "TST"', 'code = "SEC"')
        people.open_works(text, now=NOW)
        for words in ("issued", "issued before"):
            call_command("issue_reports", "--all", "--month", "2026-03", "--into", str(tmp_path))
            out = capsys.readouterr()
            assert out.out.split() == [str(tmp_path / "SEC-2026-03.pdf"), str(tmp_path / "TST-2026-03.pdf")]
            assert out.err.count(words) == 2
        assert Report.objects.count() == 2

    def test_what_hinders_one_hinders_no_other(self, book, tmp_path, capsys):
        Book.objects.create(code="BLANK", opened_at=NOW, head_seq=1)
        with pytest.raises(CommandError, match="1 of 2 works"):
            call_command("issue_reports", "--works", "BLANK", "TST", "--month", "2026-03", "--into", str(tmp_path))
        assert (tmp_path / "TST-2026-03.pdf").exists()
        assert "BLANK (1 of 2): nothing was issued" in capsys.readouterr().err

    def test_no_folder_and_no_works_are_said(self, book, tmp_path):
        with pytest.raises(CommandError, match="is no folder"):
            call_command("issue_reports", "--all", "--month", "2026-03", "--into", str(tmp_path / "none"))
        with pytest.raises(CommandError, match="there is TST"):
            call_command("issue_reports", "--works", "NONE", "--month", "2026-03", "--into", str(tmp_path))
