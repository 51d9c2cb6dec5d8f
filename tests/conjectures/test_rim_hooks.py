"""The rim hook rule on Grassmannians, and the Littlewood-Richardson count in it."""

from fractions import Fraction
from itertools import product
from math import comb, factorial, prod

import rim_hooks
from definitions import box, check_grassmannian_row, determinant_terms

from conjcheck import Gr, Grassmannians


def multiply(X, a, b):
    """A product by the rule, as ``{(partition, d): coefficient}``."""
    answer = rim_hooks.rim_hooks(X, X.schubert(partition=a), X.schubert(partition=b))
    return {(w.partition, d): value for (w, (d,)), value in answer.items()}


def schur(shape, xs):
    """A Schur polynomial at distinct numbers, as a quotient of determinants."""
    k = len(xs)

    def determinant(parts):
        return sum(sign * prod(xs[i] ** (parts[j] + k - 1 - j) for i, j in enumerate(w)) for sign, w in determinant_terms(k))

    return Fraction(determinant(shape), determinant([0] * len(xs)))


def tableaux(shape):
    """The number of standard tableaux, by hook lengths."""
    rows = [part for part in shape if part]
    columns = [sum(part > j for part in rows) for j in range(rows[0] if rows else 0)]
    hooks = prod(rows[i] - j + columns[j] - i - 1 for i in range(len(rows)) for j in range(rows[i]))
    return factorial(sum(rows)) // hooks


def test_littlewood_richardson_multiplies_schur_polynomials():
    """``s_u s_v = sum c s_l`` in three variables, at the point (2, 3, 7), for all shapes of up to three columns."""
    xs = (2, 3, 7)
    for u in box(3, 6):
        for v in box(3, 6):
            sum_of_terms = sum(count * schur(shape, xs) for shape, count in rim_hooks.littlewood_richardson(u, v, 3).items())
            assert sum_of_terms == schur(u, xs) * schur(v, xs)


def test_littlewood_richardson_counts_standard_tableaux():
    """``sum c_{u,v}^l f^l = binomial(|u| + |v|, |u|) f^u f^v`` when no row is cut off, f the number of standard tableaux."""
    for u in box(3, 6):
        for v in box(3, 6):
            total = sum(count * tableaux(shape) for shape, count in rim_hooks.littlewood_richardson(u, v, 6).items())
            assert total == comb(sum(u) + sum(v), sum(u)) * tableaux(u) * tableaux(v)


def test_first_coefficient_two():
    """``s_21^2`` contains ``s_321`` twice: the usual first example."""
    assert rim_hooks.littlewood_richardson((2, 1), (2, 1), 4) == {
        (4, 2, 0, 0): 1, (4, 1, 1, 0): 1, (3, 3, 0, 0): 1, (3, 2, 1, 0): 2, (3, 1, 1, 1): 1, (2, 2, 2, 0): 1, (2, 2, 1, 1): 1,
    }  # fmt: skip


def test_one_hook():
    """For k = 2, n = 4: (4,2) loses a hook of two rows, sign +; (4) one of one row, sign -; (3) none, it counts 0; (2,2) fits."""
    assert rim_hooks.remove_rim_hooks((4, 2), 4) == ((1, 1), 1, 1)
    assert rim_hooks.remove_rim_hooks((4, 0), 4) == ((0, 0), 1, -1)
    assert rim_hooks.remove_rim_hooks((3, 0), 4)[2] == 0
    assert rim_hooks.remove_rim_hooks((2, 2), 4) == ((2, 2), 0, 1)


def test_whole_table_of_gr24():
    """The whole table of Gr(2,4) (Bertram, Adv. Math. 128 (1997), from memory)."""
    X = Gr(2, 4)
    table = {
        ((1,), (1,)): {((2,), 0), ((1, 1), 0)}, ((1,), (2,)): {((2, 1), 0)}, ((1,), (1, 1)): {((2, 1), 0)},
        ((1,), (2, 1)): {((2, 2), 0), ((), 1)}, ((1,), (2, 2)): {((1,), 1)}, ((2,), (1, 1)): {((), 1)},
        ((2,), (2,)): {((2, 2), 0)}, ((1, 1), (1, 1)): {((2, 2), 0)}, ((2,), (2, 1)): {((1,), 1)},
        ((1, 1), (2, 1)): {((1,), 1)}, ((2,), (2, 2)): {((1, 1), 1)}, ((1, 1), (2, 2)): {((2,), 1)},
        ((2, 1), (2, 1)): {((2,), 1), ((1, 1), 1)}, ((2, 1), (2, 2)): {((2, 1), 1)}, ((2, 2), (2, 2)): {((), 2)},
    }  # fmt: skip
    for (a, b), terms in table.items():
        assert multiply(X, a, b) == multiply(X, b, a) == dict.fromkeys(terms, 1)


def test_three_points_on_cubics():
    """One cubic passes through three general points of Gr(3,6) (Buch, Kresch, Tamvakis 2003, from memory)."""
    assert multiply(Gr(3, 6), (3, 3, 3), (3, 3, 3)) == {((), 3): 1}


def test_rational_curves():
    """Coefficients of ``q^e [pt]`` in powers of sigma_1 (Ravi, Rosenthal, Wang, Math. Ann. 311 (1998), from memory)."""
    published = {(2, 4): [2, 8, 32, 128], (2, 5): [5, 55, 610], (3, 5): [5, 55, 610], (2, 6): [14, 364, 9842]}
    for (k, n), values in published.items():
        X = Gr(k, n)
        power = {((), 0): 1}
        for exponent in range(1, X.dim + n * (len(values) - 1) + 1):
            bigger = {}
            for (shape, d), value in power.items():
                for (end, e), count in multiply(X, (1,), shape).items():
                    bigger[end, d + e] = bigger.get((end, d + e), 0) + value * count
            power = bigger
            degree, rest = divmod(exponent - X.dim, n)
            if degree >= 0 and not rest:
                assert power[X.point.partition, degree] == values[degree]


def test_degrees_of_grassmannians():
    """The degrees of Gr(n, 2n) are 1, 2, 42, 24024 (OEIS A039622), from products with sigma_1 alone."""
    for n, degree in enumerate((1, 2, 42, 24024), start=1):
        shapes = {(0,) * n: 1}
        for _ in range(n * n):
            bigger = {}
            for shape, value in shapes.items():
                for end, count in rim_hooks.littlewood_richardson(shape, (1,), n).items():
                    if end[0] <= n:
                        bigger[end] = bigger.get(end, 0) + value * count
            shapes = bigger
        assert shapes == {(n,) * n: degree}


def test_every_row_agrees_with_roots_of_unity():
    """Every row up to n = 5, and every seventh of Gr(3,6), agrees with the formula of Bertram, Vafa and Intriligator."""
    for X in [*Grassmannians().up_to(5), Gr(3, 6)]:
        rows = list(product(X.classes, repeat=2))
        for u, v in rows[:: 7 if X.n == 6 else 1]:
            check_grassmannian_row(X, u, v, rim_hooks.rim_hooks(X, u, v))
