"""Urns: every class, in proportion to its balls, the first in the end."""

from collections import Counter

import pytest
from hypothesis import strategies as st

from conjcheck.geometry.flag_variety import Fl, Gr
from conjcheck.strategies.urns import Urn


@st.composite
def drawing(draw, urn, highest=None):
    """An urn as a strategy."""
    return urn.draw(draw, highest=highest)


def urn_of(classes, balls):
    """An urn of classes, by length."""
    return Urn(classes, level=lambda u: u.length, balls=balls)


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(5)], ids=str)
def test_balls_are_proportions(drawn, X):
    """With few balls and with many: classes of index 0 modulo 3, with five balls, make up about 5/7 of the examples."""
    urn = urn_of(X.classes, [5 if u.index % 3 == 0 else 1 for u in X.classes])
    seen = Counter(u.index % 3 == 0 for u in drawn(drawing(urn), 300))
    if X is Fl(5):
        assert 0.6 < seen[True] / seen.total() < 0.8
    else:
        assert seen[True] == 10  # each ball once: Hypothesis knows when it has seen them all
        assert seen[False] == 4


def test_every_length_is_seen(drawn):
    """On ``Fl(6)`` the identity and the point, 2 classes of 720, are among 4,000 examples: each length has a ticket."""
    X = Fl(6)
    urn = urn_of(X.classes, [1] * len(X.classes))
    assert {u.length for u in drawn(drawing(urn), 4000)} == set(range(X.dim + 1))


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(5), Fl(6)], ids=str)
def test_it_shrinks_to_the_first_class_of_a_length(smallest, X):
    """To the identity, and with a bound on the length to the first class that satisfies it."""
    urn = urn_of(X.classes, [1 + u.index % 4 for u in X.classes])
    for length in range(X.dim + 1):
        assert smallest(drawing(urn), lambda u, length=length: u.length >= length) is X.of_length(length)[0]


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(5)], ids=str)
def test_highest_is_a_bound_and_reached(drawn, X):
    """Only classes up to that length, and some of that length."""
    urn = urn_of(X.classes, [3] * len(X.classes))
    for highest in (0, 1, X.dim - 1, X.dim, X.dim + 1):
        lengths = {u.length for u in drawn(drawing(urn, highest), 100)}
        assert max(lengths) == min(highest, X.dim)


def test_a_part_of_the_classes_is_enough(drawn):
    """An urn may leave classes and whole lengths out."""
    chosen = [u for u in Fl(6).classes if u.length % 2 and u.index % 2]
    assert len(set(drawn(drawing(urn_of(chosen, [2] * len(chosen))), 100))) > 50
    assert set(drawn(drawing(urn_of(chosen, [2] * len(chosen))), 100)) <= set(chosen)


def test_levels_come_first_if_asked(smallest):
    """With ``level_first`` the level falls while the place in it stays: 23 -> 13 -> 3 in tens and units."""
    urn = Urn(range(30), level=lambda x: x // 10, level_first=True)
    assert smallest(drawing(urn), lambda x: x % 10 == 3) == 3
    assert smallest(drawing(Urn(range(30), level=lambda x: x // 10)), lambda x: x >= 12) == 12
