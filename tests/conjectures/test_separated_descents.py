"""Separated descents on complete flags."""

import pytest
import separated_descents
from definitions import classical_product

from conjcheck import Fl

RULE = separated_descents.separated_descents


def plain(answer):
    """``{permutation: number of puzzles}``."""
    return {w.permutation: len(puzzles) for w, puzzles in answer.items()}


@pytest.mark.parametrize("n", [2, 3, 4])
def test_every_row_multiplies_schubert_polynomials(n):
    """The puzzles count the products of Schubert polynomials on every row in the premise up to n = 4."""
    X = Fl(n)
    for u in X.classes:
        for v in X.classes:
            if RULE.premise(X, u, v):
                assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_some_rows_of_rank_four():
    """And on every fortieth row in the premise with n = 5."""
    X = Fl(5)
    rows = [(u, v) for u in X.classes for v in X.classes if RULE.premise(X, u, v)]
    for u, v in rows[::40]:
        assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_premise_separates():
    """The premise holds exactly if some k lies between the descents of v and those of u."""
    X = Fl(5)
    for u in X.classes:
        for v in X.classes:
            separated = any(all(i <= k for i in v.descents) and all(k <= i for i in u.descents) for k in range(1, 5))
            assert RULE.premise(X, u, v) == separated


def test_one_descent_in_common():
    """At a common descent k it multiplies Schur polynomials: ``s_21 s_21`` at k = 3 contains ``s_321`` twice, n = 6."""
    X = Fl(6)
    u, w = X.schubert(permutation=(1, 3, 5, 2, 4, 6)), X.schubert(permutation=(2, 4, 6, 1, 3, 5))
    assert len(RULE(X, u, u)[w]) == 2
