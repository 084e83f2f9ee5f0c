"""The import contracts hold, and would notice when they didn't."""

import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from django.conf import settings
from django.core.management import call_command

ROOT = Path(__file__).resolve().parents[2]


def lint(tree: Path) -> subprocess.CompletedProcess[str]:
    command = [
        sys.executable,
        "-c",
        "from importlinter.cli import lint_imports_command as c; c()",
        "--no-cache",
    ]
    return subprocess.run(command, cwd=tree, capture_output=True, text=True, check=False)


@pytest.fixture
def tree(tmp_path: Path) -> Path:
    """A copy of the source that may be spoiled."""
    for name in ("plant", "chemistry", "deploy"):
        shutil.copytree(ROOT / name, tmp_path / name, ignore=shutil.ignore_patterns("__pycache__", "static"))
    shutil.copy(ROOT / ".importlinter", tmp_path)
    return tmp_path


def test_the_contracts_hold():
    answer = lint(ROOT)
    assert answer.returncode == 0, answer.stdout


@pytest.mark.parametrize(
    ("file", "line"),
    [
        ("plant/ledger/queries.py", "from plant.readings import models as upward"),
        ("plant/readings/models.py", "import plant.stock.models"),
        ("chemistry/units.py", "import django.db"),
        ("chemistry/units.py", "from plant import clock"),
        ("plant/works/models.py", "import deploy.health"),
        ("plant/reports/pdf/ink.py", "from plant.works import queries"),
        ("plant/reports/pdf/ink.py", "from django.utils import timezone"),
    ],
)
def test_an_import_upwards_or_sideways_is_noticed(tree, file, line):
    source = tree / file
    source.write_text(f"{source.read_text()}\n{line}\n")
    answer = lint(tree)
    assert answer.returncode == 1
    assert "BROKEN" in answer.stdout


def test_an_app_without_a_place_is_noticed(tree):
    (tree / "plant" / "weather").mkdir()
    (tree / "plant" / "weather" / "__init__.py").touch()
    answer = lint(tree)
    assert answer.returncode == 1
    assert "weather" in answer.stdout


def test_every_app_is_installed():
    folders = {f"plant.{path.parent.name}" for path in ROOT.glob("plant/*/apps.py")}
    assert folders == set(settings.PLANT_APPS)


@pytest.mark.django_db
def test_no_migration_is_missing():
    call_command("makemigrations", check=True, dry_run=True, verbosity=0)
