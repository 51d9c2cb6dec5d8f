"""The laws: each is broken by a rule made for it, without the oracle, and by no true rule."""

import importlib
import sys
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from planted import SMALL, cases_of, rule_by_cases, rule_by_rows, truth

import conjcheck.testing.compare
from conjcheck import Fl, Gr, Row, Varieties, candidate
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.laws import LAWS, NoValue, broken_laws
from conjcheck.testing.survey import in_reach

PLUGINS = Path(__file__).parents[2] / "conjectures"
X = Fl(3)
S = {w.word: w for w in X.classes}
"""The classes of Fl(3) by their reduced words."""


def laws_broken(rule, row, choice=0):
    """The laws that a rule breaks around a row; the oracle must not be asked."""
    comparer = Comparer(rule)
    with comparer.limit:
        return list(broken_laws(comparer, row, choice))


@pytest.fixture(autouse=True)
def no_oracle(monkeypatch):
    """No law asks the oracle: here it is out of order."""

    def refuse(*args, **kwargs):
        raise AssertionError("a law asked the oracle")

    monkeypatch.setattr(conjcheck.testing.compare, "row_terms", refuse)


def changed(entries, space=X, **choices):
    """The true products of a space, some of them replaced: ``{(u, v): product}``."""
    table = truth(space) | entries

    @candidate(on=Varieties(space), **choices)
    def rule(X, u, v):
        return table[u, v]

    return rule


def orbit_of_pair(space, u, v):
    """All rows with the same two factors."""
    return {(u, v), (v, u)}


FIRST_BROKEN = {
    "unit": (changed({(X.identity, S[1, 2]): {(S[2, 1], (0, 0)): 1}}), Row(X, X.identity, S[1, 2])),
    "commutativity": (changed({(S[1,], S[1, 2]): {(X.point, (0, 0)): 1}}), Row(X, S[1,], S[1, 2])),
    "Poincare duality": (
        changed({(a, b): {(X.point, (0, 0)): 1} | truth(X)[a, b] for a, b in ((S[1,], S[1, 2]), (S[1, 2], S[1,]))}),
        Row(X, S[1,], S[1, 2]),
    ),
    "S3-symmetry": (
        changed({(S[1,], S[1,]): truth(X)[S[1,], S[1,]] | {(S[1, 2], (0, 0)): 7, (S[2, 1], (0, 0)): 7}}),
        Row(X, S[1,], S[1,]),
    ),
}


@pytest.mark.parametrize("law", FIRST_BROKEN)
def test_first_broken_law(law):
    """A rule that is changed against one law is caught by that law first, in a row that the law names."""
    rule, row = FIRST_BROKEN[law]
    broken = laws_broken(rule, row)
    assert broken[0].law == law
    assert row in broken[0].rows
    assert broken[0].detail


# -- rules that break exactly one law -----------------------------------------------------------------------------------------------


def alternating():
    """Every second call of the same row is wrong."""
    table, calls = truth(X), {}

    @candidate(on=Varieties(X))
    def rule(X, u, v):
        calls[u, v] = calls.get((u, v), 0) + 1
        return table[u, v] if calls[u, v] % 2 else {}

    return rule


def no_unit():
    """Every constant is 0: all laws hold but the unit and duality, which is left out by asking far from the point."""
    return changed({row: {} for row in truth(X)})


def lopsided(space=X):
    """One row of a pair differs, in a way that keeps S3 inside each row: a q-term is put beside the other."""
    return changed({(S[1, 2], S[1, 2]): truth(X)[S[1, 2], S[1, 2]]})


def every(rule, spaces, choices=range(24)):
    """The names of all laws that a rule breaks on some rows of some spaces."""
    found = set()
    comparer = Comparer(rule)
    with comparer.limit:
        for space in spaces:
            for u in space.classes:
                for v in space.classes:
                    for choice in choices:
                        found |= {broken.law for broken in broken_laws(comparer, Row(space, u, v), choice)}
    return found
