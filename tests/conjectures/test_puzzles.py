"""The shared puzzle filler and the step labels."""

from collections import Counter
from itertools import product
from math import comb

import _puzzles
import pytest

from conjcheck import Fl


def turned_fits(triples, top, left, right):
    """Whether a triangle that points down carries a half turn of a piece."""
    return (right, left, top) in triples


def puzzles_of_size_two(triples, labels, northwest, northeast, bottom):
    """All labellings of the three inner edges of a triangle of side two, tried one by one."""
    low, high = northwest
    upper, lower = northeast
    return {
        ((top,), tuple(bottom))
        for top, left, right in product(labels, repeat=3)
        if (high, upper, top) in triples
        and (low, left, bottom[0]) in triples
        and (right, lower, bottom[1]) in triples
        and turned_fits(triples, top, left, right)
    }


def step_triples(d):
    """The up pieces, written from their definition."""
    triples = set()
    for label, halves in _puzzles.step_labels(d).items():
        x, y = halves or (label, label)
        triples |= {(x, y, label), (label, x, y), (y, label, x)}
    return triples


def test_number_of_labels():
    """There are 3, 8 and 23 labels for one, two and three steps; in general a bracketing for each set of digits."""
    assert [len(_puzzles.step_labels(d)) for d in (1, 2, 3)] == [3, 8, 23]
    for d in range(6):
        catalan = [comb(2 * s, s) // (s + 1) for s in range(d + 1)]
        assert len(_puzzles.step_labels(d)) == sum(comb(d + 1, s + 1) * catalan[s] for s in range(d + 1))


def test_two_step_labels_by_name():
    """The two-step labels are 0, 1, 2, 10, 20, 21, 2(10) and (21)0 (Buch, Kresch, Purbhoo, Tamvakis 2016)."""
    assert set(_puzzles.step_labels(2)) == {"0", "1", "2", "10", "20", "21", "2(10)", "(21)0"}


@pytest.mark.parametrize("d", [1, 2])
def test_filling_is_laying_pieces(d):
    """Every puzzle of side two with digits on its upper sides and on its bottom is found, and nothing else."""
    triples, labels, digits = step_triples(d), list(_puzzles.step_labels(d)), [str(i) for i in range(d + 1)]
    seen = Counter()
    for northwest in product(digits, repeat=2):
        for northeast in product(digits, repeat=2):
            found = _puzzles.step_pieces(d).fill(northwest, northeast)
            for bottom in product(digits, repeat=2):
                expected = puzzles_of_size_two(triples, labels, northwest, northeast, bottom)
                assert set(found.get(bottom, ())) == expected
                assert len(found.get(bottom, ())) == len(expected)
                seen[len(expected)] += 1
    assert seen[1] > 0 and seen[0] > 0


def test_puzzles_can_be_turned():
    """With rotations of all pieces, the puzzles for ``(u, v, w)`` are as many as for ``(v, w', u')``, sides read clockwise."""
    words = [tuple(w.string) for w in Fl(1, 3, n=5).classes]
    fill = _puzzles.step_pieces(2).fill
    for u in words:
        for v in words:
            for bottom, puzzles in fill(u, v).items():
                assert len(fill(v, bottom[::-1]).get(u[::-1], ())) == len(puzzles)


def test_a_puzzle_lists_its_horizontal_edges():
    """Row r of a puzzle has r + 1 labels; the last row is the bottom edge: ``sigma_1 * 1`` on the projective line."""
    assert _puzzles.step_pieces(1).fill("10", "01") == {("1", "0"): ((("0",), ("1", "0")),)}


def test_third_edge_is_determined():
    """A set of pieces in which two edges leave the third open is refused."""
    with pytest.raises(AssertionError):
        _puzzles.Pieces([("0", "1", "0"), ("0", "1", "1")], "01")
