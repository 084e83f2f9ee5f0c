"""Requests a second and their spread, on PostgreSQL, beside a bare Django page in the same run, as ratios.

    python -m tests.benchmarks.serving [seconds for each page]

Two gunicorn processes of eight threads serve; four clients in closed loop ask, in processes of their own, on the same
machine, so that the figures are for comparing and not for sizing. The small works of the tests with forty rounds of a day
stands behind the pages. Ratio: how many bare pages could have been served in the time of one.
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
import uuid

from tests import services
from tests.operations.site import ROOT, Day, Site, Tablet

CLIENTS = 4
ROUNDS = 40


def client(port: int, path: str, seconds: float, cookie: str) -> None:
    """One client: asks until the time is over and prints the seconds of each answer."""
    import http.client

    link = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    took, end = [], time.monotonic() + seconds
    while time.monotonic() < end:
        began = time.perf_counter()
        link.request("GET", path, headers={"Cookie": cookie} if cookie else {})
        answer = link.getresponse()
        answer.read()
        took.append(time.perf_counter() - began)
        if answer.status != 200:
            raise SystemExit(f"{path} answered {answer.status}")
    link.close()
    json.dump(took, sys.stdout)


def measure(port: int, path: str, seconds: float, cookie: str = "") -> tuple[float, float, float]:
    """Requests a second, p50 and p95 in milliseconds."""
    command = [sys.executable, "-m", "tests.benchmarks.serving", "--client", str(port), path, str(seconds), cookie]
    running = [subprocess.Popen(command, cwd=ROOT, stdout=subprocess.PIPE, text=True) for _ in range(CLIENTS)]
    took: list[float] = []
    for process in running:
        out, _ = process.communicate(timeout=seconds + 120)
        if process.returncode:
            raise SystemExit(f"a client of {path} failed")
        took += json.loads(out)
    took.sort()
    return len(took) / seconds, took[len(took) // 2] * 1000, took[int(len(took) * 0.95)] * 1000


def main(seconds: float) -> None:
    postgres = services.Postgres(durable=True)
    site = Site(database_url=postgres.url)
    try:
        port, bare_port = services.free_port(), services.free_port()
        site.web(port, workers=2)
        bare = site.start(
            *("-m", "gunicorn", "tests.benchmarks.bare:application", "--bind", f"127.0.0.1:{bare_port}"),
            *("--worker-class", "gthread", "--workers", "2", "--threads", "8", "--no-control-socket"),
            name="bare",
        )
        services.wait_until(lambda: measure_once(bare_port), bare)
        tablet, day = Tablet(port, "olga"), Day([port])
        for number in range(1, ROUNDS + 1):
            day.send(tablet, str(uuid.uuid4()), day.body(number))
        supervisor = Tablet(port, "sam")
        cookies = {
            name: "; ".join(f"{key}={value}" for key, value in who.cookies.items())
            for name, who in (("olga", tablet), ("sam", supervisor))
        }
        tablet.drop()
        supervisor.drop()
        pages = [
            ("bare Django page", bare_port, "/", ""),
            ("health page (all middleware)", port, "/healthz", ""),
            ("the round", port, "/w/TST/round/", cookies["olga"]),
            ("the board", port, "/w/TST/", cookies["sam"]),
            ("bare Django page again", bare_port, "/", ""),
        ]
        print(f"{CLIENTS} clients, {seconds:.0f} s a page; a round sent alone: {day.spread()}")
        print(f"{'page':<30}{'req/s':>9}{'p50 ms':>9}{'p95 ms':>9}{'ratio':>8}")
        base = 0.0
        for name, at, path, cookie in pages:
            measure(at, path, 1.0, cookie)
            rate, p50, p95 = measure(at, path, seconds, cookie)
            base = base or rate
            print(f"{name:<30}{rate:>9.1f}{p50:>9.1f}{p95:>9.1f}{base / rate:>8.1f}")
    finally:
        site.close()
        postgres.remove()


def measure_once(port: int) -> None:
    """Raises while nobody answers."""
    import urllib.request

    urllib.request.build_opener(urllib.request.ProxyHandler({})).open(f"http://127.0.0.1:{port}/", timeout=2).close()


if __name__ == "__main__":
    if sys.argv[1:2] == ["--client"]:
        client(int(sys.argv[2]), sys.argv[3], float(sys.argv[4]), sys.argv[5])
    else:
        main(float(sys.argv[1]) if sys.argv[1:] else 8.0)
