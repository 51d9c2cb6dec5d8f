"""Quantum Pieri on Grassmannians."""

import quantum_pieri_grassmannians
from definitions import check_grassmannian_row

from conjcheck import Gr, Grassmannians


def multiply(X, p, partition):
    """``sigma_p * sigma_partition`` by the rule, as ``{(partition, d): coefficient}``."""
    answer = quantum_pieri_grassmannians.quantum_pieri_grassmannians(X, X.schubert(partition=(p,)), X.schubert(partition=partition))
    return {(w.partition, d): value for (w, (d,)), value in answer.items()}


def test_gr24():
    """The one-row products of Gr(2,4) (Bertram, Adv. Math. 128 (1997), from memory)."""
    X = Gr(2, 4)
    assert multiply(X, 1, (1,)) == {((2,), 0): 1, ((1, 1), 0): 1}
    assert multiply(X, 1, (2, 1)) == {((2, 2), 0): 1, ((), 1): 1}
    assert multiply(X, 1, (2, 2)) == {((1,), 1): 1}
    assert multiply(X, 2, (1, 1)) == {((), 1): 1}
    assert multiply(X, 2, (2,)) == {((2, 2), 0): 1}
    assert multiply(X, 2, (2, 1)) == {((1,), 1): 1}
    assert multiply(X, 2, (2, 2)) == {((1, 1), 1): 1}


def test_gr25():
    """Products of Gr(2,5) (Bertram, from memory)."""
    X = Gr(2, 5)
    assert multiply(X, 1, (3, 1)) == {((3, 2), 0): 1, ((), 1): 1}
    assert multiply(X, 1, (3, 2)) == {((3, 3), 0): 1, ((1,), 1): 1}
    assert multiply(X, 2, (3, 2)) == {((2,), 1): 1, ((1, 1), 1): 1}
    assert multiply(X, 2, (3, 3)) == {((2, 1), 1): 1}


def test_hyperplanes():
    """``h^n = q`` on projective space."""
    for n in range(2, 8):
        X = Gr(1, n)
        assert multiply(X, 1, (n - 1,)) == {((), 1): 1}
        assert all(multiply(X, 1, (p,)) == {((p + 1,), 0): 1} for p in range(n - 1))


def test_no_quantum_term_before_its_time():
    """No q if the rows of the two shapes, or the first columns of both, fit into the box together (Buch 2003, Lemma 3)."""
    for X in Grassmannians().up_to(7):
        (k,) = X.steps
        for p in range(1, X.n - k + 1):
            for v in X.classes:
                if 1 + len(v.partition) <= k or p + (*v.partition, 0)[0] <= X.n - k:
                    assert all(d == 0 for _, d in multiply(X, p, v.partition))


def test_every_row_agrees_with_roots_of_unity():
    """Every row in the premise up to n = 6 agrees with the formula of Bertram, Vafa and Intriligator."""
    rule = quantum_pieri_grassmannians.quantum_pieri_grassmannians
    for X in Grassmannians().up_to(6):
        rows = [(u, v) for u in X.classes for v in X.classes if rule.premise(X, u, v)]
        assert len(rows) == (X.n - X.steps[0]) * len(X.classes)
        for u, v in rows:
            check_grassmannian_row(X, u, v, rule(X, u, v))
