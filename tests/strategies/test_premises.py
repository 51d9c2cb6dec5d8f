"""From any row to an allowed one."""

import pytest

from conjcheck.geometry.flag_variety import Fl, Gr
from conjcheck.strategies.premises import Ground

PREMISES = {
    "all": lambda X, u, v: True,
    "v special": lambda X, u, v: v.length == 1,
    "u special": lambda X, u, v: u.length == 2,
    "both special": lambda X, u, v: u.length == v.length == 1,
    "together": lambda X, u, v: (u.index + v.index) % 7 == 0,
    "short": lambda X, u, v: u.length + v.length <= X.dim,
}


@pytest.mark.parametrize("X", [Fl(3), Gr(2, 4), Fl(1, 3, n=4)], ids=str)
@pytest.mark.parametrize("name", PREMISES)
def test_every_row_settles_on_an_allowed_one_and_all_allowed_ones_are_reached(X, name):
    """An allowed row stays where it is, so that all allowed rows are reached; the others spread over the allowed ones."""
    ground = Ground(PREMISES[name], classical=False)
    reached = set()
    for u in X.classes:
        for v in X.classes:
            a, b = ground.settle(u, v)
            assert PREMISES[name](X, a, b)
            if PREMISES[name](X, u, v):
                assert (a, b) == (u, v)
            elif any(PREMISES[name](X, u, other) for other in X.classes):
                assert a is u
            elif any(PREMISES[name](X, other, v) for other in X.classes):
                assert b is v
            else:
                reached.add((a, b))
    if name == "both special":
        assert len(reached) >= min(3, len(X.of_length(1)) ** 2)


def test_the_answer_does_not_depend_on_earlier_questions():
    """Two grounds asked in opposite order agree everywhere: strategies must be pure."""
    X = Fl(4)
    forwards, backwards = (Ground(PREMISES["both special"], classical=False) for _ in range(2))
    pairs = [(u, v) for u in X.classes for v in X.classes]
    assert [forwards.settle(*pair) for pair in pairs] == [backwards.settle(*pair) for pair in reversed(pairs)][::-1]


def test_nothing_allowed_is_none():
    """Also with ``classical``, which forbids the rows whose lengths add up to more than the dimension."""
    X = Fl(3)
    assert Ground(lambda X, u, v: False, classical=False).settle(X.point, X.point) is None
    assert Ground(lambda X, u, v: u is v is X.point, classical=True).settle(X.identity, X.identity) is None
    assert not Ground(None, classical=True).allows(X.point, X.point)
    assert Ground(None, classical=True).allows(X.point, X.identity)


def test_a_large_variety_is_never_tabulated():
    """On ``Fl(7)`` with 5,040 classes a premise is asked at most twice per class, and ``None`` says that nothing was found."""
    X, calls = Fl(7), []

    def premise(_, u, v):
        calls.append(1)
        return u.length == v.length == 1

    assert Ground(premise, classical=False).settle(X.point, X.point) is None
    assert len(calls) == 1 + 2 * len(X.classes)
