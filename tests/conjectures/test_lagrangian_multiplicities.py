"""The claim that constants of Lagrangian Grassmannians are powers of 2."""

from collections import Counter
from functools import partial

import lagrangian_multiplicities
import quantum_pieri_lagrangian
from isotropic_definitions import basis, lagrangian_pair, pfaffian, special

from conjcheck import LG

CLAIM = lagrangian_multiplicities.lagrangian_constants_are_powers_of_two


def products(n, pairs):
    """``sigma_u * sigma_v`` for each pair, u by the formula of Giambelli and the quantum Pieri rule."""
    X = LG(n, 2 * n)
    pair = partial(lagrangian_pair, n, special(X, quantum_pieri_lagrangian.quantum_pieri_lagrangian))
    return {(u, v): pfaffian(pair, u.partition, basis(v)) for u, v in pairs(X)}


def all_pairs(X):
    return [(u, v) for u in X.classes for v in X.classes]


def verdicts(n, pairs):
    """The values of the constants, by the verdict of the claim."""
    found = {True: Counter(), False: Counter()}
    for (u, v), product in products(n, pairs).items():
        for (w, d), value in product.items():
            verdict = CLAIM(u.variety, u, v, w, (d,), lambda *case, value=value: value)
            found[verdict][value] += 1
    return found


def test_the_claim_asks_about_the_case():
    """The claim asks for the constant of its case, and accepts 0 and powers of 2 only."""
    X = LG(2, 4)
    u, v, w, d = X.classes[1], X.classes[2], X.identity, (1,)
    asked = []
    assert CLAIM(X, u, v, w, d, lambda *case: asked.append(case) or 1)
    assert asked == [(u, v, w, d)]
    accepted = [value for value in range(20) if CLAIM(X, u, v, w, d, lambda *case, value=value: value)]
    assert accepted == [0, 1, 2, 4, 8, 16]


def test_true_up_to_three():
    """All constants of LG(2,4) and LG(3,6) are 1 or 2."""
    for n in (2, 3):
        found = verdicts(n, all_pairs)
        assert set(found[True]) == {1, 2} and not found[False]


def test_false_at_four():
    """On LG(4,8) the product (3,1) * (3,2) has the coefficient 3 at q (3,1); 12 constants are 3, no other fails."""
    found = verdicts(4, all_pairs)
    assert found[False] == {3: 12}
    assert set(found[True]) == {1, 2, 4}

    def first(X):
        return [(X.schubert(partition=(3, 1)), X.schubert(partition=(3, 2)))]

    ((row, product),) = products(4, first).items()
    assert product[row[0], 1] == 3
