"""Stating one thing: checked, known by whom and why, and never over somebody else's head."""

import contextlib
import datetime as dt

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.ledger import verify
from plant.works import access, actions, blocks, kinds, models, queries
from tests import people

NOW = people.OPENED + dt.timedelta(days=10)


@pytest.fixture
def book(db):
    return people.small_works()


def state_dose(book, dose, *, at=NOW, seen=None, by="sam"):
    return actions.state(
        book=book, kind="design_dose", subject="CAUSTIC-PH", value={"dose_mg_per_L": dose}, effective_from=at,
        reason="raw water softer", by=people.person(by), now=NOW, seen=seen)  # fmt: skip


def test_what_is_stated_says_by_whom_and_why(book):
    statement = state_dose(book, 7.0)
    assert statement.entry.recorded_by.username == "sam"
    assert statement.reason == "raw water softer"
    stated = queries.stated(book)
    assert stated.design_dose_mg_l("CAUSTIC-PH", NOW) == 7.0
    assert stated.design_dose_mg_l("CAUSTIC-PH", NOW - dt.timedelta(seconds=1)) == 8.0
    assert list(verify.everything()) == []


def test_a_later_statement_waits_for_its_day(book):
    state_dose(book, 7.0, at=NOW + dt.timedelta(days=5))
    assert queries.stated(book).design_dose_mg_l("CAUSTIC-PH", NOW) == 8.0


def test_two_people_stating_at_once(book):
    seen = queries.stated(book).history("design_dose", "CAUSTIC-PH")[-1].ref
    state_dose(book, 7.0, seen=seen)
    with pytest.raises(actions.Overtaken, match="Sam Sundby has stated design dose CAUSTIC-PH"):
        state_dose(book, 6.0, seen=seen, by="mira")
    assert queries.stated(book).design_dose_mg_l("CAUSTIC-PH", NOW) == 7.0


def test_a_withdrawal_that_leaves_others_hanging_is_refused(book):
    with pytest.raises(actions.Refused) as problem:
        actions.state(
            book=book, kind="product", subject="NAOH", value={}, effective_from=NOW, reason="gone", by=None, now=NOW,
            withdrawn=True)  # fmt: skip
    assert "vessel NAOH-BULK: product: no product 'NAOH' is stated" in str(problem.value)
    assert models.Statement.objects.filter(withdrawn=True).count() == 0


def test_all_or_none(book):
    before = models.Statement.objects.count()
    good = actions.Change("shift", "late", {"starts": "15:00"}, NOW)
    bad = actions.Change("shift", "early", {"starts": "dawn"}, NOW)
    with pytest.raises(actions.Refused) as problem:
        actions.state_many(book=book, changes=[good, bad], by=None, now=NOW)
    assert problem.value.problems[0][0] == 1
    assert models.Statement.objects.count() == before


def test_memberships_hold_by_date(book):
    stated = queries.stated(book)
    assert access.member(stated, "mira", NOW).may("report.sign_certified")
    assert not access.member(stated, "sam", NOW).may("report.sign_certified")
    assert access.member(stated, "stan", NOW) is None
    actions.end_membership(book=book, username="olga", by=people.person("adam"), now=NOW, reason="left")
    after = queries.stated(book)
    assert access.member(after, "olga", NOW) is None
    assert access.member(after, "olga", NOW - dt.timedelta(days=1)).role == "operator"


@pytest.mark.parametrize("kind", sorted(kinds.KINDS))
def test_an_empty_block_never_passes_unless_nothing_is_required(kind):
    required = [key.name for key in kinds.KINDS[kind].keys if key.required]
    subject = {"round_line": "A:pH", "state": "works:A"}.get(kind, "A")
    if not required:
        assert blocks.check(kind, subject, {}) == {}
        return
    with pytest.raises(blocks.BlockError) as problem:
        blocks.check(kind, subject, {})
    assert {name for name in required if f"key {name} is missing" in str(problem.value)} == set(required)


json = st.recursive(
    st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=12),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=8,
)
any_key = st.sampled_from(sorted({key.name for kind in kinds.ALL for key in kind.keys}))


@given(st.sampled_from(sorted(kinds.KINDS)), st.text(max_size=12), st.dictionaries(any_key, json, max_size=6))
def test_nothing_but_a_refusal_comes_of_nonsense(kind, subject, value):
    with contextlib.suppress(blocks.BlockError):
        assert set(blocks.check(kind, subject, value)) <= set(value)
