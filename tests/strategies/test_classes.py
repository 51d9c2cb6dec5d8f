"""``schubert_classes``: exactly the classes asked for, the first of them in the end."""

from itertools import chain, combinations

import numpy as np
import pytest
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.strategies import schubert_classes
from conjcheck.strategies.patterns import contains

SPACES = [Gr(2, 5), Fl(4), Fl(1, 3, n=4), Fl(1, 2, n=5), FlagVariety("B3/P1,3")]


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_all_classes_are_drawn_and_the_first_in_the_end(X, drawn, smallest):
    """Without restriction each class occurs; shrinking ends at the identity, or at the first class of a length."""
    assert set(drawn(schubert_classes(X), 200)) == set(X.classes)
    assert smallest(schubert_classes(X)) is X.identity
    for length in range(X.dim + 1):
        assert smallest(schubert_classes(X), lambda u, length=length: u.length >= length) is X.of_length(length)[0]


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_restrictions_mean_what_they_say(X, drawn, smallest):
    """Grassmannian, at a node, by descents: the same classes as by going through all of them, and the first of them in the end."""

    def holds(strategy, wanted):
        expected = [u for u in X.classes if wanted(u)]
        assert set(drawn(strategy, 500)) == set(expected)
        assert smallest(strategy) is expected[0]

    holds(schubert_classes(X, grassmannian=True), lambda u: len(u.descents) < 2)
    for k in X.marked:
        holds(schubert_classes(X, grassmannian=True, at=k), lambda u, k=k: set(u.descents) <= {k})
    for nodes in chain.from_iterable(combinations(X.marked, size) for size in range(len(X.marked) + 1)):
        holds(schubert_classes(X, descents=set(nodes)), lambda u, nodes=nodes: u.descents == nodes)


def test_patterns_are_avoided(drawn, smallest):
    """One pattern or several; restrictions add up; a pattern longer than the permutations forbids nothing."""
    X = Fl(5)

    def avoids(u, *patterns):
        line = np.array([u.permutation])
        return not any(contains(line, pattern)[0] for pattern in patterns)

    assert set(drawn(schubert_classes(X, avoiding=(1, 3, 2)), 500)) == {u for u in X.classes if avoids(u, (1, 3, 2))}
    both = schubert_classes(X, avoiding=[(2, 1, 4, 3), (1, 3, 2)], descents=[2])
    expected = [u for u in X.classes if avoids(u, (2, 1, 4, 3), (1, 3, 2)) and u.descents == (2,)]
    assert set(drawn(both, 500)) == set(expected)
    assert smallest(both) is expected[0]
    assert set(drawn(schubert_classes(Gr(1, 3), avoiding=(4, 3, 2, 1)))) == set(Gr(1, 3).classes)


def test_large_varieties_are_drawn_from_evenly(drawn):
    """``Fl(8)`` with 40,320 classes: about half of the examples lie in the upper half of the order."""
    X = Fl(8)
    assert len(X.classes) == 40_320
    examples = drawn(schubert_classes(X), 150)
    assert 0.3 < np.mean([u.index >= 20_160 for u in examples]) < 0.7
    assert max(len(u.descents) for u in drawn(schubert_classes(X, grassmannian=True), 50)) == 1
    assert len(set(drawn(schubert_classes(X, avoiding=(1, 3, 2)), 50))) > 30


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"X": "Gr(2,4)"}, r"expected a flag variety for X, got X='Gr\(2,4\)'; write Gr\(2, 4\)"),
        ({"grassmannian": 1}, "expected True or False for grassmannian, got grassmannian=1; a node goes into at="),
        ({"at": 1}, "expected at= only together with grassmannian=True, got at=1"),
        ({"grassmannian": True, "at": 2}, r"expected one of the marked nodes \(1, 3\) of Fl\(1,3;4\) for at, got at=2"),
        ({"descents": 1}, r"expected a sequence of integers for descents, got descents=1"),
        ({"descents": (1, 2)}, r"expected marked nodes of Fl\(1,3;4\), some of \(1, 3\), for descents, got 2 in descents=\(1, 2\)"),
        ({"avoiding": "132"}, r"expected a pattern such as \(1, 3, 2\), or a list of them, for avoiding, got avoiding='132'"),
        ({"avoiding": (1, 3)}, r"expected a pattern to be a permutation of 1..k in one-line notation, got \(1, 3\)"),
        ({"avoiding": [(1, 2), 3]}, "got a mixture"),
        ({"avoiding": [()]}, r"expected a pattern to be a permutation of 1..k in one-line notation, got \(\)"),
        ({"avoiding": [("a", "b")]}, "expected integers in avoiding, got entry 1 = 'a'"),
        ({"X": FlagVariety("G2/B"), "avoiding": (2, 1)}, "expected a variety of type A together with avoiding=, got G2/B"),
        ({"avoiding": (2, 1), "descents": (1,)}, r"expected restrictions that some class of Fl\(1,3;4\) satisfies, got none"),
    ],
)
def test_wrong_arguments_are_refused_at_once(arguments, message):
    """The error names the argument and what it should be."""
    with pytest.raises(InvalidArgument, match=message):
        schubert_classes(**{"X": Fl(1, 3, n=4), **arguments})
