"""What holds for every file of the repository."""

import ast
import re
import subprocess
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
TOP_LEVEL = {
    *("README.md", "DEVELOPERS.md", "manage.py", "requirements.txt"),
    *("plant", "chemistry", "templates", "tests", "deploy"),
}
TEXT = {
    ".py",
    ".html",
    ".css",
    ".js",
    ".sh",
    ".md",
    ".txt",
    ".toml",
    ".in",
    ".ini",
    ".csv",
    ".sample",
    ".service",
}

# Put together here, so that this file doesn't hold them itself.
UNFINISHED = ["TO" + "DO", "FIX" + "ME", "Not" + "Implemented" + "Error", "x" + "fail"]
DRAWERS = {"utils", "util", "common", "core", "helpers", "helper", "misc"}


def files() -> Iterator[Path]:
    """The repository's own files: those git tracks or would track."""
    listed = subprocess.run(
        ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
        cwd=ROOT,
        capture_output=True,
        check=True,
        text=True,
    ).stdout
    for name in filter(None, listed.split("\0")):
        path = ROOT / name
        if path.is_file():
            yield path


def sources(*folders: str) -> list[Path]:
    wanted = [ROOT / folder for folder in folders]
    return [path for path in files() if path.suffix == ".py" and any(top in path.parents for top in wanted)]


def test_nothing_else_lies_at_the_top():
    found = {path.relative_to(ROOT).parts[0] for path in files()}
    assert {name for name in found if not name.startswith(".")} == TOP_LEVEL


def test_nothing_is_left_unfinished():
    pattern = re.compile(r"\b(" + "|".join(UNFINISHED) + r")\b", re.IGNORECASE)
    found = [
        f"{path.relative_to(ROOT)}:{number}: {line.strip()}"
        for path in files()
        if path.suffix in TEXT and path.name != "requirements.txt"
        for number, line in enumerate(path.read_text(errors="replace").splitlines(), 1)
        if pattern.search(line)
    ]
    assert found == []


def test_no_drawer_for_odds_and_ends():
    parts = {
        path.relative_to(ROOT): {part.removesuffix(".py") for part in path.relative_to(ROOT).parts}
        for path in sources("plant", "chemistry", "deploy", "tests")
    }
    assert {str(path) for path, names in parts.items() if names & DRAWERS} == set()


def calls(tree: ast.AST) -> Iterator[str]:
    for node in ast.walk(tree):
        if isinstance(node, ast.Call):
            yield ast.unparse(node.func)


READS_CLOCK = re.compile(
    r"(^|\.)(datetime|date|timezone|dt)\.(now|utcnow|today|localdate|localtime)$|(^|\.)time\.time$"
    r"|\.(datetime|date)\.(now|utcnow|today)$"
)


@pytest.mark.parametrize("line", ["dt.datetime.now(tz)", "timezone.now()", "date.today()", "time.time()"])
def test_a_reading_of_the_clock_is_recognised(line):
    assert any(READS_CLOCK.search(name) for name in calls(ast.parse(line)))


def test_the_clock_is_read_in_one_place():
    found = {
        f"{path.relative_to(ROOT)}: {name}"
        for path in sources("plant", "chemistry")
        if path.relative_to(ROOT).as_posix() != "plant/clock.py"
        for name in calls(ast.parse(path.read_text()))
        if READS_CLOCK.search(name)
    }
    assert found == set()


def test_no_field_fills_itself_from_the_clock():
    automatic = re.compile(r"auto_now(_add)?=True|default=timezone\.now")
    assert [path for path in sources("plant") if automatic.search(path.read_text())] == []


def test_no_app_talks_by_signals():
    signals = re.compile(r"django\.dispatch|models\.signals import|@receiver")
    found = [
        path.relative_to(ROOT).as_posix() for path in sources("plant") if signals.search(path.read_text())
    ]
    # migrate ends by looking whether every lock is in place; Django tells that by a signal only.
    allowed = {"plant/ledger/apps.py"}
    assert set(found) <= allowed


def test_views_leave_saving_to_actions():
    pages = [path for path in sources("plant") if path.name == "views.py" or path.parent.name == "views"]
    writes = re.compile(r"\.(save|bulk_create|bulk_update|delete)\(|objects\.(create|update|get_or_create)\(")
    found = [
        f"{path.relative_to(ROOT)}:{number}"
        for path in pages
        for number, line in enumerate(path.read_text().splitlines(), 1)
        if writes.search(line)
    ]
    assert found == []
