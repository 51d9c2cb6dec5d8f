"""Quantum Pieri on Lagrangian Grassmannians."""

from functools import partial

import quantum_pieri_lagrangian
from isotropic_definitions import basis, combine, lagrangian_pair, pfaffian, special

from conjcheck import LG

RULE = quantum_pieri_lagrangian.quantum_pieri_lagrangian


def multiply(X, k, partition):
    """``sigma_k * sigma_partition`` by the rule, as ``{(partition, d): coefficient}``."""
    answer = RULE(X, X.schubert(partition=(k,)), X.schubert(partition=partition))
    return {(w.partition, d): value for (w, (d,)), value in answer.items()}


def test_table_of_lg24():
    """The rows of LG(2,4), the quadric Q^3 (Kresch, Tamvakis 2003, from memory)."""
    X = LG(2, 4)
    assert multiply(X, 1, ()) == {((1,), 0): 1}
    assert multiply(X, 1, (1,)) == {((2,), 0): 2}
    assert multiply(X, 1, (2,)) == {((2, 1), 0): 1, ((), 1): 1}
    assert multiply(X, 1, (2, 1)) == {((1,), 1): 1}
    assert multiply(X, 2, (1,)) == {((2, 1), 0): 1, ((), 1): 1}
    assert multiply(X, 2, (2,)) == {((1,), 1): 1}
    assert multiply(X, 2, (2, 1)) == {((2,), 1): 1}


def test_products_of_lg36():
    """Products of LG(3,6) (computed)."""
    X = LG(3, 6)
    assert multiply(X, 1, (3,)) == {((3, 1), 0): 1, ((), 1): 1}
    assert multiply(X, 2, (2,)) == {((3, 1), 0): 2, ((), 1): 1}
    assert multiply(X, 2, (3, 1)) == {((3, 2, 1), 0): 1, ((2,), 1): 2}
    assert multiply(X, 3, (3,)) == {((2,), 1): 1}


def test_one_row_commutes():
    """``sigma_i * (sigma_j * sigma_l)`` does not depend on the order of i and j."""
    for n in (2, 3, 4):
        X = LG(n, 2 * n)
        s = special(X, RULE)
        for u in X.classes:
            for i in range(1, n + 1):
                for j in range(1, i):
                    assert s(i)(s(j)(basis(u))) == s(j)(s(i)(basis(u)))


def test_relations():
    """``s_i^2 + 2 sum (-1)^k s_{i+k} s_{i-k} = (-1)^(n-i) q s_{2i-n-1}``, on every class (Kresch, Tamvakis 2003, from memory)."""
    for n in (2, 3, 4, 5):
        X = LG(n, 2 * n)
        s = special(X, RULE)
        for u in X.classes:
            start = basis(u)
            for i in range(1, n + 1):
                left = [(2 * (-1) ** k, 0, s(i + k)(s(i - k)(start))) for k in range(1, i + 1)]
                right = ((-1) ** (n - i), 1, s(2 * i - n - 1)(start))
                assert combine((1, 0, s(i)(s(i)(start))), *left) == combine(right)


def test_giambelli():
    """Pfaffians of two-row classes in one-row classes take 1 to every class (Kresch, Tamvakis 2003, from memory)."""
    for n in (2, 3, 4, 5):
        X = LG(n, 2 * n)
        pair = partial(lagrangian_pair, n, special(X, RULE))
        for u in X.classes:
            assert pfaffian(pair, u.partition, basis(X.identity)) == basis(u)


def test_degrees():
    """The degree of LG(n,2n) is ``2^(N-n)`` times 1, 2, 12, 286, N = n(n+1)/2 (OEIS A003121)."""
    for n, count in ((2, 1), (3, 2), (4, 12), (5, 286)):
        X = LG(n, 2 * n)
        vector = basis(X.identity)
        for _ in range(X.dim):
            vector = special(X, RULE)(1)(vector)
        assert vector[X.point, 0] == 2 ** (X.dim - n) * count
