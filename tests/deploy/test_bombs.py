"""Files and bodies made to fill memory or time are refused in words, and quickly."""

from __future__ import annotations

import gzip
import time
import uuid

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile

from tests import people

SECONDS = 10
"""Far above what any of them takes, far below what a server's patience is."""
HEADER = b"site,timestamp,parameter,value,unit"

TOML = {
    "a hundred thousand brackets": b"a = " + b"[" * 100_000,
    "tables in tables": b"a = " + b"{a=" * 50_000,
    "a key of a hundred thousand parts": b"a" + b".a" * 100_000 + b" = 1",
    "a header of fifty thousand parts": b"[" + b".".join([b"a"] * 50_000) + b"]",
    "a number of a million digits": b"a = " + b"9" * 1_000_000,
    "three megabytes": b"".join(b"key%07d = 1\n" % number for number in range(190_000)),
    "not text": b"\xff\xfe\x00",
}
CSV = {
    "one line of 19 MB": HEADER + b"\n" + b"x" * 19_000_000,
    "a cell that never ends": HEADER + b'\n"' + b"x\n" * 19_000,
    "a header of a million columns": HEADER + b",a" * 1_000_000,
    "a header just as long as is looked at": HEADER + b",a" * 32_000 + b"\n",
    "more than 20,000 lines": HEADER + b"\nENTRY,2026-01-05T08:00Z,pH,8,\n" * 20_001,
    "21 MB": HEADER + b"\n" + b"x" * 21_000_000,
    "fifty megabytes packed into fifty kilobytes": gzip.compress(b"0" * 50_000_000),
    "a packed spreadsheet": b"PK\x03\x04" + b"\x00" * 1000,
}
ENTRIES = {
    "half a million brackets": b"[" * 500_000,
    "a number of a million digits": b'{"a":' + b"9" * 900_000 + b"}",
    "half a letter": b'{"kind":"line","lines":[{"note":"\\ud800"}]}',
    "more than a megabyte": b'{"note":"' + b"x" * 1_000_001 + b'"}',
}


@pytest.fixture
def works(db, settings, tmp_path):
    settings.WEIRBOOK_FILES = tmp_path
    return people.small_works()


def told(answer, began):
    assert time.monotonic() - began < SECONDS
    return answer.content.decode()


@pytest.mark.parametrize("what", TOML)
def test_a_works_file(works, what):
    began, client, before = time.monotonic(), people.signed_in("adam"), works.head_seq
    answer = client.post("/w/TST/settings/file/", {"file": SimpleUploadedFile("w.toml", TOML[what])})
    page = told(answer, began)
    assert answer.status_code in (200, 422)
    assert 'role="alert"' in page, page
    works.refresh_from_db()
    assert works.head_seq == before


@pytest.mark.parametrize("what", CSV)
def test_a_record_file(works, what):
    began, client = time.monotonic(), people.signed_in("sam")
    sent = {
        "file": SimpleUploadedFile("r.csv", CSV[what]),
        "kind": "records",
        "decimal": "point",
        "ambiguous": "refuse",
    }
    answer = client.post("/w/TST/import/", sent)
    assert answer.status_code == 422
    assert 'role="alert"' in told(answer, began)


@pytest.mark.parametrize("what", ENTRIES)
def test_an_entry_from_a_tablet(works, what):
    began, client = time.monotonic(), people.signed_in("olga")
    answer = client.put(f"/w/TST/entries/{uuid.uuid4()}", ENTRIES[what], content_type="application/json")
    assert answer.status_code in (400, 413)
    assert "general" in told(answer, began)
