"""What an answer about known weaknesses means; no answer is never a good one."""

import json

import pytest

from deploy import audit

KNOWN = {"name": "a", "version": "1.0", "vulns": []}
WEAK = {"name": "b", "version": "2.0", "vulns": [{"id": "X-1", "fix_versions": ["2.1"]}]}
UNKNOWN = {"name": "c", "skip_reason": "not found"}


@pytest.mark.parametrize(
    ("dependencies", "status"),
    [
        ([KNOWN], audit.CLEAN),
        ([KNOWN, WEAK], audit.WEAK),
        ([KNOWN, UNKNOWN], audit.NOT_AUDITED),
        ([WEAK, UNKNOWN], audit.WEAK),
        ([], audit.NOT_AUDITED),
    ],
)
def test_answers(dependencies, status):
    assert audit.judge(json.dumps({"dependencies": dependencies}), "")[0] == status


@pytest.mark.parametrize("answer", ["", "not JSON", "[]", '{"x": 1}'])
def test_no_answer_is_not_a_good_one(answer):
    status, lines = audit.judge(answer, "ConnectionError: no route\n")
    assert status == audit.NOT_AUDITED
    assert "can't be asked" in lines[0]


def test_one_weak_list_is_not_hidden_by_one_that_could_not_be_asked(monkeypatch):
    answers = iter([json.dumps({"dependencies": [WEAK]}), ""])
    monkeypatch.setattr(audit, "look_up", lambda path: (next(answers), ""))
    assert audit.main(["one", "two"]) == audit.WEAK
    answers = iter(["", json.dumps({"dependencies": [KNOWN]})])
    assert audit.main(["one", "two"]) == audit.NOT_AUDITED
