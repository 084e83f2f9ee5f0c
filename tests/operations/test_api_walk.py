"""Schemathesis asks a running site all that the API's document allows, and much that it doesn't."""

import http.client
import json
import re
import subprocess
import sys
from pathlib import Path

import pytest

from tests import services
from tests.operations.site import Site

pytestmark = [pytest.mark.service, pytest.mark.slow]
SECONDS = 40
HERE = Path(__file__).parent
ALL = ["readings.write", "comparison.read", "deviations.read", "reports.read"]
ISSUE = """
import django; django.setup()
import datetime as dt
from plant.ledger import queries
from plant.reports import actions
now = dt.datetime(2026, 2, 2, 10, tzinfo=dt.UTC)
actions.issue_from_shell(book=queries.book("TST"), year=2026, month=1, now=now)
"""


def document(port: int) -> dict:
    """The site's own document, with the one works of the test named in it: other codes are asked for as wrong ones."""
    link = http.client.HTTPConnection("127.0.0.1", port, timeout=30)
    link.request("GET", "/api/openapi.json")
    found = json.loads(link.getresponse().read())
    link.close()
    for item in found["paths"].values():
        for parameter in item["parameters"]:
            if parameter["name"] == "code":
                parameter["schema"] = {"type": "string", "enum": ["TST"]}
    return found


def test_schemathesis_finds_nothing(figure, tmp_path):
    site = Site(more={"WEIRBOOK_API_PER_MINUTE": "1000000"})
    try:
        site.python(ISSUE)
        words = [word for scope in ALL for word in ("--scope", scope)]
        token = site.manage("api_token", "make", "walker", "--works", "TST", *words).stdout.strip()
        port = services.free_port()
        site.web(port)
        (tmp_path / "openapi.json").write_text(json.dumps(document(port)))
        ran = subprocess.run(
            [
                *(str(Path(sys.executable).with_name("st")), "--config-file", str(HERE / "api_walk.toml"), "run"),
                *("openapi.json", "--url", f"http://127.0.0.1:{port}", "--header", f"Authorization: Bearer {token}"),
                *("--max-time", str(SECONDS), "--mode", "all", "--checks", "all", "--continue-on-failure", "--no-color"),
            ],
            cwd=tmp_path,
            env={"PATH": site.environment["PATH"], "NO_PROXY": "*", "HOME": str(tmp_path)},
            capture_output=True,
            text=True,
            check=False,
            timeout=SECONDS * 3,
        )
        assert ran.returncode == 0, ran.stdout[-8000:] + ran.stderr[-2000:]
        tested = re.search(r"(\d+) selected / (\d+) total", ran.stdout)
        assert tested is not None, ran.stdout[-3000:]
        assert tested[1] == tested[2] == "7"
        cases = re.search(r"([\d,]+) generated", ran.stdout)
        assert cases is not None, ran.stdout[-3000:]
        taken = site.ask("Entry.objects.filter(kind='api').count()")
        assert taken > 0, "batches were taken, not only refused"
        assert "Traceback" not in site.log(f"web-{port}")
        figure(
            f"Schemathesis, {SECONDS} s at most: {cases[1]} cases over {tested[1]} operations, {taken} entries written, no finding"
        )
    finally:
        site.close()
