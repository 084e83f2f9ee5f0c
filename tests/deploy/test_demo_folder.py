"""The demo's folder is made whole or not at all, and `--once` ends with a report. manage.py is played by a script."""

import stat
import subprocess
import sys
import time
from pathlib import Path

import pytest

from deploy import start

ROOT = Path(__file__).parents[2]

PLAYED = """#!/bin/sh
shift  # manage.py
echo "$*" >>"$CALLS"
case $1 in
make_demo)
    [ -z "${DEMO_FAILS:-}" ] || { : >"$WEIRBOOK_DATA/half"; echo "no more room" >&2; exit 1; }
    echo "olga  operator  secret" >"$WEIRBOOK_DATA/people.txt" ;;
demo_month) echo "KFW 2024-02" ;;
first_administrator) echo "First administrator: $2   password: secret" ;;
issue_report) [ -n "${REPORT_MISSING:-}" ] || { while [ "$1" != --output ]; do shift; done; echo "%PDF" >"$2"; } ;;
esac
"""


@pytest.fixture
def python(tmp_path: Path, monkeypatch) -> Path:
    program = tmp_path / "python"
    program.write_text(PLAYED)
    program.chmod(0o755)
    monkeypatch.setenv("CALLS", str(tmp_path / "calls"))
    return program


def calls(python: Path) -> list[str]:
    return (python.parent / "calls").read_text().splitlines()


def mode(path: Path) -> int:
    return stat.S_IMODE(path.stat().st_mode)


def test_the_demo_is_made_once_and_kept(python, tmp_path):
    base = tmp_path / "base"
    demo = start.prepare_demo(python, base)
    key = (demo.data / "secret_key").read_text()
    again = start.prepare_demo(python, base)
    assert again.data == base / "demo"
    assert calls(python).count("make_demo") == 1
    assert (again.data / "secret_key").read_text() == key
    assert len(key) > 50
    assert mode(again.data / "people.txt") == mode(again.data / "secret_key") == 0o600
    assert mode(again.data) == 0o700


def test_a_demo_that_fails_leaves_nothing_behind(python, tmp_path, monkeypatch):
    base = tmp_path / "base"
    monkeypatch.setenv("DEMO_FAILS", "1")
    with pytest.raises(start.CannotStart, match="make_demo ended with 1"):
        start.prepare_demo(python, base)
    assert not (base / "demo").exists()
    monkeypatch.delenv("DEMO_FAILS")
    demo = start.prepare_demo(python, base)
    assert not (demo.data / "half").exists()
    assert calls(python).count("make_demo") == 2


def test_a_folder_of_something_else_is_not_touched(python, tmp_path):
    other = tmp_path / "base" / "demo" / "weirbook.sqlite3"
    other.parent.mkdir(parents=True)
    other.write_text("somebody's records")
    with pytest.raises(start.CannotStart, match="holds no demo works"):
        start.prepare_demo(python, tmp_path / "base")
    assert other.read_text() == "somebody's records"


def test_once_reviews_and_issues_the_last_full_month(python, tmp_path):
    demo = start.prepare_demo(python, tmp_path / "base")
    output = start.once(demo)
    assert output == demo.data / "reports" / "KFW-2024-02.pdf"
    assert output.read_text() == "%PDF\n"
    assert "review --works KFW --from 2024-02-01 --to 2024-02-29" in calls(python)
    assert f"issue_report --works KFW --month 2024-02 --output {output}" in calls(python)


def test_once_notices_a_report_that_is_not_there(python, tmp_path, monkeypatch):
    demo = start.prepare_demo(python, tmp_path / "base")
    monkeypatch.setenv("REPORT_MISSING", "1")
    with pytest.raises(start.CannotStart, match="left no"):
        start.once(demo)


def test_a_works_of_ones_own_starts_empty_with_an_administrator(python, tmp_path, monkeypatch):
    monkeypatch.setenv("WEIRBOOK_ADMINISTRATOR", "anna")
    own = start.prepare_own(python, tmp_path / "base")
    start.prepare_own(python, tmp_path / "base")
    assert [call for call in calls(python) if call.startswith("first_administrator")] == ["first_administrator anna"]
    assert "make_demo" not in calls(python)
    assert "anna   password: secret" in start.welcome(own, 8000)
    assert mode(own.data / "people.txt") == 0o600


def test_two_starts_set_up_one_after_the_other(tmp_path):
    script = f"""
import time
from pathlib import Path
from deploy import start
folder = Path({str(tmp_path)!r})
with start.only_one(folder):
    (folder / "first").touch()
    time.sleep(0.5)
    (folder / "done").touch()
"""
    with subprocess.Popen([sys.executable, "-c", script], cwd=ROOT):
        while not (tmp_path / "first").exists():
            time.sleep(0.01)
        with start.only_one(tmp_path):
            assert (tmp_path / "done").exists()
