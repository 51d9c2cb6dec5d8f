"""The plain test to beat: Hypothesis draws one case ``(u, v, w, d)`` of ``Fl(n)`` per example and compares a rule with a table.

Nothing of conjcheck: the table is that of ``plain_scipy``, the rule a look-up, so that the rate is the cost of drawing alone.

    python plain_hypothesis.py 5 2000
"""

import sys
import time
from itertools import product

from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from plain_scipy import fill, length

__all__ = ["cases_per_second"]


def possible_cases(n, perms):
    """For each total of lengths the pairs (w, d) that the degree axiom allows."""
    most = n * (n - 1) // 2
    degrees = [d for d in product(range(most + 1), repeat=n - 1) if sum(d) <= most]
    allowed = {total: [] for total in range(2 * most + 1)}
    for w in perms:
        for d in degrees:
            total = sum(a > b for i, a in enumerate(w) for b in w[i:]) + 2 * sum(d)
            if total in allowed:
                allowed[total].append((w, d))
    return allowed


def cases_per_second(n, examples):
    """Examples per second of a passing test with that many examples; the set-up is not timed."""
    table = fill(n)
    rows = dict(table.constants())
    perms = sorted({u for u, _ in rows}, key=lambda w: (length(w), w))
    classes = st.sampled_from(perms)
    outcomes = {total: st.sampled_from(pairs) for total, pairs in possible_cases(n, perms).items()}
    counted = 0

    def rule(u, v, w, d):
        return rows[u, v].get((w, d), 0)

    @st.composite
    def cases(draw):
        u, v = draw(classes), draw(classes)
        w, d = draw(outcomes[length(u) + length(v)])
        return u, v, w, d

    @settings(
        max_examples=examples,
        deadline=None,
        database=None,
        derandomize=True,
        phases=[Phase.generate],
        suppress_health_check=list(HealthCheck),
    )
    @given(cases())
    def test(case):
        nonlocal counted
        counted += 1
        u, v, w, d = case
        assert rule(u, v, w, d) == rows[u, v].get((w, d), 0)

    began = time.perf_counter()
    test()
    return counted / (time.perf_counter() - began)


if __name__ == "__main__":
    size, examples = int(sys.argv[1]), int(sys.argv[2])
    print(f"{cases_per_second(size, examples):.0f} cases per second on Fl({size})")
