"""Works to bring readings into."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from pathlib import Path

import pytest

from plant.intake import ground, records
from plant.ledger.models import Book
from plant.works import load, queries

DATA = Path(__file__).resolve().parents[1] / "data"
NOW = dt.datetime(2026, 4, 2, 8, 0, tzinfo=dt.UTC)


@pytest.fixture
def now() -> dt.datetime:
    return NOW


@pytest.fixture
def example(db: None) -> Book:
    """The works of the three days reckoned by hand: one meter, a caustic tank, a peroxide container on a scale."""
    data = (DATA / "three_days" / "works.toml").read_bytes()
    return load.load(data=data, by=None, now=NOW - dt.timedelta(hours=1)).book


@pytest.fixture
def here(example: Book) -> ground.Ground:
    """What a line at that works is read against."""
    stated = queries.stated(example)
    return ground.Ground(stated, stated.calendar(NOW))


@pytest.fixture
def sheet(tmp_path: Path) -> Callable[[str], Path]:
    """A file of records with some lines under the usual header."""

    def write(*lines: str, header: str = "site,timestamp,parameter,value,unit,note,sample,replaces") -> Path:
        path = tmp_path / f"records-{len(list(tmp_path.iterdir()))}.csv"
        path.write_text("\n".join([header, *lines]) + "\n", encoding="utf-8")
        return path

    return write


@pytest.fixture
def bring(now: dt.datetime) -> Callable[..., object]:
    """Brings a file of records into a book without judging it."""

    def run(book: Book, path: Path, **wanted: object):
        return records.bring_in(
            book=book, sheet=records.open_file(path), wanted=records.Wanted(**wanted), by=None, now=now, judge=False
        )

    return run
