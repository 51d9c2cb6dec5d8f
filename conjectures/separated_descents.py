"""Separated descents: products on complete flags whose factors have their descents on two sides of a place, classical ring.

On ``Fl(n)`` let every descent of v be at most k and every descent of u at least k. Write the inverse of u along the north-west
side with its values up to k blanked, and the inverse of v along the north-east side with its values above k blanked, both
clockwise. Then ``c_{u,v}^w`` is the number of triangular puzzles with these sides and the inverse of w along the bottom, from left
to right, laid with the pieces ``(NW, NE, S)``

    (i, _, i),  (_, i, i),  (j, i, ji)  for i < j

and their half turns, i and j from 1..n and ``_`` the blank. See ``_puzzles.py``.

Source: A. Knutson and P. Zinn-Justin, Schubert puzzles and integrability III: separated descents (2023). The list of pieces is
a reconstruction; it gives every product in the premise up to n = 6 (computed).
"""

from functools import cache

from _puzzles import Pieces, Puzzle

from conjcheck import CompleteFlags, FlagVariety, SchubertClass, candidate

__all__ = ["separated_descents"]

BLANK = "_"


@candidate(
    on=CompleteFlags(),
    ring="classical",
    premise=lambda X, u, v: max(v.descents, default=1) <= min(u.descents, default=X.n),
    statement=r"c_{u,v}^{w} = \#\{\text{separated-descent puzzles with boundary } u^{-1}|_{>k},\ v^{-1}|_{\le k},\ w^{-1}\},"
    r" \quad \mathrm{des}(v) \le k \le \mathrm{des}(u)",
    references=["A. Knutson, P. Zinn-Justin, Schubert puzzles and integrability III: separated descents, 2023"],
)
def separated_descents(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[SchubertClass, tuple[Puzzle, ...]]:
    """The puzzles over each class; a puzzle is the tuple of the labels on its horizontal edges, row by row."""
    k = max(v.descents, default=1)
    northwest = [BLANK if value <= k else str(value) for value in inverse(u.permutation)]
    northeast = [BLANK if value > k else str(value) for value in inverse(v.permutation)]
    return {
        X.schubert(permutation=inverse(tuple(map(int, bottom)))): puzzles
        for bottom, puzzles in pieces(X.n).fill(northwest, northeast).items()
    }


def inverse(w: tuple[int, ...]) -> tuple[int, ...]:
    """The inverse permutation, one-line."""
    return tuple(place for _, place in sorted(zip(w, range(1, len(w) + 1), strict=True)))


@cache
def pieces(n: int) -> Pieces:
    """The pieces with labels 1..n, the blank, and the pairs ji with i < j."""
    labels = [str(i) for i in range(1, n + 1)]
    triples = [(label, BLANK, label) for label in labels] + [(BLANK, label, label) for label in labels]
    triples += [(j, i, f"{j}.{i}") for place, j in enumerate(labels) for i in labels[:place]]
    return Pieces(triples, labels)
