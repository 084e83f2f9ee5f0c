"""What the content security policy would refuse must not be written in the first place."""

import re
from pathlib import Path

import pytest
from django.urls import reverse

from tests.guards import test_repository as repository

ROOT = repository.ROOT

REFUSED = re.compile(
    r"""<[^>]*\s(style|on[a-z]+|hx-on[^=\s]*)\s*=   # an attribute that carries style or script
      | <style\b
      | <script(?![^>]*\ssrc=)[^>]*>(?!\s*</script>) # a script with a body of its own …
      | javascript:
    """,
    re.IGNORECASE | re.VERBOSE,
)
# … unless it is data for a script, which a browser doesn't run.
DATA = re.compile(r"<script[^>]*type=\"application/(ld\+)?json\"[^>]*>", re.IGNORECASE)
TAG = re.compile(r"{%.*?%}|{{.*?}}|{#.*?#}", re.DOTALL)


def refused_in(markup: str) -> list[str]:
    """What a page may not hold, each with its surroundings."""
    plain = DATA.sub("", TAG.sub("", markup))
    return [plain[max(0, found.start() - 20) : found.end() + 20] for found in REFUSED.finditer(plain)]


@pytest.mark.parametrize(
    "markup",
    [
        '<p style="color: red">',
        "<button class=x onclick='go()'>",
        '<tr {% if late %}style="x"{% endif %}>',
        "<style>p {}</style>",
        "<script>go()</script>",
        '<a href="javascript:go()">',
        '<div\n  hx-on:click="go()">',
    ],
)
def test_what_is_refused_is_found(markup):
    assert refused_in(markup)


@pytest.mark.parametrize(
    "markup",
    [
        '<script src="/static/round.js" defer></script>',
        '<script type="application/json" id="lines">{"a": 1}</script>',
        '<link rel="stylesheet" href="x.css">',
        '<p class="style">one = on</p>',
    ],
)
def test_what_is_allowed_is_left_alone(markup):
    assert not refused_in(markup)


def test_no_template_holds_style_or_script():
    found = {
        f"{path.relative_to(ROOT)}: {text}"
        for path in repository.files()
        if path.suffix in {".html", ".svg"} and "tests" not in path.relative_to(ROOT).parts
        for text in refused_in(path.read_text())
    }
    assert found == set()


def test_no_python_writes_style_into_markup():
    attribute = re.compile(r"""\s(style|on(click|load|input|change|submit|error))=\\?["']""")
    found = [
        f"{path.relative_to(ROOT)}:{number}"
        for path in repository.sources("plant")
        for number, line in enumerate(path.read_text().splitlines(), 1)
        if attribute.search(line)
    ]
    assert found == []


def test_no_script_evaluates_text():
    evaluates = re.compile(
        r"\beval\(|new Function\(|\.innerHTML\s*=|document\.write\(|\.setAttribute\(.style"
    )
    found = [
        f"{path.relative_to(ROOT)}:{number}"
        for path in repository.files()
        if path.suffix == ".js" and "tests" not in path.relative_to(ROOT).parts
        for number, line in enumerate(path.read_text().splitlines(), 1)
        if evaluates.search(line)
    ]
    assert found == []


def test_nothing_is_fetched_from_elsewhere():
    elsewhere = re.compile(r"""(src|href|action)=["'](https?:)?//|url\(["']?(https?:)?//|@import""")
    found = [
        f"{path.relative_to(ROOT)}:{number}: {line.strip()}"
        for path in repository.files()
        if path.suffix in {".html", ".css"} and "tests" not in path.relative_to(ROOT).parts
        for number, line in enumerate(path.read_text().splitlines(), 1)
        if elsewhere.search(line)
    ]
    assert found == []


def test_every_answer_carries_the_policy(client):
    policy = client.get(reverse("alive"))["Content-Security-Policy"]
    assert "default-src 'self'" in policy
    assert "unsafe" not in policy
    assert "frame-ancestors 'none'" in policy


def test_every_template_named_in_python_exists():
    templates = Path(ROOT / "templates")
    named = re.compile(r"""["']([a-z_]+/[a-z_/]+\.html)["']""")
    missing = {
        name
        for path in repository.sources("plant")
        for name in named.findall(path.read_text())
        if not (templates / name).exists() and not list(ROOT.glob(f"plant/*/templates/{name}"))
    }
    assert {name for name in missing if not name.startswith("django_tables2/")} == set()
