"""Equivariant puzzles on Grassmannians."""

from itertools import permutations
from math import prod

import equivariant_puzzles
import pytest
from definitions import inversions, schubert_polynomial
from root_definitions import classical_product, fixed_points, value

from conjcheck import Gr, Grassmannians, simple_roots

RULE = equivariant_puzzles.equivariant_puzzles


def multiply(X, a, b):
    """A product by the rule, as ``{partition: polynomial}``."""
    return {w.partition: c for w, c in RULE(X, X.schubert(partition=a), X.schubert(partition=b)).items()}


def test_projective_line():
    """``sigma_1 sigma_1 = (y_2 - y_1) sigma_1``."""
    (alpha,) = simple_roots(Gr(1, 2))
    assert multiply(Gr(1, 2), (1,), (1,)) == {(1,): alpha}


def test_square_of_the_divisor_of_gr24():
    """``sigma_1^2 = sigma_2 + sigma_11 + (y_3 - y_2) sigma_1`` on Gr(2,4): the two puzzles and one with a rhombus."""
    X = Gr(2, 4)
    assert multiply(X, (1,), (1,)) == {(2,): 1, (1, 1): 1, (1,): simple_roots(X)[1]}


def test_square_of_the_point():
    """``[pt]^2`` is ``[pt]`` times the product of the weights ``y_j - y_i``, i <= n - k < j, of the tangent space at that point."""
    for X in Grassmannians().up_to(5):
        (k,), alpha, expected = X.steps, simple_roots(X), 1
        for i in range(1, X.n - k + 1):
            for j in range(X.n - k + 1, X.n + 1):
                expected = sum(alpha[i - 1 : j - 1]) * expected
        assert RULE(X, X.point, X.point) == {X.point: expected}


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_every_row_at_fixed_points(n):
    """Every product agrees with its values at the fixed points, by Billey's formula, at integer values of the simple roots."""
    values = (2, 3, 7, 19)[: n - 1]
    for X in Grassmannians().of_rank(n - 1):
        for u in X.classes:
            for v in X.classes:
                found = {w: value(c, values) for w, c in RULE(X, u, v).items()}
                assert found == classical_product(X, u, v, values)


def test_larger_rows_at_fixed_points():
    """The same for every fifth row of Gr(3,6)."""
    X, values = Gr(3, 6), (2, 3, 7, 19, 41)
    for u, v in [(u, v) for u in X.classes for v in X.classes][::5]:
        assert {w: value(c, values) for w, c in RULE(X, u, v).items()} == classical_product(X, u, v, values)


def at(polynomial, point):
    """A polynomial ``{exponents: coefficient}`` at a point."""
    return sum(c * prod(a**e for a, e in zip(point, exponents, strict=True)) for exponents, c in polynomial.items())


def test_billey_is_double_schubert():
    """The definition used above, checked itself: single classes of Gr(2,4) at fixed points are double Schubert polynomials.

    ``S_u(x; y) = sum S_a(x) S_b(-y)`` over ``u = b^-1 a`` with lengths that add; at the fixed point w, ``x_i = y_{w(i)}``.
    """
    X, values, y = Gr(2, 4), (2, 3, 7), (0, 2, 5, 12)
    negative = [-entry for entry in y]
    for w, local in fixed_points(X, values).items():
        point = [y[entry - 1] for entry in w.permutation]
        for u in X.classes:
            total = 0
            for b in permutations(range(1, 5)):
                a = tuple(b[entry - 1] for entry in u.permutation)
                if inversions(a) + inversions(b) == u.length:
                    total += at(schubert_polynomial(a), point) * at(schubert_polynomial(b), negative)
            assert local.get(u, 0) == total


def test_positive():
    """Every coefficient in the simple roots is positive (Graham, Duke Math. J. 109 (2001)), homogeneous of the right degree."""
    X = Gr(2, 5)
    for u in X.classes:
        for v in X.classes:
            for w, c in RULE(X, u, v).items():
                assert c.is_positive and c.is_homogeneous and c.degree == u.length + v.length - w.length
