"""Quantum equals classical on Grassmannians."""

import quantum_equals_classical
from definitions import check_grassmannian_row

from conjcheck import Gr, Grassmannians

RULE = quantum_equals_classical.quantum_equals_classical


def multiply(X, a, b):
    """A product by the rule, as ``{(partition, d): number of puzzles}``."""
    answer = RULE(X, X.schubert(partition=a), X.schubert(partition=b))
    return {(w.partition, d): len(puzzles) for (w, (d,)), puzzles in answer.items()}


def test_strings_of_kernels_and_spans():
    """``J_d`` turns the last d zeros and the first d twos into ones, and has k - d zeros, 2d ones and n - k - d twos."""
    assert quantum_equals_classical.widen("0101101", 0) == "0202202"
    assert quantum_equals_classical.widen("0101101", 1) == "0102212"
    assert quantum_equals_classical.widen("0101101", 2) == "0111212"
    for X in Grassmannians().up_to(6):
        (k,), n = X.steps, X.n
        for d in range(min(k, n - k) + 1):
            for u in X.classes:
                image = quantum_equals_classical.widen(u.string, d)
                assert [image.count(letter) for letter in "012"] == [k - d, 2 * d, n - k - d]


def test_lines_and_cubics():
    """``s22 s22 = q^2`` on Gr(2,4) and ``s333 s333 = q^3`` on Gr(3,6) (Buch, Kresch, Tamvakis 2003, from memory)."""
    assert multiply(Gr(2, 4), (2, 2), (2, 2)) == {((), 2): 1}
    assert multiply(Gr(3, 6), (3, 3, 3), (3, 3, 3)) == {((), 3): 1}


def test_a_product_with_twos():
    """``s321 s321 = q s33 + 2 q s321 + q s222 + q^2`` on Gr(3,6) (computed)."""
    assert multiply(Gr(3, 6), (3, 2, 1), (3, 2, 1)) == {((3, 3), 1): 1, ((3, 2, 1), 1): 2, ((2, 2, 2), 1): 1, ((), 2): 1}


def test_every_row_agrees_with_roots_of_unity():
    """Every row up to n = 5, and every seventh of Gr(3,6), agrees with the formula of Bertram, Vafa and Intriligator."""
    for X in [*Grassmannians().up_to(5), Gr(3, 6)]:
        rows = [(u, v) for u in X.classes for v in X.classes]
        for u, v in rows[:: 7 if X.n == 6 else 1]:
            check_grassmannian_row(X, u, v, {key: len(puzzles) for key, puzzles in RULE(X, u, v).items()})


def test_number_of_terms():
    """Nonzero terms over unordered pairs: Gr(2,4) 24, Gr(2,5) 70, Gr(2,6) 171, Gr(3,6) 345 (computed)."""
    for X, expected in ((Gr(2, 4), 24), (Gr(2, 5), 70), (Gr(2, 6), 171), (Gr(3, 6), 345)):
        assert sum(len(RULE(X, u, v)) for u in X.classes for v in X.classes[u.index :]) == expected
