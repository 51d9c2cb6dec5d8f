"""Horizontal strips, against the boxes themselves."""

from itertools import combinations, pairwise, product

import _strips

SHAPES = [tuple(reversed(parts)) for r in range(4) for parts in combinations(range(1, 6), r)]


def boxes(shape):
    """The boxes (row, column) of an unshifted diagram."""
    return {(row, column) for row, part in enumerate(shape) for column in range(part)}


def pad(shape):
    """Four rows."""
    return (*shape, *[0] * 4)[:4]


def number_of_pieces(strip):
    """The number of pieces of a set of boxes, which hold together along edges and at corners."""
    left, pieces = set(strip), 0
    while left:
        todo = [left.pop()]
        pieces += 1
        for row, column in todo:
            near = {(row + a, column + b) for a, b in product((-1, 0, 1), repeat=2)} & left
            left -= near
            todo += near
    return pieces


def is_strip(outer, inner):
    """Whether the boxes of the difference lie in different columns."""
    columns = [column for _, column in boxes(outer) - boxes(inner)]
    return boxes(inner) <= boxes(outer) and len(set(columns)) == len(columns)


def test_strips_interlace():
    """The horizontal strips on a strict partition are what interlaces with it."""
    for inner in SHAPES:
        low = pad(inner)
        for size in range(16):
            found = set(_strips.interlacing((5, *low[:-1]), low, size))
            expected = {outer for outer in product(range(6), repeat=4) if sum(outer) == size
                        and all(a >= b for a, b in pairwise(outer)) and is_strip(outer, inner)}  # fmt: skip
            assert found == expected


def test_components_are_pieces():
    """Components of a horizontal strip are counted like pieces of a set of boxes."""
    seen = set()
    for inner in SHAPES:
        for size in range(16):
            for outer in _strips.interlacing((5, *pad(inner)[:-1]), pad(inner), size):
                pieces = number_of_pieces(boxes(outer) - boxes(inner))
                assert _strips.components(outer, pad(inner)) == pieces
                seen.add(pieces)
    assert seen == {0, 1, 2, 3}


def test_strict():
    """A shape is strict if its positive parts are different."""
    for shape in product(range(4), repeat=3):
        if shape == tuple(sorted(shape, reverse=True)):
            positive = [part for part in shape if part]
            assert _strips.is_strict(shape) == (len(set(positive)) == len(positive))
