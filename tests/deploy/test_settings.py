"""Settings are safe by default, and every variable they read is described."""

import ast
import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
SETTINGS = ROOT / "deploy" / "settings"
SAMPLE = ROOT / "deploy" / "services" / "env.sample"


def variables(name: str) -> set[str]:
    """The environment variables a settings module reads."""
    found = set()
    for node in ast.walk(ast.parse((SETTINGS / f"{name}.py").read_text())):
        is_call = isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute)
        if is_call and ast.unparse(node.func.value) == "env" and isinstance(node.args[0], ast.Constant):
            found.add(node.args[0].value)
    return found


def production(code: str, **environment: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", f"import django; django.setup()\nfrom django.conf import settings\n{code}"],
        cwd=ROOT,
        env={"PATH": os.environ["PATH"], "DJANGO_SETTINGS_MODULE": "deploy.settings.production", **environment},
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.mark.parametrize("missing", ["WEIRBOOK_SECRET_KEY", "WEIRBOOK_HOSTS"])
def test_production_has_no_default_for(missing, tmp_path):
    named = {"WEIRBOOK_SECRET_KEY": "k" * 60, "WEIRBOOK_HOSTS": "weirbook.example", "WEIRBOOK_DATA": str(tmp_path)}
    del named[missing]
    answer = production("", **named)
    assert answer.returncode != 0
    assert missing in answer.stderr


def test_production_is_closed(tmp_path):
    answer = production(
        "print([settings.DEBUG, settings.WEIRBOOK_ALLOW_NOW, settings.SESSION_COOKIE_SECURE,"
        " settings.CSRF_COOKIE_SECURE, settings.SECURE_SSL_REDIRECT, settings.ALLOWED_HOSTS])",
        WEIRBOOK_SECRET_KEY="k" * 60,
        WEIRBOOK_HOSTS="weirbook.example",
        WEIRBOOK_DATA=str(tmp_path),
        WEIRBOOK_DEBUG="true",
        WEIRBOOK_ALLOW_NOW="1",
    )
    assert answer.stdout.strip() == "[False, False, True, True, True, ['weirbook.example']]", answer.stderr


def test_every_variable_of_a_server_is_in_the_sample():
    described = {line.lstrip("#").partition("=")[0] for line in SAMPLE.read_text().splitlines() if "=" in line}
    read = variables("base") | variables("production")
    # A clock that commands may set is for replaying a history on one's own machine, never for a server.
    assert read - described == {"WEIRBOOK_ALLOW_NOW"}


def test_the_sample_holds_no_secret():
    assert "WEIRBOOK_SECRET_KEY=\n" in SAMPLE.read_text()


@pytest.mark.parametrize("unit", sorted((ROOT / "deploy" / "services").glob("*.service")), ids=lambda path: path.stem)
def test_a_unit_runs_what_is_here(unit):
    text = unit.read_text()
    command = next(line for line in text.splitlines() if line.startswith("ExecStart="))
    program = command.split()[0].removeprefix("ExecStart=/opt/weirbook/.venv/bin/")
    assert program == "python" or (Path(sys.executable).with_name(program)).exists()
    for word in command.split()[1:]:
        if word.startswith("/opt/weirbook/"):
            assert (ROOT / word.removeprefix("/opt/weirbook/")).exists()
    for line in ("NoNewPrivileges=yes", "ProtectSystem=strict", "User=weirbook", "EnvironmentFile=/etc/weirbook/env"):
        assert line in text.splitlines()


def test_the_celery_application_knows_the_settings():
    from deploy.celery import app

    assert app.conf.task_acks_late is True
    assert app.conf.broker_transport_options["visibility_timeout"] > app.conf.task_time_limit
    assert app.conf.worker_prefetch_multiplier == 1
    app.loader.import_default_modules()
    assert app.conf.beat_schedule
    assert {entry["task"] for entry in app.conf.beat_schedule.values()} <= set(app.tasks)
