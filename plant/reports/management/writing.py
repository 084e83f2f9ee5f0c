"""Writing a file that a command was asked for."""

from __future__ import annotations

from pathlib import Path

from django.core.management.base import CommandError


def write(path: Path, data: bytes) -> None:
    """Raises CommandError where the file can't be written."""
    try:
        path.write_bytes(data)
    except OSError as problem:
        raise CommandError(f"{path} can't be written: {problem.strerror}") from None
