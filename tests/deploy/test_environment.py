"""Making the virtual environment: when it is made, and what is said when it can't be."""

import shutil
import sys
from pathlib import Path

import pytest

from deploy import environment


@pytest.fixture
def requirements(tmp_path: Path) -> Path:
    path = tmp_path / "requirements.txt"
    path.write_text("one==1.0 \\\n    --hash=sha256:0\n")
    return path


@pytest.fixture
def installed(monkeypatch) -> list[Path]:
    """Stands in for venv and pip; notes each installation. Setting `fail` in it makes the next one fail."""
    done: list[Path] = []

    def venv(folder: Path) -> None:
        (folder / "bin").mkdir(parents=True)
        (folder / "bin" / "python").touch()

    def pip(python: Path, requirements: Path) -> None:
        if "two" in requirements.read_text():
            raise environment.CannotMake("unreachable")
        done.append(python)

    monkeypatch.setattr(environment, "_run_venv", venv)
    monkeypatch.setattr(environment, "_run_pip", pip)
    return done


def make(requirements: Path) -> Path:
    return environment.make(requirements.with_name("venv"), requirements, needed_mb=1)


def test_it_is_made_once(requirements, installed):
    assert make(requirements) == make(requirements)
    assert len(installed) == 1


def test_a_changed_list_is_installed_into_it(requirements, installed):
    python = make(requirements)
    mark = python.with_name("mark")
    mark.touch()
    requirements.write_text("one==1.1 \\\n    --hash=sha256:1\n")
    make(requirements)
    assert len(installed) == 2
    assert mark.exists()


def test_a_failed_upgrade_leaves_it_usable_and_is_tried_again(requirements, installed):
    python = make(requirements)
    before = requirements.read_text()
    requirements.write_text("two==2.0 \\\n    --hash=sha256:2\n")
    for _ in range(2):
        with pytest.raises(environment.CannotMake):
            make(requirements)
    requirements.write_text(before)
    assert make(requirements) == python
    assert len(installed) == 1


def test_one_from_another_hand_comes_back_when_building_fails(requirements, installed):
    other = requirements.with_name("venv") / "bin" / "python"
    other.parent.mkdir(parents=True)
    other.write_text("another hand's")
    requirements.write_text("two==2.0 \\\n    --hash=sha256:2\n")
    with pytest.raises(environment.CannotMake):
        make(requirements)
    assert other.read_text() == "another hand's"


def test_a_first_failure_leaves_nothing(requirements, installed):
    requirements.write_text("two==2.0 \\\n    --hash=sha256:2\n")
    with pytest.raises(environment.CannotMake):
        make(requirements)
    assert not requirements.with_name("venv").exists()


def test_a_half_made_one_is_made_anew(requirements, installed):
    python = make(requirements)
    (python.parents[1] / ".installed").unlink()
    make(requirements)
    assert len(installed) == 2


def test_too_little_room_is_said_before_anything_is_fetched(requirements, installed, monkeypatch):
    usage = shutil.disk_usage(requirements.parent)
    monkeypatch.setattr(shutil, "disk_usage", lambda folder: usage._replace(free=100_000_000))
    with pytest.raises(environment.CannotMake, match="100 MB free, 600 MB needed"):
        environment.make(requirements.with_name("venv"), requirements, needed_mb=600)
    assert installed == []


@pytest.mark.parametrize(
    ("output", "words"),
    [
        ("ERROR: Could not install packages due to an OSError: [Errno 28] No space left on device", "disk is full"),
        ("WARNING: Retrying … NewConnectionError('…: [Errno 111] Connection refused')", "registry can't be reached"),
        ("WARNING: Retrying … NameResolutionError(…)\nERROR: No matching distribution found", "registry can't be"),
        ("ERROR: THESE PACKAGES DO NOT MATCH THE HASHES FROM THE REQUIREMENTS FILE.", "not the one this version"),
        ("ERROR: No matching distribution found for numpy==2.4.6", "no ready-made package"),
        ("ERROR: something new", "installation failed"),
    ],
)
def test_a_failure_is_explained(output, words):
    said = environment.why_pip_failed(output)
    assert words in said
    assert output.splitlines()[-1] in said


def test_an_unreachable_registry_is_explained_by_the_real_pip(tmp_path, monkeypatch):
    monkeypatch.setenv("PIP_CONFIG_FILE", "/dev/null")
    for name in ("PIP_EXTRA_INDEX_URL", "PIP_FIND_LINKS", "PIP_CONSTRAINT"):
        monkeypatch.delenv(name, raising=False)
    monkeypatch.setenv("PIP_INDEX_URL", "http://127.0.0.1:9/simple")  # the discard port: nobody listens
    requirements = tmp_path / "requirements.txt"
    requirements.write_text("weirbook-that-nobody-has==1.0 --hash=sha256:" + "0" * 64 + "\n")
    with pytest.raises(environment.CannotMake, match="registry can't be reached"):
        environment._run_pip(Path(sys.executable), requirements)


@pytest.mark.parametrize("name", ["requirements.txt", "tests/requirements.txt"])
def test_every_locked_package_has_a_hash(name):
    text = (Path(__file__).parents[2] / name).read_text().replace("\\\n", " ")
    lines = [line for line in text.splitlines() if line.strip() and not line.lstrip().startswith("#")]
    assert len(lines) > 40
    assert [line for line in lines if "==" not in line or "--hash=sha256:" not in line] == []


def test_what_is_wanted_is_what_is_locked():
    root = Path(__file__).parents[2]
    locked = {
        line.partition("==")[0].strip().lower() for line in (root / "requirements.txt").read_text().splitlines() if "==" in line
    }
    for line in (root / "deploy" / "requirements.in").read_text().splitlines():
        wanted = line.partition("#")[0].strip()
        if wanted:
            name = wanted.replace("[", " ").replace("~", " ").replace("=", " ").split()[0].lower()
            assert name in locked
            assert "#" in line, f"{name}: say why it is there"
