"""What makes the round open without a network: the worker's text, its version and the files it keeps."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path

from django.contrib.staticfiles import finders
from django.template.loader import render_to_string
from django.templatetags.static import static

SHELL = "/round-shell/"
_SOURCE = Path(__file__).with_name("worker.js")
FILES = (
    "board/site.css",
    "board/inter.woff2",
    "board/icon.svg",
    "board/marks.svg",
    "intake/round.css",
    "intake/answers.js",
    "intake/device.js",
    "intake/drafts.js",
    "intake/drawdown.js",
    "intake/feeding.js",
    "intake/moments.js",
    "intake/photos.js",
    "intake/queue.js",
    "intake/round.js",
    "intake/rules.js",
    "intake/sending.js",
    "intake/shell.js",
    "intake/tablet.js",
    "intake/vessels.js",
)
"""Everything the round's page runs on."""


def worker() -> str:
    """The service worker's text. It changes exactly when one of its files, the shell or its own source does."""
    source = _SOURCE.read_text(encoding="utf-8")
    digest = hashlib.sha256(source.encode())
    digest.update(render_to_string("intake/round_shell.html").encode())
    for name in FILES:
        digest.update(name.encode() + _content(name))
    values = {"version": digest.hexdigest()[:16], "shell": SHELL, "files": [static(name) for name in FILES]}
    return f"const made = {json.dumps(values)};\n{source}"


def _content(name: str) -> bytes:
    found = finders.find(name)
    if not isinstance(found, str):
        raise FileNotFoundError(name)
    return Path(found).read_bytes()
