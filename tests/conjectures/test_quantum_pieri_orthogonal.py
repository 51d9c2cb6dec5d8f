"""Quantum Pieri on maximal orthogonal Grassmannians."""

from functools import partial

import quantum_pieri_orthogonal
from isotropic_definitions import basis, combine, orthogonal_pair, pfaffian, special

from conjcheck import OG

RULE = quantum_pieri_orthogonal.quantum_pieri_orthogonal


def spaces(most):
    """``OG(n, 2n+1)`` and, from n = 3 on, ``OG(n+1, 2n+2)``, with n."""
    for n in range(2, most + 1):
        yield n, OG(n, 2 * n + 1)
        if n > 2:
            yield n, OG(n + 1, 2 * n + 2)


def multiply(X, k, partition):
    """``tau_k * tau_partition`` by the rule, as ``{(partition, d): coefficient}``."""
    answer = RULE(X, X.schubert(partition=(k,)), X.schubert(partition=partition))
    return {(w.partition, d): value for (w, (d,)), value in answer.items()}


def test_projective_space():
    """OG(2,5) is P^3: the powers of the hyperplane class are (1), (2), (2,1) and q."""
    X = OG(2, 5)
    assert multiply(X, 1, (1,)) == {((2,), 0): 1}
    assert multiply(X, 1, (2,)) == {((2, 1), 0): 1}
    assert multiply(X, 1, (2, 1)) == {((), 1): 1}
    assert multiply(X, 2, (2,)) == {((), 1): 1}
    assert multiply(X, 2, (2, 1)) == {((1,), 1): 1}


def test_six_dimensional_quadric():
    """OG(3,7) and OG(4,8) are Q^6: ``t2^2 = 2 t31, t3^2 = q`` (computed), and a hyperplane times a point is q times a hyperplane."""
    for X in (OG(3, 7), OG(4, 8)):
        assert multiply(X, 2, (2,)) == {((3, 1), 0): 2}
        assert multiply(X, 3, (3,)) == {((), 1): 1}
        assert multiply(X, 1, (2,)) == {((3,), 0): 1, ((2, 1), 0): 1}
        assert multiply(X, 1, (3, 2)) == {((3, 2, 1), 0): 1, ((), 1): 1}
        assert multiply(X, 1, (3, 2, 1)) == {((1,), 1): 1}


def test_one_row_commutes():
    """``tau_i * (tau_j * tau_l)`` does not depend on the order of i and j."""
    for n, X in spaces(4):
        s = special(X, RULE)
        for u in X.classes:
            for i in range(1, n + 1):
                for j in range(1, i):
                    assert s(i)(s(j)(basis(u))) == s(j)(s(i)(basis(u)))


def test_relations():
    """``t_i^2 + 2 sum_{k<i} (-1)^k t_{i+k} t_{i-k} + (-1)^i t_{2i} = 0`` for i < n, ``t_n^2 = q`` (Kresch, Tamvakis 2004, from memory)."""
    for n, X in spaces(5):
        s = special(X, RULE)
        for u in X.classes:
            start = basis(u)
            for i in range(1, n):
                middle = [(2 * (-1) ** k, 0, s(i + k)(s(i - k)(start))) for k in range(1, i)]
                assert not combine((1, 0, s(i)(s(i)(start))), *middle, ((-1) ** i, 0, s(2 * i)(start)))
            assert s(n)(s(n)(start)) == combine((1, 1, start))


def test_giambelli():
    """Pfaffians of two-row classes in one-row classes take 1 to every class (Kresch, Tamvakis 2004, from memory)."""
    for n, X in spaces(5):
        pair = partial(orthogonal_pair, n, special(X, RULE))
        for u in X.classes:
            assert pfaffian(pair, u.partition, basis(X.identity)) == basis(u)


def test_degrees():
    """The degree of OG(n,2n+1) is 1, 2, 12, 286 for n = 2, 3, 4, 5 (OEIS A003121)."""
    for n, X in spaces(5):
        vector = basis(X.identity)
        for _ in range(X.dim):
            vector = special(X, RULE)(1)(vector)
        assert vector[X.point, 0] == {2: 1, 3: 2, 4: 12, 5: 286}[n]
