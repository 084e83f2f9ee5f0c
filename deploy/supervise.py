"""Keeps a few processes running until told to stop. Standard library only.

Each child has its output in a log file and is started again when it ends, later each time. A child that keeps
ending at once stops everything, with the last lines of its log.
"""

from __future__ import annotations

import ctypes
import signal
import subprocess
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

STEADY_S = 30.0
MOST_FALSE_STARTS = 5
PATIENCE_S = 25.0
LARGEST_LOG = 5_000_000

_PR_SET_PDEATHSIG = 1


class KeepsEnding(Exception):
    """A child ended again and again; the message holds the end of its log."""


@dataclass
class Child:
    """A process to keep running."""

    name: str
    command: list[str]
    environment: dict[str, str]
    log: Path
    process: subprocess.Popen[bytes] | None = None
    started_s: float = 0.0
    due_s: float = 0.0
    false_starts: int = 0

    def start(self) -> None:
        if self.log.exists() and self.log.stat().st_size > LARGEST_LOG:
            self.log.replace(self.log.with_suffix(".old"))
        with self.log.open("ab") as log:
            self.process = subprocess.Popen(
                self.command,
                env=self.environment,
                stdin=subprocess.DEVNULL,
                stdout=log,
                stderr=log,
                # Ctrl-C reaches this program only, which then ends its children in order.
                start_new_session=True,
                preexec_fn=_end_with_parent,
            )
        self.started_s = time.monotonic()

    def last_lines(self) -> str:
        lines = self.log.read_text(errors="replace").splitlines()[-15:] if self.log.exists() else []
        return "\n".join(f"    {line}" for line in lines)


def _end_with_parent() -> None:
    # Should this program be killed outright, no child may go on holding the port.
    ctypes.CDLL(None).prctl(_PR_SET_PDEATHSIG, signal.SIGTERM)


@dataclass
class Supervisor:
    """Runs children side by side. `run` returns when `stop` was called or a signal came."""

    children: list[Child]
    told: Callable[[str], None]
    _stopping: threading.Event = field(default_factory=threading.Event)

    def stop(self, *_: object) -> None:
        self._stopping.set()

    def run(self, *, when_started: Callable[[Callable[[], bool]], None]) -> None:
        """Starts the children, calls `when_started(still_wanted)`, then watches until stopped.

        Raises KeepsEnding after ending the other children.
        """
        for number in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP):
            signal.signal(number, self.stop)
        try:
            for child in self.children:
                child.start()
            when_started(self._watch)
            while self._watch():
                self._stopping.wait(0.5)
        finally:
            self._end_all()

    def _watch(self) -> bool:
        if self._stopping.is_set():
            return False
        now_s = time.monotonic()
        for child in self.children:
            if child.process is None:
                if now_s >= child.due_s:
                    child.start()
            elif child.process.poll() is not None:
                self._plan_again(child, now_s)
        return True

    def _plan_again(self, child: Child, now_s: float) -> None:
        assert child.process is not None
        steady = now_s - child.started_s > STEADY_S
        child.false_starts = 1 if steady else child.false_starts + 1
        if child.false_starts >= MOST_FALSE_STARTS:
            raise KeepsEnding(f"The {child.name} keeps ending. The end of {child.log}:\n{child.last_lines()}")
        wait_s = 2.0 ** (child.false_starts - 1)
        self.told(f"The {child.name} ended ({child.process.returncode}); starting it again in {wait_s:.0f} s.")
        child.process, child.due_s = None, now_s + wait_s

    def _end_all(self) -> None:
        alive = [child.process for child in self.children if child.process and child.process.poll() is None]
        for process in alive:
            process.terminate()
        end_s = time.monotonic() + PATIENCE_S
        for process in alive:
            try:
                process.wait(max(0.1, end_s - time.monotonic()))
            except subprocess.TimeoutExpired:
                process.kill()
                process.wait()
