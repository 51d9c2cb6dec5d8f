"""Equivariant quantum Chevalley on every G/P."""

from collections import Counter

import equivariant_chevalley
import pytest
from root_definitions import act, chevalley, fixed_points, matrix_of, value

from conjcheck import Fl, FlagVariety, HomogeneousSpaces, simple_roots

RULE = equivariant_chevalley.equivariant_chevalley
VALUES = (2, 3, 7, 19)
"""Integer values of the simple roots."""


def test_projective_line():
    """``sigma_1 * sigma_1 = (y_2 - y_1) sigma_1 + q`` on the projective line."""
    X = FlagVariety("P^1")
    (alpha,) = simple_roots(X)
    point = X.point
    assert RULE(X, point, point) == {(point, (0,)): alpha, (X.identity, (1,)): 1}


def test_squares_of_divisors_of_fl3():
    """``S_{213} S_{213} = S_{312} + (y_2 - y_1) S_{213}``: with q_1 in addition this is the square of a divisor on Fl(3)."""
    X = Fl(3)
    u, alpha = X.schubert(permutation=(2, 1, 3)), simple_roots(X)
    w = X.schubert(permutation=(3, 1, 2))
    assert RULE(X, u, u) == {(u, (0, 0)): alpha[0], (w, (0, 0)): 1, (X.identity, (1, 0)): 1}


@pytest.mark.parametrize("rank", [1, 2, 3])
def test_weight_drops(rank):
    """``omega_i - u omega_i`` in fundamental weights is the weight minus its image, and every coefficient is 0 or more."""
    for X in HomogeneousSpaces().of_rank(rank):
        matrix = matrix_of(str(X.kind))
        for u in X.classes:
            for i in X.marked:
                drop = equivariant_chevalley.weight_drop(X, i, u)
                weight = tuple(int(j == i) for j in range(1, X.rank + 1))
                image = act(str(X.kind), u.word, weight)
                assert [a - b for a, b in zip(weight, image, strict=True)] == [
                    sum(a * row[j] for a, row in zip(drop, matrix, strict=True)) for j in range(X.rank)
                ]
                assert min(drop) >= 0


@pytest.mark.parametrize(
    "name", ["P^3", "Gr(2,5)", "Fl(3)", "Fl(4)", "Fl(1,3;4)", "B2/B", "C2/B", "G2/B", "C3/P2", "B3/P1,3", "Q^6", "F4/P4"]
)
def test_products_at_fixed_points(name):
    """Without q, both sides agree at every fixed point, by Billey's formula."""
    X = FlagVariety(name)
    for local in fixed_points(X, VALUES[: X.rank]).values():
        for i in X.marked:
            u = X.schubert(word=(i,))
            for v in X.classes:
                product = RULE(X, u, v)
                right = sum(value(c, VALUES[: X.rank]) * local.get(w, 0) for (w, d), c in product.items() if not any(d))
                assert local.get(u, 0) * local.get(v, 0) == right


@pytest.mark.parametrize("rank", [1, 2, 3])
def test_roots_at_zero(rank):
    """With the simple roots at 0 the formula of Fulton and Woodward is left."""
    for X in HomogeneousSpaces().of_rank(rank):
        for i in X.marked:
            for v in X.classes:
                found = {key: value(c, (0,) * rank) for key, c in RULE(X, X.schubert(word=(i,)), v).items()}
                assert {key: c for key, c in found.items() if c} == chevalley(X, i, v)


@pytest.mark.parametrize("name", ["Fl(3)", "B2/B", "G2/B", "Fl(1,3;4)", "C3/P1,3", "D4/P1,3"])
def test_divisors_commute(name):
    """The equivariant quantum operators of two divisors commute, at integer values of the simple roots."""
    X = FlagVariety(name)

    def times(i, vector):
        result = Counter()
        for (v, d), coefficient in vector.items():
            for (w, e), factor in RULE(X, X.schubert(word=(i,)), v).items():
                result[w, tuple(map(sum, zip(d, e, strict=True)))] += coefficient * value(factor, VALUES[: X.rank])
        return Counter({key: c for key, c in result.items() if c})

    i, j = X.marked
    for v in X.classes:
        start = Counter({(v, (0, 0)): 1})
        assert times(i, times(j, start)) == times(j, times(i, start))
