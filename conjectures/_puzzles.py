"""Triangular puzzles, laid a row at a time: what the puzzle rules in this folder share (not a conjecture itself).

A puzzle of size n is a triangle of side n cut into unit triangles, every edge labelled. Row r (0-based, from the top) has r + 1
triangles that point up, with edges ``(NW, NE, S)``, and between them r that point down: half turns of the same pieces, so a
piece ``(NW, NE, S)`` turned has its S on top, its NE on the left and its NW on the right. The upper sides are read clockwise,
from the lower left corner to the top (NW) and on to the lower right corner (NE); the bottom is read from left to right.

A puzzle is given by the labels of its horizontal edges: a tuple of rows from the top, left to right. They determine the rest,
because in every set of pieces used here two edges of a piece determine the third.
"""

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from functools import cache, lru_cache

from conjcheck import FlagVariety, SchubertClass

__all__ = ["Label", "Pieces", "Puzzle", "classes_by_string", "step_labels", "step_pieces"]

Label = str
Floor = tuple[Label, ...]
Puzzle = tuple[Floor, ...]
Piece = tuple[Label, Label, Label]
Moves = Mapping[tuple[Label, Label], Sequence[tuple[Label, Label]]]


class Pieces:
    """A set of pieces, and the puzzles that can be laid with them.

    Args:
        pieces: the triangles that point up, as ``(NW, NE, S)``; two entries must determine the third.
        plain: the labels allowed along the bottom of a whole puzzle.
    """

    def __init__(self, pieces: Iterable[Piece], plain: Iterable[Label]) -> None:
        up, allowed = set(pieces), set(plain)
        assert all(len({(piece[i], piece[j]) for piece in up}) == len(up) for i, j in ((0, 1), (1, 2), (0, 2)))
        by_right = defaultdict(list)
        for left, right, below in up:
            by_right[right].append((left, below))
        # A triangle and the turned one after it: from their outer edges (NW, top) to (S, NW of the triangle that follows).
        moves: dict[tuple[Label, Label], list[tuple[Label, Label]]] = defaultdict(list)
        for left, right, below in sorted(up):
            for onward, above in by_right[right]:
                moves[left, above].append((below, onward))
        ends = {(left, right): below for left, right, below in up}
        self._inner = (moves, ends)
        self._lowest = (
            {key: [move for move in found if move[0] in allowed] for key, found in moves.items()},
            {key: below for key, below in ends.items() if below in allowed},
        )
        self._floors = lru_cache(maxsize=1 << 18)(self._lay_row)
        self._levels = lru_cache(maxsize=1 << 14)(self._lay_rows)

    def fill(self, northwest: Iterable[Label], northeast: Iterable[Label]) -> dict[Floor, tuple[Puzzle, ...]]:
        """All puzzles with the given upper sides, grouped by their bottom edge (plain labels only).

        Cost: proportional to the partial fillings, a row at a time; what two calls have in common is laid once.
        """
        levels = self._levels(tuple(northwest), tuple(northeast), True)
        return {bottom: tuple(_puzzles(levels, len(levels) - 1, bottom)) for bottom in levels[-1]}

    def _lay_rows(self, northwest: Floor, northeast: Floor, lowest: bool) -> tuple[dict[Floor, list[Floor]], ...]:
        """For each row from the top (before it, the empty one): its possible floors, each with its possible ceilings."""
        above = self._levels(northwest[1:], northeast[:-1], False) if len(northwest) > 1 else ({(): []},)
        floors: dict[Floor, list[Floor]] = {}
        for ceiling in above[-1]:
            for floor in self._floors(northwest[0], ceiling, northeast[-1], lowest):
                floors.setdefault(floor, []).append(ceiling)
        return (*above, floors)

    def _lay_row(self, left: Label, ceiling: Floor, right: Label, lowest: bool) -> list[Floor]:
        """All floors of a row with the given left end, ceiling and right end; each belongs to one filling."""
        moves, ends = self._lowest if lowest else self._inner
        if not ceiling:
            return [(ends[left, right],)] if (left, right) in ends else []
        return [
            (below, *rest)
            for below, onward in moves.get((left, ceiling[0]), ())
            for rest in self._floors(onward, ceiling[1:], right, lowest)
        ]


def _puzzles(levels: Sequence[Mapping[Floor, Sequence[Floor]]], row: int, floor: Floor) -> list[Puzzle]:
    """All ways down to one floor."""
    if row == 0:
        return [()]
    return [(*before, floor) for ceiling in levels[row][floor] for before in _puzzles(levels, row - 1, ceiling)]


@cache
def step_labels(d: int) -> dict[Label, tuple[Label, Label] | None]:
    """The labels of d-step puzzles: the digits 0..d, and XY whenever every digit of X exceeds every digit of Y.

    Returns each label with its halves X and Y, ``None`` for a digit; halves of two digits or more are put in brackets.

    >>> list(step_labels(2))
    ['0', '1', '2', '10', '20', '21', '2(10)', '(21)0']
    """
    labels: dict[Label, tuple[Label, Label] | None] = {str(digit): None for digit in range(d + 1)}
    digits = {label: label for label in labels}
    for size in range(2, d + 2):
        for x in list(labels):
            for y in list(labels):
                if len(digits[x]) + len(digits[y]) == size and min(digits[x]) > max(digits[y]):
                    label = "".join(half if len(half) == 1 else f"({half})" for half in (x, y))
                    labels[label] = (x, y)
                    digits[label] = digits[x] + digits[y]
    return labels


@cache
def step_pieces(d: int) -> Pieces:
    """The d-step pieces: clockwise from the NW edge ``(i, i, i)`` for each digit, and all rotations of ``(X, Y, XY)``."""
    triples = []
    for label, halves in step_labels(d).items():
        if halves is None:
            triples.append((label, label, label))
        else:
            x, y = halves
            triples += [(x, y, label), (label, x, y), (y, label, x)]
    return Pieces(triples, map(str, range(d + 1)))


@cache
def classes_by_string(X: FlagVariety) -> dict[Floor, SchubertClass]:
    """The classes of X, by their 01..m-strings taken letter by letter."""
    return {tuple(w.string): w for w in X.classes}
