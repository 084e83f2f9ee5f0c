"""Asks whether anything that is installed has a known weakness: `python -m deploy.audit requirements.txt ...`.

Ends with 0 when every package was looked up and none has one, with 1 when one has, and with 3 when the service could not
be asked, or did not know a package. The last is never taken for the first.
"""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

from deploy.environment import say

CLEAN, WEAK, NOT_AUDITED = 0, 1, 3
PATIENCE_S = 180


def look_up(requirements: Path) -> tuple[str, str]:
    """What pip-audit answers (JSON) and what it complains about."""
    command = [
        *(sys.executable, "-m", "pip_audit", "--requirement", str(requirements)),
        *("--disable-pip", "--no-deps", "--format", "json", "--progress-spinner", "off", "--timeout", "10"),
    ]
    try:
        ran = subprocess.run(command, capture_output=True, text=True, check=False, timeout=PATIENCE_S)
    except subprocess.TimeoutExpired:
        return "", f"no answer within {PATIENCE_S} s"
    return ran.stdout, ran.stderr


def judge(answer: str, complaint: str) -> tuple[int, list[str]]:
    """What an answer of pip-audit means, and the lines to print."""
    try:
        dependencies = json.loads(answer)["dependencies"]
    except (ValueError, KeyError, TypeError):
        last = (complaint.strip().splitlines() or ["no answer"])[-1]
        return NOT_AUDITED, [f"the service that knows of weaknesses can't be asked: {last[:300]}"]
    weak = [
        f"{one['name']} {one['version']}: {found['id']}, mended in {', '.join(found['fix_versions']) or 'no version yet'}"
        for one in dependencies
        for found in one.get("vulns", [])
    ]
    if weak:
        return WEAK, weak
    unknown = [one["name"] for one in dependencies if "skip_reason" in one]
    if unknown or not dependencies:
        names = ", ".join(unknown)[:200]
        return NOT_AUDITED, [f"{len(unknown)} of {len(dependencies)} packages could not be looked up: {names}"]
    return CLEAN, [f"{len(dependencies)} packages looked up, no known weakness"]


def main(arguments: list[str]) -> int:
    worst = CLEAN
    for name in arguments:
        status, lines = judge(*look_up(Path(name)))
        for line in lines:
            say(f"{name}: {line}")
        worst = WEAK if WEAK in (status, worst) else max(status, worst)
    if worst == NOT_AUDITED:
        say("NOT AUDITED: nothing is known about weaknesses of the packages in use.")
    return worst


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
