"""Wakes Celery workers through the broker, without ever making anybody wait for it.

The one who asks sets a flag and goes on; a thread of the process sends. A broker that is down or does not answer holds
up that thread only. What it could not send does not matter: beat wakes workers every few seconds as well.
"""

from __future__ import annotations

import logging
import os
import threading
from collections.abc import Callable

logger = logging.getLogger(__name__)

REST_AFTER_FAILURE_S = 10.0


def send() -> None:
    """One message to whichever worker is free. May take seconds, and may raise."""
    from deploy.celery import app  # here: the application reads the settings, which are not there yet at import

    app.send_task("weirbook.work", expires=60)


class Waker:
    """Many calls while a message is on its way are one message more."""

    def __init__(self, send: Callable[[], None] = send, rest_s: float = REST_AFTER_FAILURE_S) -> None:
        self._send, self._rest_s = send, rest_s
        self._wanted = threading.Event()
        self._lock = threading.Lock()
        self._process = 0

    def wake(self) -> None:
        """Returns at once. The thread is started by the first call in each process, since threads don't survive a fork."""
        if self._process != os.getpid():
            with self._lock:
                if self._process != os.getpid():
                    self._wanted = threading.Event()
                    threading.Thread(target=self._work, args=(self._wanted,), name="waker", daemon=True).start()
                    self._process = os.getpid()
        self._wanted.set()

    def _work(self, wanted: threading.Event) -> None:
        while True:
            wanted.wait()
            wanted.clear()
            try:
                self._send()
            except Exception as problem:  # noqa: BLE001 — any failure of a broker or its client is the same to us
                logger.warning("the broker could not be told that work waits: %s", type(problem).__name__)
                threading.Event().wait(self._rest_s)
