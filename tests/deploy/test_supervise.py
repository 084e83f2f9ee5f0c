"""The supervisor with real processes."""

import os
import signal
import subprocess
import sys
import threading
import time
from pathlib import Path

import pytest

from deploy import supervise

pytestmark = pytest.mark.service


def child(folder: Path, name: str, code: str) -> supervise.Child:
    return supervise.Child(name, [sys.executable, "-c", code], dict(os.environ), folder / f"{name}.log")


@pytest.fixture
def _signals_restored():
    kept = {number: signal.getsignal(number) for number in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)}
    yield
    for number, handler in kept.items():
        signal.signal(number, handler)


def wait_for(found, seconds: float = 10) -> None:
    end = time.monotonic() + seconds
    while not found():
        assert time.monotonic() < end, "waited in vain"
        time.sleep(0.05)


@pytest.mark.usefixtures("_signals_restored")
def test_one_that_dies_is_started_again(tmp_path):
    said: list[str] = []
    steady = child(tmp_path, "web", "import time; time.sleep(60)")
    supervisor = supervise.Supervisor([steady], said.append)
    pids: list[int] = []

    def kill_then_stop() -> None:
        wait_for(lambda: steady.process is not None)
        pids.append(steady.process.pid)
        steady.process.kill()
        wait_for(lambda: steady.process is not None and steady.process.pid != pids[0])
        pids.append(steady.process.pid)
        supervisor.stop()

    helper = threading.Thread(target=kill_then_stop)
    helper.start()
    supervisor.run(when_started=lambda still_wanted: None)
    helper.join()
    assert len(set(pids)) == 2
    assert said == ["The web ended (-9); starting it again in 1 s."]
    assert steady.process.poll() is not None


@pytest.mark.usefixtures("_signals_restored")
def test_one_that_keeps_ending_stops_all_and_shows_its_log(tmp_path, monkeypatch):
    monkeypatch.setattr(supervise, "MOST_FALSE_STARTS", 2)
    steady = child(tmp_path, "worker", "import time; time.sleep(60)")
    broken = child(tmp_path, "web", "raise SystemExit('the port is gone')")
    with pytest.raises(supervise.KeepsEnding, match="the port is gone"):
        supervise.Supervisor([steady, broken], lambda words: None).run(when_started=lambda still_wanted: None)
    assert steady.process.poll() is not None


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_a_signal_ends_the_children_in_order(tmp_path, number):
    script = f"""
import sys
from pathlib import Path
from deploy import supervise
code = '''
import signal, sys, time
def end(*_):
    time.sleep(0.3)
    print("finished my work", flush=True)
    sys.exit()
signal.signal(signal.SIGTERM, end)
print("started", flush=True)
time.sleep(60)
'''
import os
one = supervise.Child("worker", [sys.executable, "-c", code], dict(os.environ), Path({str(tmp_path / "log")!r}))
supervise.Supervisor([one], print).run(when_started=lambda still_wanted: None)
"""
    log = tmp_path / "log"
    with subprocess.Popen([sys.executable, "-c", script], cwd=Path(__file__).parents[2]) as process:
        wait_for(lambda: log.exists() and "started" in log.read_text())
        process.send_signal(number)
        assert process.wait(10) == 0
    assert log.read_text().split("\n")[:2] == ["started", "finished my work"]


def test_killing_it_leaves_no_orphan(tmp_path):
    pid_file = tmp_path / "pid"
    script = f"""
import os, sys
from pathlib import Path
from deploy import supervise
code = "import os, time; open({str(pid_file)!r}, 'w').write(str(os.getpid())); time.sleep(60)"
one = supervise.Child("web", [sys.executable, "-c", code], dict(os.environ), Path({str(tmp_path / "log")!r}))
supervise.Supervisor([one], print).run(when_started=lambda still_wanted: None)
"""
    with subprocess.Popen([sys.executable, "-c", script], cwd=Path(__file__).parents[2]) as process:
        wait_for(lambda: pid_file.exists() and pid_file.read_text())
        process.kill()
    wait_for(lambda: not alive(int(pid_file.read_text())))


def alive(pid: int) -> bool:
    try:
        # A process that has ended and that nobody has asked after is still listed, as a zombie.
        return Path(f"/proc/{pid}/stat").read_text().rsplit(")", 1)[1].split()[0] != "Z"
    except FileNotFoundError:
        return False


def test_a_long_log_makes_room(tmp_path):
    one = child(tmp_path, "web", "print('new')")
    one.log.write_bytes(b"x" * (supervise.LARGEST_LOG + 1))
    one.start()
    assert one.process.wait(10) == 0
    assert one.log.read_text() == "new\n"
    assert one.log.with_suffix(".old").exists()
