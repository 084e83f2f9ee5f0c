"""Makes a virtual environment from a locked list: `python3 -m deploy.environment .venv requirements.txt`.

Runs on a bare Python with venv, before anything is installed. An environment made from the same list by the
same Python is left as it is. What goes wrong is said in words: disk, registry, Python, a wrong hash.
"""

from __future__ import annotations

import hashlib
import re
import shutil
import subprocess
import sys
import time
from pathlib import Path

OLDEST_PYTHON = (3, 11)

# Megabytes: what the environment takes, and pip's downloads beside it while it is made.
ROOM_MB = {"requirements.txt": 600, "tests/requirements.txt": 1400}

_CAUSES = [
    (r"No space left|Errno 28", "The disk is full. Free some space and start again; nothing is lost."),
    (
        r"THESE PACKAGES DO NOT MATCH THE HASHES",
        "A downloaded package is not the one this version was tested with, so it was refused. Something\n"
        "between this machine and the package registry has changed it, or the list was edited by hand.",
    ),
    (
        r"NewConnectionError|NameResolutionError|Temporary failure in name resolution|ConnectTimeout"
        r"|ReadTimeout|ProxyError|Connection (refused|reset|aborted)|Network is unreachable|No route to host"
        r"|SSLError|CERTIFICATE_VERIFY_FAILED",
        "The package registry can't be reached. The first start needs it once, later starts don't. Check\n"
        "the network, or name a mirror with PIP_INDEX_URL, and a proxy with HTTPS_PROXY.",
    ),
    (
        r"No matching distribution|Could not find a version",
        "The registry has no ready-made package for this Python and this kind of machine. Weirbook needs\n"
        "64-bit Linux (x86_64 or arm64) and Python 3.11 or newer; a mirror may also be incomplete.",
    ),
    (r"Permission denied|Errno 13", "This folder can't be written to by this user."),
]


class CannotMake(Exception):
    """The environment could not be made; the message says why and what to do."""


def stamp_of(requirements: list[Path]) -> str:
    """What an environment was made from, in one line."""
    digest = hashlib.sha256()
    for path in requirements:
        digest.update(path.read_bytes())
    return f"{digest.hexdigest()} {sys.version_info.major}.{sys.version_info.minor}"


def check_room(folder: Path, needed_mb: int) -> None:
    """Raises CannotMake when the disk under `folder` has less room than that."""
    free_mb = shutil.disk_usage(folder).free // 1_000_000
    if free_mb < needed_mb:
        raise CannotMake(
            f"Too little room on the disk of {folder}: {free_mb} MB free, {needed_mb} MB needed.\n"
            "Free some space and start again."
        )


def why_pip_failed(output: str) -> str:
    """The likely cause of a failed installation, in words, with pip's own last lines."""
    cause = next((words for pattern, words in _CAUSES if re.search(pattern, output)), "The installation failed.")
    tail = "\n".join(f"    {line}" for line in output.strip().splitlines()[-6:])
    return f"{cause}\n\npip said:\n{tail}"


def make(venv: Path, requirements: Path, *, needed_mb: int, also: tuple[Path, ...] = ()) -> Path:
    """Makes the environment when it is not there yet, and returns its Python. `also` are lists it includes.

    Raises CannotMake.
    """
    python = venv / "bin" / "python"
    stamp_file = venv / ".installed"
    stamp = stamp_of([requirements, *also])
    if python.exists() and stamp_file.exists() and stamp_file.read_text() == stamp:
        return python
    check_room(venv.parent, needed_mb)
    try:
        import ensurepip  # noqa: F401
        import venv as _venv  # noqa: F401
    except ImportError:
        raise CannotMake("This Python has no venv module. On Debian and Ubuntu: apt install python3-venv") from None
    if python.exists() and stamp_file.exists() and stamp_file.read_text().split()[-1] == stamp.split()[-1]:
        _upgrade(python, requirements, stamp_file)
    else:
        _build(venv, python, requirements)
    stamp_file.write_text(stamp)
    return python


def _upgrade(python: Path, requirements: Path, stamp_file: Path) -> None:
    """In place: pip fetches everything before it replaces anything, so a failed fetch changes nothing."""
    before = stamp_file.read_text()
    stamp_file.unlink()  # killed from here on, it is built anew next time
    try:
        _run_pip(python, requirements)
    except CannotMake:
        stamp_file.write_text(before)
        raise


def _build(venv: Path, python: Path, requirements: Path) -> None:
    """From nothing. One that is there and was not finished here stands aside, and comes back on failure."""
    aside = venv.with_name(venv.name + ".aside")
    if venv.exists():
        shutil.rmtree(aside, ignore_errors=True)
        venv.rename(aside)
    try:
        _run_venv(venv)
        _run_pip(python, requirements)
    except BaseException:
        shutil.rmtree(venv, ignore_errors=True)
        if aside.exists():
            aside.rename(venv)
        raise
    shutil.rmtree(aside, ignore_errors=True)


def _run_venv(venv: Path) -> None:
    say(f"Making {venv.name} …")
    made = subprocess.run([sys.executable, "-m", "venv", str(venv)], check=False, capture_output=True, text=True)
    if made.returncode:
        output = made.stdout + made.stderr
        if "ensurepip" in output:
            raise CannotMake("This Python can't make environments. On Debian and Ubuntu: apt install python3-venv")
        raise CannotMake(why_pip_failed(output))


def _run_pip(python: Path, requirements: Path) -> None:
    total = sum("==" in line for line in requirements.read_text().splitlines())
    say(f"Installing {total} packages; this is done once …")
    command = [
        *(str(python), "-m", "pip", "install"),
        *("--disable-pip-version-check", "--no-input", "--progress-bar", "off", "--no-compile"),
        *("--retries", "2", "--timeout", "20", "--only-binary", ":all:", "--require-hashes"),
        *("-r", str(requirements)),
    ]
    lines: list[str] = []
    fetched, started, said = 0, time.monotonic(), time.monotonic()
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True) as pip:
        assert pip.stdout is not None
        try:
            for line in pip.stdout:
                lines.append(line)
                fetched += line.startswith("Collecting ")
                unpacking = line.startswith("Installing collected")
                if unpacking or time.monotonic() - said > 3:
                    said = time.monotonic()
                    doing = "unpacking" if unpacking else f"{fetched} of {total} fetched"
                    say(f"  {doing} ({said - started:.0f} s)")
        except BaseException:
            pip.terminate()
            raise
    if pip.returncode:
        raise CannotMake(why_pip_failed("".join(lines)))
    say(f"  done ({time.monotonic() - started:.0f} s)")


def say(words: str) -> None:
    """A line of progress; standard output stays free for results."""
    print(words, file=sys.stderr, flush=True)


def main(arguments: list[str]) -> int:
    root = Path(__file__).resolve().parents[1]
    venv, requirements = (root / argument for argument in arguments)
    also = (root / "requirements.txt",) if requirements.parent != root else ()
    try:
        make(venv, requirements, needed_mb=ROOM_MB[arguments[1]], also=also)
    except CannotMake as problem:
        say(f"\n{problem}")
        return 1
    except OSError as problem:
        say(f"\n{venv} can't be made: {problem.strerror}")
        return 1
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
