"""The inactivation ratio on paper is the one that deviations are judged by."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest

from plant.deviations import evidence
from plant.deviations.judging import contact
from plant.reports import inactivation
from plant.reports.month import gather
from tests.reports import plan

pytestmark = pytest.mark.django_db

NOW = dt.datetime(2026, 4, 2, 10, tzinfo=dt.UTC)


def test_paper_and_judgement_agree_day_by_day(tmp_path: Path) -> None:
    book, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=NOW)
    plan.bring(
        book,
        [("ENTRY", f"2026-03-{day:02d}T09:00", "temperature", f"{6 + day / 3:.1f}", "°C", "") for day in range(1, 31)],
        tmp_path,
        now=NOW,
    )
    month = gather(book, 2026, 3, now=NOW)
    segments = month.stated.contact_segments(month.at)
    assert segments
    found = inactivation.days(month)
    facts = evidence.gather(book, month.stated, month.first, month.last, now=NOW)
    compared = 0
    for day in month.days:
        for segment, result in zip(segments, found[day], strict=True):
            ratio = contact.ratio_of(facts.day(day), segment)
            assert (ratio is None) == (result.ratio is None), (day, result.remark)
            if ratio is not None:
                assert result.ratio == pytest.approx(ratio, rel=1e-12)
                compared += 1
            if ratio:
                assert result.ct_mg_min_l == pytest.approx(result.ct_required_mg_min_l * ratio, rel=1e-9)
    assert compared >= 25


def test_what_is_lacking_is_named(tmp_path: Path) -> None:
    book, _ = plan.works(tmp_path, dt.date(2026, 2, 20), dt.date(2026, 3, 31), now=NOW)
    month = gather(book, 2026, 3, now=NOW)
    results = [result for day in month.days for result in inactivation.days(month)[day]]
    assert {result.remark for result in results} == {"no temperature at ENTRY"}
    assert all(result.ratio is None for result in results)
