"""Hook times Schubert on complete flags."""

from itertools import pairwise

import hook_times_schubert
import pytest
from definitions import classical_product, inversions

from conjcheck import Fl

RULE = hook_times_schubert.hook_times_schubert


@pytest.mark.parametrize("n", [2, 3, 4])
def test_every_row_multiplies_schubert_polynomials(n):
    """The chains count the products of Schubert polynomials on every row in the premise up to n = 4."""
    X = Fl(n)
    for u in X.classes:
        for v in X.classes:
            if RULE.premise(X, u, v):
                truth = classical_product(u.permutation, v.permutation)
                assert {w.permutation: c for w in X.classes if (c := len(RULE(X, u, v, w)))} == truth


def test_hooks_in_premise():
    """Hooks (p, 1^r) at descent k fit for p <= n - k and r < k: that many permutations satisfy the premise, n up to 6."""
    for n in range(2, 7):
        X = Fl(n)
        assert sum(RULE.premise(X, u, X.identity) for u in X.classes) == sum((n - k) * k for k in range(1, n))


def test_chains_are_chains():
    """Each object is a saturated chain of length l(u) that swaps across k and whose labels rise, then fall."""
    X = Fl(5)
    u = X.schubert(permutation=(1, 3, 5, 2, 4))
    arm, *leg = hook_times_schubert.shape(u)
    assert (arm, leg) == (2, [1]) and u.descents == (3,)
    total = 0
    for v in X.classes:
        for w in X.of_length(v.length + 3):
            found = RULE(X, u, v, w)
            assert len(set(found)) == len(found)
            total += len(found)
            for chain in found:
                assert chain[0] == v.permutation and chain[-1] == w.permutation and len(chain) == 4
                labels = []
                for low, high in pairwise(chain):
                    a, b = [i for i in range(5) if low[i] != high[i]]
                    assert a < 3 <= b and inversions(high) == inversions(low) + 1
                    labels.append(min(low[a], low[b]))
                assert labels[0] < labels[1] > labels[2]
    assert total > 0
