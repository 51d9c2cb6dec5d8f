"""The step puzzle rule of 1999, which is false from three steps on."""

import pytest
import step_puzzles
from definitions import classical_product

from conjcheck import Fl, Grassmannians, PartialFlags

RULE = step_puzzles.step_puzzles


def plain(answer):
    """``{permutation: number of puzzles}``."""
    return {w.permutation: len(puzzles) for w, puzzles in answer.items()}


def test_right_up_to_rank_three():
    """The rule is right on every row of every partial flag variety up to n = 4."""
    for X in PartialFlags().up_to(4):
        for u in X.classes:
            for v in X.classes:
                assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_right_for_one_step():
    """For one step it is a theorem of Knutson, Tao and Woodward: every fifth row with n = 5."""
    for X in Grassmannians().of_rank(4):
        for u in X.classes:
            for v in X.classes[u.index % 5 :: 5]:
                assert plain(RULE(X, u, v)) == classical_product(u.permutation, v.permutation)


def test_counterexample():
    """On Fl(2,3,4;5), 00321 times 10032 contains 25341 once, and no puzzle shows it (computed)."""
    X = Fl(2, 3, 4, n=5)
    u, v, w = X.schubert(string="00321"), X.schubert(string="10032"), X.schubert(permutation=(2, 5, 3, 4, 1))
    puzzles, truth = plain(RULE(X, u, v)), classical_product(u.permutation, v.permutation)
    assert w.permutation not in puzzles
    assert truth == puzzles | {w.permutation: 1}


def test_first_counterexample():
    """On Fl(1,2,3;5), [14325] times [21534] contains [34512] once, and no puzzle shows it (computed)."""
    X = Fl(1, 2, 3, n=5)
    u, v = X.schubert(permutation=(1, 4, 3, 2, 5)), X.schubert(permutation=(2, 1, 5, 3, 4))
    assert classical_product(u.permutation, v.permutation) == plain(RULE(X, u, v)) | {(3, 4, 5, 1, 2): 1}
    assert (3, 4, 5, 1, 2) not in plain(RULE(X, u, v))


@pytest.mark.parametrize("steps", [(1, 2, 3), (1, 2, 4), (1, 3, 4), (2, 3, 4)])
def test_three_pairs_of_each_three_step_variety(steps):
    """In each three-step variety with n = 5 exactly three pairs have puzzles that depend on the order of the factors (computed)."""
    X = Fl(*steps, n=5)
    odd = [(u, v) for u in X.classes for v in X.classes[: u.index] if plain(RULE(X, u, v)) != plain(RULE(X, v, u))]
    assert len(odd) == 3
    for pair in odd:
        truth = classical_product(pair[0].permutation, pair[1].permutation)
        assert sorted(plain(RULE(X, u, v)) == truth for u, v in (pair, pair[::-1])) == [False, True]
