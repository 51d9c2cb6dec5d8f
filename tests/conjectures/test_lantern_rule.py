"""The invented lantern rule: right up to n = 4, and wrong exactly as planted."""

import lantern_rule

from conjcheck import Gr, Grassmannians

RULE = lantern_rule.lantern_rule


def pieri(X, v, w, d):
    """The coefficient in a one-row product (Buch, Compositio Math. 137 (2003), Theorem 1), when the degrees fit."""
    (k,) = X.steps
    old, new = ((*x.partition, *[0] * k)[:k] for x in (v, w))
    if d == 1:
        old = tuple(part - 1 for part in old)
        return int(all(new[i] <= old[i] for i in range(k)) and all(old[i + 1] <= new[i] for i in range(k - 1)))
    return int(d == 0 and all(old[i] <= new[i] for i in range(k)) and all(new[i + 1] <= old[i] for i in range(k - 1)))


def cases(X):
    """Every case in the premise whose degrees fit, with the answer of the rule and the truth."""
    (k,), n = X.steps, X.n
    for p in range(1, n - k + 1):
        u = X.schubert(partition=(p,))
        for v in X.classes:
            if RULE.premise(X, u, v):
                for d in range((p + v.length) // n + 1):
                    for w in X.of_length(p + v.length - n * d):
                        yield u, v, w, d, len(RULE(X, u, v, w, (d,))), pieri(X, v, w, d)


def test_right_up_to_n_four():
    """Every case in the premise up to n = 4 is right."""
    assert all(answer == truth for X in Grassmannians().up_to(4) for *_, answer, truth in cases(X))


def test_first_failure():
    """The first wrong cases are on Gr(3,5): (2) times (2,1) and times (2,2), one q term too many each."""
    wrong = [(X, u.partition, v.partition, w.partition, d, answer, truth)
             for X in Grassmannians().of_rank(4) for u, v, w, d, answer, truth in cases(X) if answer != truth]  # fmt: skip
    X = Gr(3, 5)
    assert wrong == [(X, (2,), (2, 1), (), 1, 1, 0), (X, (2,), (2, 2), (1,), 1, 1, 0)]


def test_planted_condition():
    """Where answer or truth is not 0, it fails if and only if d > 0 and v leaves a row of the box empty: n = 5, 6, 7."""
    for n, failing in ((5, 2), (6, 12), (7, 50)):
        seen = 0
        for X in Grassmannians().of_rank(n - 1):
            for _, v, _, d, answer, truth in cases(X):
                if answer or truth:
                    assert (answer != truth) == (d > 0 and len(v.partition) < X.steps[0])
                    seen += answer != truth
        assert seen == failing


def test_answers_show_the_lanterns():
    """The objects are the lanterns that change: p of them lit, or n - p put out."""
    X = Gr(3, 5)
    u, v = X.schubert(partition=(2,)), X.schubert(partition=(2, 1))
    assert RULE(X, u, v, X.identity, (1,)) == [((1, 1), (1, 2), (2, 1))]
    assert RULE(X, u, v, X.schubert(partition=(2, 2, 1)), (0,)) == [((2, 2), (3, 1))]
    assert RULE(X, u, v, X.schubert(partition=(2, 2, 1)), (1,)) == []
