"""The claim that constants of E6/P1 are at most 3."""

import cayley_plane_bound
from root_definitions import classical_product

from conjcheck import FlagVariety

CLAIM = cayley_plane_bound.cayley_plane_constants_at_most_three
VALUES = (2, 3, 7, 19, 41, 83)


def constants(X, u, v):
    """The classical constants of a product, from its values at the fixed points."""
    found = classical_product(X, u, v, VALUES)
    return {w: found[w] for w in X.of_length(u.length + v.length) if w in found}


def test_the_claim_asks_about_the_case():
    """The claim asks for the constant of its case, and accepts 0 to 3."""
    X = FlagVariety("E6/P1")
    u, v, w, d = X.classes[3], X.classes[4], X.identity, (1,)
    asked = []
    assert CLAIM(X, u, v, w, d, lambda *case: asked.append(case) or 1)
    assert asked == [(u, v, w, d)]
    assert [value for value in range(9) if CLAIM(X, u, v, w, d, lambda *case, value=value: value)] == [0, 1, 2, 3]


def test_true_in_low_codimension():
    """Products with ``l(u) + l(v)`` below 10, where no q can occur, have no constant above 3, and some are 3."""
    X = FlagVariety("E6/P1")
    assert X.q_degrees == (12,)
    found = [c for u in X.classes for v in X.classes if u.length + v.length < 10 for c in constants(X, u, v).values()]
    assert max(found) == 3


def test_a_classical_constant_is_four():
    """``sigma_{25431}^2 = 4 sigma_{1354265431} + 2 sigma_{4354265431}``: the claim is false there."""
    X = FlagVariety("E6/P1")
    u = X.schubert(word=(2, 5, 4, 3, 1))
    found = {"".join(map(str, w.word)): c for w, c in constants(X, u, u).items()}
    assert found == {"1354265431": 4, "4354265431": 2}
    w = X.schubert(word=(1, 3, 5, 4, 2, 6, 5, 4, 3, 1))
    assert not CLAIM(X, u, u, w, (0,), lambda u, v, w, d: constants(X, u, v).get(w, 0))


def test_number_of_classical_constants():
    """Of the 252 nonzero classical constants over unordered pairs 181 are 1, 48 are 2, 21 are 3 and 2 are 4 (computed)."""
    X = FlagVariety("E6/P1")
    found = [c for u in X.classes for v in X.classes[u.index :] for c in constants(X, u, v).values()]
    assert [found.count(c) for c in range(1, 6)] == [181, 48, 21, 2, 0]
    assert len(found) == 252
