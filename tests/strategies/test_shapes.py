"""``permutations`` and ``partitions``."""

from itertools import combinations_with_replacement
from itertools import permutations as all_permutations

import pytest
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.notation import descents
from conjcheck.strategies import partitions, permutations


def inversions(w):
    """The length of a permutation."""
    return sum(a > b for i, a in enumerate(w) for b in w[i + 1 :])


def test_permutations_are_all_drawn_once(drawn):
    """Each permutation has one code: Hypothesis finds all 120 and then nothing new."""
    assert sorted(drawn(permutations(5), 1000)) == sorted(all_permutations(range(1, 6)))
    assert drawn(permutations(1)) == [(1,)]


@pytest.mark.parametrize("least", range(1, 11))
def test_permutations_shrink_to_the_shortest(smallest, least):
    """Of the permutations with at least so many inversions the result is the shortest, and the lexicographically first of those."""
    expected = min((w for w in all_permutations(range(1, 6)) if inversions(w) >= least), key=lambda w: (inversions(w), w))
    assert smallest(permutations(5), lambda w: inversions(w) >= least) == expected


def test_permutations_shrink_to_the_identity(smallest):
    """With nothing against it; with a descent wanted at a place, to the simple transposition there."""
    assert smallest(permutations(6)) == (1, 2, 3, 4, 5, 6)
    for i in range(1, 6):
        simple = [1, 2, 3, 4, 5, 6]
        simple[i - 1], simple[i] = simple[i], simple[i - 1]
        assert smallest(permutations(6), lambda w, i=i: i in descents(w)) == tuple(simple)


def test_partitions_are_those_of_the_box(drawn):
    """All 20 partitions inside 3 rows and 3 columns occur, as tuples without trailing zeros, and no other."""
    box = {tuple(sorted((part for part in parts if part), reverse=True)) for parts in combinations_with_replacement(range(4), 3)}
    assert len(box) == 20
    assert set(drawn(partitions(3, 3), 500)) == box
    assert drawn(partitions(0, 3)) == [()]
    assert drawn(partitions(3, 0)) == [()]


@pytest.mark.parametrize(
    ("condition", "expected"),
    [
        (lambda shape: True, ()),
        (lambda shape: len(shape) >= 2, (1, 1)),
        (lambda shape: sum(shape) >= 4, (4,)),
        (lambda shape: sum(shape) >= 7, (4, 3)),
        (lambda shape: len(shape) == 3 and shape[1] >= 2, (2, 2, 1)),
        (lambda shape: len(set(shape)) == 3, (3, 2, 1)),
    ],
)
def test_partitions_shrink_to_the_smallest(smallest, condition, expected):
    """In the box of 3 rows and 4 columns, to the fewest boxes that satisfy the condition."""
    assert smallest(partitions(3, 4), condition) == expected


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: permutations(0), "expected an integer of 1 or more for n, got n=0"),
        (lambda: permutations("3"), r"for n, got n='3' \(str\)"),
        (lambda: partitions(-1, 2), "expected an integer of 0 or more for k, got k=-1"),
        (lambda: partitions(2, None), r"for m, got m=None \(NoneType\)"),
    ],
)
def test_wrong_arguments_are_refused_at_once(make, message):
    """The error names the argument."""
    with pytest.raises(InvalidArgument, match=message):
        make()
