"""Two-step puzzles."""

import pytest
import two_step_puzzles
from definitions import classical_product

from conjcheck import Fl, StepFlags

RULE = two_step_puzzles.two_step_puzzles


def plain(answer):
    """``{permutation: number of puzzles}``."""
    return {w.permutation: len(puzzles) for w, puzzles in answer.items()}


@pytest.mark.parametrize("X", list(StepFlags(2).up_to(4)), ids=str)
def test_every_row_multiplies_schubert_polynomials(X):
    """The puzzles count the products of Schubert polynomials on every row up to n = 4."""
    for u in X.classes:
        for v in X.classes:
            assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_some_rows_of_rank_four():
    """And on a few rows with n = 5."""
    X = Fl(2, 4, n=5)
    for u in X.classes[3::9]:
        for v in X.classes[2::8]:
            assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_commutative():
    """The puzzles for ``u, v`` and for ``v, u`` are as many, on Fl(2,3;6): no symmetry of the pieces says so."""
    X = Fl(2, 3, n=6)
    for u in X.classes:
        for v in X.classes[: u.index]:
            assert plain(RULE(X, u, v)) == plain(RULE(X, v, u))


def test_puzzles_are_distinct():
    """A class with coefficient 2 or more on Fl(2,4;6) shows as many different puzzles (computed: it occurs)."""
    X = Fl(2, 4, n=6)
    many = [p for u in X.classes for p in RULE(X, u, u).values() if len(p) > 1]
    assert many and all(len(set(puzzles)) == len(puzzles) for puzzles in many)
