"""deploy/start.sh says what is wrong before it does anything."""

import os
import socket
import subprocess
import sys
from pathlib import Path

import pytest

from deploy import start

ROOT = Path(__file__).parents[2]


@pytest.fixture
def run(tmp_path):
    """Runs the start script with its data in a scratch folder and hardly any environment."""

    def run(*words: str, **environment: str) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            ["sh", str(ROOT / "deploy" / "start.sh"), *words],
            env={
                "PATH": os.environ["PATH"],
                "PYTHON": sys.executable,
                "WEIRBOOK_DATA": str(tmp_path / "data"),
                **environment,
            },
            capture_output=True,
            text=True,
            check=False,
            timeout=60,
        )

    return run


def test_a_taken_port_is_said_at_once(run, tmp_path):
    with socket.socket() as other:
        other.bind(("127.0.0.1", 0))
        other.listen()
        port = other.getsockname()[1]
        answer = run(PORT=str(port))
    assert answer.returncode == 1
    assert f"Port {port} is taken" in answer.stderr
    assert f"PORT={port + 1} sh deploy/start.sh" in answer.stderr
    assert not (tmp_path / "data").exists()


@pytest.mark.parametrize("port", ["eighty", "0", "70000", "-1"])
def test_a_port_that_is_none_is_refused(run, port):
    answer = run(PORT=port)
    assert answer.returncode == 2
    assert "1 to 65535" in answer.stderr


def test_an_old_python_is_named(run, tmp_path):
    old = tmp_path / "python3.9"
    old.write_text('#!/bin/sh\n[ "$1" = -V ] && echo "Python 3.9.2"\nexit 1\n')
    old.chmod(0o755)
    answer = run(PYTHON=str(old))
    assert answer.returncode == 1
    assert "needs Python 3.11 or newer" in answer.stderr
    assert "Python 3.9.2" in answer.stderr


def test_a_missing_python_is_named(run):
    answer = run(PYTHON="python-that-is-not-here")
    assert answer.returncode == 1
    assert "no python-that-is-not-here here" in answer.stderr


def test_the_demo_stays_out_of_a_database_of_ones_own(run, tmp_path):
    answer = run(DATABASE_URL="postgres://nobody@127.0.0.1:9/records")
    assert answer.returncode == 2
    assert "--own" in answer.stderr
    assert not (tmp_path / "data").exists()


def test_own_and_once_exclude_each_other(run):
    assert run("--own", "--once").returncode == 2


def test_an_unwritable_data_folder_is_named(run):
    answer = run(WEIRBOOK_DATA="/proc/weirbook", PORT="65530")
    assert answer.returncode == 1
    assert "/proc/weirbook" in answer.stderr
    assert "Traceback" not in answer.stderr


def test_secrets_are_for_the_owner_only(tmp_path):
    path = tmp_path / "secret_key"
    start.private_file(path, "secret\n")
    assert path.stat().st_mode & 0o777 == 0o600


def test_a_command_that_fails_shows_its_last_lines(tmp_path):
    installation = start.Installation(Path(sys.executable), tmp_path)
    with pytest.raises(start.CannotStart, match=r"(?s)Looking: manage\.py no_such_command .*Unknown command"):
        installation.manage("no_such_command", doing="Looking")
