"""The oracle in a claim's hand."""

import itertools

import pytest
from planted import outcomes_of, truth

from conjcheck import Fl, Gr
from conjcheck.errors import DifferentVarieties, NotationError
from conjcheck.testing.asker import Asker

G, F = Gr(2, 4), Fl(3)


def test_the_oracle_in_a_claims_hand():
    """``N`` gives the constants and products of any classes, of other varieties too, and products that are the claim's to change."""
    N = Asker(classical=False)
    for X in (G, F):
        for u, v in itertools.product(X.classes, repeat=2):
            true = truth(X)[u, v]
            changed = N.product(u, v)
            assert changed == true
            changed.clear()
            assert N.product(u, v) == true
            for w, d in outcomes_of(X, u.length + v.length):
                assert N(u, v, w, d) == N(u, v, w, list(d)) == true.get((w, d), 0)
                if not any(d):
                    assert N(u, v, w) == N(u, v, w, d)


def test_the_classical_oracle():
    """In the classical ring ``N`` knows no degrees: ``N(u, v, w)``, and products keyed by classes."""
    N = Asker(classical=True)
    for u, v in itertools.product(F.classes, repeat=2):
        classical = {w: n for (w, d), n in truth(F)[u, v].items() if not any(d)}
        assert N.product(u, v) == classical
        assert all(N(u, v, w) == classical.get(w, 0) for w in F.classes)


@pytest.mark.parametrize(
    ("ring", "question", "error"),
    [
        ("quantum", lambda N: N(F.identity, F.identity, F.identity, (0,)), NotationError),
        ("quantum", lambda N: N(F.identity, F.identity, F.identity, (0, 0, 0)), NotationError),
        ("quantum", lambda N: N(F.identity, F.identity, F.identity, (0, -1)), NotationError),
        ("quantum", lambda N: N(F.identity, F.identity, F.identity, [0]), NotationError),
        ("quantum", lambda N: N(F.identity, F.identity, G.identity, (0, 0)), DifferentVarieties),
        ("quantum", lambda N: N(F.identity, F.identity, 5, (0, 0)), NotationError),
        ("quantum", lambda N: N(F.identity, G.identity, F.identity, (0, 0)), DifferentVarieties),
        ("quantum", lambda N: N.product(F.identity, G.identity), DifferentVarieties),
        ("quantum", lambda N: N.product(F.identity, 1), NotationError),
        ("classical", lambda N: N(F.point, F.point, F.identity, (1, 1)), NotationError),
        ("classical", lambda N: N(F.identity, F.identity, G.identity), DifferentVarieties),
    ],
    ids=range(11),
)
def test_questions_without_sense(ring, question, error):
    """A question without sense is an error, never a silent 0: a claim would hold for the wrong reason."""
    N = Asker(classical=ring == "classical")
    with pytest.raises(error):
        question(N)
