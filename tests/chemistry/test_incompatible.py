"""Pairs that must never meet, against the sources beside each; an unlisted pair is not known, never safe."""

import csv
from itertools import product

import pytest

from chemistry import incompatible, sources
from chemistry.incompatible import INCOMPATIBLE, NOT_KNOWN, SAME, meeting


@pytest.mark.parametrize("acid", ["H2SO4", "FeCl3", "Al2(SO4)3.14H2O", "H3PO4"])
def test_acid_on_hypochlorite_is_chlorine(acid):
    """US CSB Case Study 2017-01-I-KS: 30 % sulfuric acid into 12.5 % hypochlorite, chlorine, over 140 people sought care."""
    for pair in ((acid, "NaOCl"), ("NaOCl", acid)):
        found = meeting(*pair)
        assert (found.verdict, found.result) == (INCOMPATIBLE, "chlorine gas")


def test_alum_and_lime():
    """Davis (2010) p. 5-14: the crystal water slakes quicklime; closed in, it explodes."""
    found = meeting("Al2(SO4)3.14H2O", "CaO")
    assert found.verdict == INCOMPATIBLE
    assert "explosion" in found.result
    assert found.evidence == "opened"


def test_fluorosilicic_acid_goes_with_nothing():
    """Wisconsin NR 811.51: a room of its own."""
    for other in ("NaOCl", "NaOH", "H2O2", "(NaPO3)n"):
        assert meeting("H2SiF6", other).verdict == INCOMPATIBLE
    assert meeting("H2SiF6", "H2SiF6").verdict == SAME


def test_what_no_row_names_is_not_known():
    assert meeting("NaOCl", "NaOH").verdict == NOT_KNOWN
    assert meeting("(NaPO3)n", "NaOCl").verdict == NOT_KNOWN
    assert meeting("an invented thing", "NaOCl").verdict == NOT_KNOWN


def test_the_order_does_not_matter_and_a_chemical_goes_with_itself():
    every = sorted(set().union(*incompatible.GROUPS.values()))
    for one, other in product(every, every):
        assert meeting(one, other) == meeting(other, one)
        assert (meeting(one, other).verdict == SAME) == (one == other)


def test_every_row_names_known_groups_and_a_known_source():
    with incompatible._TABLE.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) > 15
    for row in rows:
        assert row["group_a"] in incompatible.GROUPS
        assert row["group_b"] in incompatible.GROUPS or row["group_b"] == incompatible.ANY
        assert row["source"] in sources.SOURCES
        assert row["evidence"] in ("opened", "from memory")
