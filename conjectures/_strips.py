"""Horizontal strips: what the two isotropic Pieri rules share (not a conjecture itself).

Shapes are tuples of falling parts, zeros allowed at the end, drawn unshifted: row i has ``part_i`` boxes. A skew shape is a horizontal
strip if no two of its boxes lie in one column: the parts of its two shapes interlace. A shape is strict if no positive part occurs twice.
"""

from collections.abc import Iterator, Sequence
from itertools import pairwise

__all__ = ["components", "interlacing", "is_strict"]

Shape = tuple[int, ...]


def interlacing(above: Sequence[int], below: Sequence[int], size: int) -> Iterator[Shape]:
    """All integer tuples of a given sum between two bounds, entry by entry."""
    if not above:
        if size == 0:
            yield ()
        return
    for part in range(max(below[0], size - sum(above[1:])), min(above[0], size - sum(below[1:])) + 1):
        for rest in interlacing(above[1:], below[1:], size - part):
            yield (part, *rest)


def is_strict(shape: Sequence[int]) -> bool:
    """Whether no positive part occurs twice.

    >>> is_strict((3, 1, 0, 0)), is_strict((3, 3))
    (True, False)
    """
    return all(part > following for part, following in pairwise(shape) if part)


def components(outer: Sequence[int], inner: Sequence[int]) -> int:
    """The number of connected components of a horizontal strip; boxes that touch at a corner are connected.

    The inner shape must be strict, else a corner could be passed by an empty row.

    >>> components((4, 2, 1), (2, 1, 0)), components((4, 1), (2, 0))
    (1, 2)
    """
    pieces = [(left, right) for left, right in zip(inner, outer, strict=True) if left < right]  # columns left + 1 to right
    return len(pieces) - sum(left == right for (left, _), (_, right) in pairwise(pieces))
