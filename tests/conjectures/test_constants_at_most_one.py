"""The two claims that constants of complete flags are at most 1."""

import constants_at_most_one
from definitions import classical_product

from conjcheck import Fl

QUANTUM = constants_at_most_one.quantum_constants_at_most_one
CLASSICAL = constants_at_most_one.classical_constants_at_most_one


class SchubertPolynomials:
    """Stands in for the oracle in the classical ring."""

    def product(self, u, v):
        return classical_product(u.permutation, v.permutation)


class Given:
    """Answers every question with one product."""

    def __init__(self, terms):
        self.terms = terms

    def product(self, u, v):
        return self.terms


def test_claims_look_at_every_coefficient():
    """Both claims hold for coefficients 1 and fail as soon as one is 2."""
    X = Fl(3)
    u, v = X.classes[1:3]
    for rule, key in ((QUANTUM, lambda w: (w, (0, 0))), (CLASSICAL, lambda w: w)):
        assert rule(X, u, v, Given({})) is True
        assert rule(X, u, v, Given({key(w): 1 for w in X.classes})) is True
        assert rule(X, u, v, Given({key(w): 1 + (w is X.point) for w in X.classes})) is False


def test_classical_claim_up_to_four():
    """Products of Schubert polynomials on Fl(4) have coefficients 0 and 1."""
    X = Fl(4)
    assert all(CLASSICAL(X, u, v, SchubertPolynomials()) for u in X.classes for v in X.classes)


def test_classical_claim_fails_on_fl6():
    """On Fl(6) the square of ``[132564]`` has a coefficient 2 (computed)."""
    X = Fl(6)
    u = X.schubert(permutation=(1, 3, 2, 5, 6, 4))
    assert max(classical_product(u.permutation, u.permutation).values()) == 2
    assert not CLASSICAL(X, u, u, SchubertPolynomials())
