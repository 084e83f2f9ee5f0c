"""Makes the pictures of README.md anew: .venv-test/bin/python -m deploy.pictures [folder of the demo's data]

Needs the demo works (sh deploy/start.sh --once), Chromium, and the test environment. Starts a server of its own on a free
port, signs in as the demo's people and photographs five pages; of the last issued report it draws one page.
"""

from __future__ import annotations

import os
import re
import socket
import subprocess
import sys
import time
import urllib.request
from pathlib import Path
from typing import Any

HERE = Path(__file__).resolve().parent
PICTURES = HERE / "pictures"
SHOTS = (
    ("board", "supervisor", (1280, 800), "/w/{code}/"),
    ("dosing", "supervisor", (1280, 800), "/w/{code}/dosing/HYPO-POST/"),
    ("round", "operator", (820, 1180), "/w/{code}/round/"),
    ("stock", "manager", (1280, 800), "/w/{code}/stock/"),
)


def main() -> None:
    data = Path(sys.argv[1] if len(sys.argv) > 1 else HERE.parent / ".weirbook" / "demo")
    people = _people(data / "people.txt")
    PICTURES.mkdir(exist_ok=True)
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    server = subprocess.Popen(  # noqa: S603
        [sys.executable, "manage.py", "runserver", "--noreload", f"127.0.0.1:{port}"],
        cwd=HERE.parent,
        env=os.environ | {"WEIRBOOK_DATA": str(data), "DJANGO_SETTINGS_MODULE": "deploy.settings.development"},
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    try:
        _wait(f"http://127.0.0.1:{port}/healthz")
        _photograph(f"http://127.0.0.1:{port}", people)
    finally:
        server.terminate()
        server.wait(10)
    _page(data)


def _people(path: Path) -> dict[str, tuple[str, str]]:
    """Role to (name, password), from the file the demo wrote."""
    found: dict[str, tuple[str, str]] = {}
    for line in path.read_text(encoding="utf-8").splitlines():
        if match := re.match(r"\s+(\w+)\s+(\S+)\s+.*?, (operator|supervisor|manager)", line):
            found.setdefault(match[3], (match[1], match[2]))
    return found


def _wait(address: str) -> None:
    for _ in range(120):
        try:
            urllib.request.urlopen(address, timeout=2)  # noqa: S310
        except OSError:
            time.sleep(0.5)
        else:
            return
    sys.exit("the server did not come up")


def _photograph(site: str, people: dict[str, tuple[str, str]]) -> None:
    from playwright.sync_api import sync_playwright

    with sync_playwright() as play:
        browser = play.chromium.launch(
            executable_path=os.environ.get("WEIRBOOK_CHROMIUM", "/usr/bin/chromium"), args=["--no-sandbox", "--disable-gpu"]
        )
        for name, role, (width, height), path in SHOTS:
            page = browser.new_context(viewport={"width": width, "height": height}).new_page()
            user, password = people[role]
            page.goto(f"{site}/sign-in/")
            page.fill("input[name=username]", user)
            page.fill("input[name=password]", password)
            page.click("main button[type=submit]")
            page.wait_for_load_state("networkidle")
            page.goto(site + path.format(code="KFW"))
            page.wait_for_load_state("networkidle")
            page.screenshot(path=str(PICTURES / f"{name}.png"))
        _icons(browser)
        browser.close()


def _icons(browser: Any) -> None:
    """The drawn icon as PNG, for devices whose home screen takes no SVG."""
    static = HERE.parent / "plant" / "board" / "static" / "board"
    drawn = (static / "icon.svg").read_text(encoding="utf-8")
    for size in (192, 512):
        page = browser.new_page(viewport={"width": size, "height": size})
        page.set_content(f"<style>*{{margin:0}}svg{{display:block;width:{size}px;height:{size}px}}</style>{drawn}")
        page.screenshot(path=str(static / f"icon-{size}.png"), omit_background=True)


def _page(data: Path) -> None:
    import pypdfium2  # type: ignore[import-untyped]

    reports = sorted((data / "reports").glob("*.pdf"))
    if reports:
        page = pypdfium2.PdfDocument(reports[-1])[0]
        page.render(scale=1.4).to_pil().save(PICTURES / "report.png", optimize=True)


if __name__ == "__main__":
    main()
