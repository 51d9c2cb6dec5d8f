"""Quantum Monk on complete flags."""

import quantum_monk
from definitions import basis, combine, times_divisor, times_q, times_x

from conjcheck import Fl


def multiply(n, r, w):
    """``sigma_{s_r} * sigma_w`` by the rule, as ``{(permutation, d): coefficient}``."""
    X = Fl(n)
    found = quantum_monk.quantum_monk(X, X.schubert(word=(r,)), X.schubert(permutation=w))
    return {(end.permutation, d): value for (end, d), value in found.items()}


def test_the_table_of_fl3():
    """The divisor rows of the whole table of Fl(3) (Fomin, Gelfand, Postnikov 1997, from memory)."""
    assert multiply(3, 1, (2, 1, 3)) == {((3, 1, 2), (0, 0)): 1, ((1, 2, 3), (1, 0)): 1}
    assert multiply(3, 2, (1, 3, 2)) == {((2, 3, 1), (0, 0)): 1, ((1, 2, 3), (0, 1)): 1}
    assert multiply(3, 1, (1, 3, 2)) == {((2, 3, 1), (0, 0)): 1, ((3, 1, 2), (0, 0)): 1}
    assert multiply(3, 1, (3, 1, 2)) == {((1, 3, 2), (1, 0)): 1}
    assert multiply(3, 2, (2, 3, 1)) == {((2, 1, 3), (0, 1)): 1}
    assert multiply(3, 1, (3, 2, 1)) == {((2, 3, 1), (1, 0)): 1, ((1, 2, 3), (1, 1)): 1}
    assert multiply(3, 2, (3, 2, 1)) == {((3, 1, 2), (0, 1)): 1, ((1, 2, 3), (1, 1)): 1}


def test_squares_of_divisors():
    """``sigma_{s_k}^2`` has the terms ``s_{k+1} s_k``, ``s_{k-1} s_k`` and ``q_k``, all n (Kirillov, Maeno 2000, Remark 15)."""
    for n in range(2, 7):
        X = Fl(n)
        for k in range(1, n):
            u = X.schubert(word=(k,))
            expected = {(X.schubert(word=(j, k)), (0,) * (n - 1)): 1 for j in (k - 1, k + 1) if 0 < j < n}
            expected[X.identity, tuple(int(i == k) for i in range(1, n))] = 1
            assert quantum_monk.quantum_monk(X, u, u) == expected


def test_every_row_counts_inversions():
    """The rule is the definition by lengths on every row up to n = 5."""
    for n in range(2, 6):
        for v in Fl(n).classes:
            for r in range(1, n):
                assert multiply(n, r, v.permutation) == times_divisor(r, basis(v.permutation))


QUANTUM_SCHUBERT = {
    (2, 3, 4, 1): "x1x2x3+q1x3+q2x1",
    (1, 3, 4, 2): "x1x2+x1x3+x2x3+q1+q2",
    (1, 4, 2, 3): "x1x1+x1x2+x2x2-q1-q2",
    (2, 1, 4, 3): "x1x1+x1x2+x1x3",
    (4, 1, 2, 3): "x1x1x1-q1x1-q1x1-q1x2",
    (3, 1, 4, 2): "x1x1x2+x1x1x3+q1x1-q1x3",
    (2, 4, 1, 3): "x1x1x2+x1x2x2+q1x1+q1x2-q2x1",
    (3, 4, 1, 2): "x1x1x2x2+q1x1x2+q1x1x2-q2x1x1+q1q1+q1q2",
    (3, 2, 4, 1): "x1x1x2x3+q1x1x3+q2x1x1",
    (4, 2, 1, 3): "x1x1x1x2+q1x1x1-q1x1x2-q1q1-q1q2",
    (4, 3, 1, 2): "x1x1x1x2x2+q1x1x1x2+q1x1x1x2-q2x1x1x1+q1q1x1+q1q2x1",
    (4, 2, 3, 1): "x1x1x1x2x3+q2x1x1x1+q1x1x1x3-q1x1x2x3-q1q1x3-q1q2x1",
    (3, 4, 2, 1): "x1x1x2x2x3+q1x1x2x3+q1x1x2x3+q2x1x1x2+q1q1x3+q1q2x1",
}
"""Kirillov and Maeno, Discrete Math. 217 (2000), 191-223, Appendix A at y = 0; powers and coefficients written out."""


def times_divisor_by_rule(r, vector):
    """``sigma_{s_r}`` times a vector on Fl(4), every product by the rule."""
    result = []
    for (w, d), coefficient in vector.items():
        shifted = {(end, tuple(map(sum, zip(d, step, strict=True)))): value for (end, step), value in multiply(4, r, w).items()}
        result.append((coefficient, shifted))
    return combine(*result)


def test_quantum_schubert_polynomials_of_s4(monkeypatch):
    """The published quantum Schubert polynomials, in the operators of the rule, take 1 to their Schubert classes."""
    monkeypatch.setattr("definitions.times_divisor", lambda r, vector: times_divisor_by_rule(r, vector) if 0 < r < 4 else {})
    for w, polynomial in QUANTUM_SCHUBERT.items():
        terms = []
        for term in polynomial.replace("-", "+-").split("+"):
            vector = basis((1, 2, 3, 4))
            factors = term.lstrip("-")
            for kind, i in zip(factors[::2], factors[1::2], strict=True):
                vector = (times_x if kind == "x" else times_q)(int(i), vector)
            terms.append((-1 if term.startswith("-") else 1, vector))
        assert combine(*terms) == basis(w), w


def test_divisor_operators_commute():
    """``sigma_{s_i} * (sigma_{s_j} * sigma_v)`` does not depend on the order of i and j, on Fl(4)."""
    for v in Fl(4).classes:
        for i in range(1, 4):
            for j in range(1, i):
                start = basis(v.permutation)
                one = times_divisor_by_rule(i, times_divisor_by_rule(j, start))
                assert one == times_divisor_by_rule(j, times_divisor_by_rule(i, start))
