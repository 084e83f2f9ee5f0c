"""A skipped browser or service test is shown loudly, and is a failure where everything must be tried."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
TRIAL = """
import pytest
from tests import services

@pytest.mark.browser
def test_page():
    services.missing("no Chromium here")

@pytest.mark.service
def test_server():
    pytest.skip("the server is away")

def test_other():
    pytest.skip("not of this kind")
"""


def run(folder: Path, **environment: str) -> subprocess.CompletedProcess[str]:
    (folder / "test_trial.py").write_text(TRIAL)
    return subprocess.run(
        [
            *(sys.executable, "-m", "pytest", "-p", "tests.services", "-p", "no:django", "-p", "no:cacheprovider"),
            *("-c", os.devnull, "-W", "ignore", "--rootdir", str(folder), str(folder)),
        ],
        cwd=ROOT,
        env={"PATH": os.environ["PATH"], **environment},
        capture_output=True,
        text=True,
        check=False,
    )


def test_on_ones_own_machine_they_are_listed(tmp_path):
    answer = run(tmp_path)
    assert answer.returncode == 0, answer.stdout
    shown = answer.stdout.partition("NOT TRIED ON THIS MACHINE")[2]
    assert "no Chromium here" in shown
    assert "the server is away" in shown
    assert "not of this kind" not in shown


@pytest.mark.parametrize("value", ["true", "1"])
def test_where_everything_must_be_tried_they_fail(tmp_path, value):
    answer = run(tmp_path, CI=value)
    assert answer.returncode == 1
    assert "2 failed, 1 skipped" in answer.stdout
