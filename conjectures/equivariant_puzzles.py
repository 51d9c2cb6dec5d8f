"""Equivariant puzzles: equivariant constants of Grassmannians, as sums over puzzles of products of weights.

On ``Gr(k, n)`` write u, v, w as 01-strings. The puzzles have u on the north-west side, v on the north-east side, both read clockwise,
and w along the bottom from left to right. They are laid with the one-step pieces, ``(0, 0, 0)``, ``(1, 1, 1)`` and all rotations of
``(1, 0, 10)``, and one rhombus more that may not be turned: two triangles that share a horizontal edge, with 0 on its NW and SE side and
1 on its NE and SW side. With its upper triangle in row i (0-based, from the top), the j-th in it (0-based), the rhombus weighs
``y_{n-i+j} - y_{j+1} = alpha_{j+1} + ... + alpha_{n-i+j-1}``. The constant is the sum over the puzzles of the products of these
weights; without a rhombus it is the classical puzzle rule.

Here the rhombus is a piece like any other: its upper triangle ``(0, 1, e)``, e a label that occurs nowhere else, and the half turn of
that below. See ``_puzzles.py``. The rule is held to n up to 8: the numbers of puzzles and of monomials explode after that.

Source: A. Knutson and T. Tao, Puzzles and (equivariant) cohomology of Grassmannians, Duke Math. J. 119 (2003), 221-260.
"""

from collections import defaultdict
from collections.abc import Iterable, Sequence
from functools import cache, lru_cache

from _puzzles import Pieces, Puzzle, classes_by_string

from conjcheck import FlagVariety, Grassmannians, RootPolynomial, SchubertClass, candidate, simple_roots

__all__ = ["equivariant_puzzles"]

Place = tuple[int, int]


@candidate(
    on=Grassmannians().where(lambda X: X.n <= 8, words="n <= 8"),
    ring="equivariant",
    statement=r"c_{u,v}^{w} = \sum_{P} \prod_{\text{rhombi of } P} (y_{n-i+j} - y_{j+1}),"
    r" \quad P \text{ the equivariant puzzles with boundary } u, v, w",
    references=[
        "A. Knutson, T. Tao, Puzzles and (equivariant) cohomology of Grassmannians, Duke Math. J. 119 (2003), 221-260",
    ],
)
def equivariant_puzzles(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[SchubertClass, RootPolynomial]:
    """For each class the sum of the weights of its puzzles."""
    classes = classes_by_string(X)
    return {
        classes[bottom]: sum_of_weights(X, map(rhombi, puzzles))
        for bottom, puzzles in equivariant_pieces().fill(u.string, v.string).items()
    }


@cache
def equivariant_pieces() -> Pieces:
    """The one-step triangles and the two halves of the rhombus."""
    return Pieces(
        [("0", "0", "0"), ("1", "1", "1"), ("1", "0", "10"), ("0", "10", "1"), ("10", "1", "0"), ("0", "1", "e")], plain="01"
    )


def rhombi(puzzle: Puzzle) -> tuple[Place, ...]:
    """The places ``(i, j)`` of the rhombi of a puzzle, row by row."""
    return tuple((i, j) for i, floor in enumerate(puzzle) for j, label in enumerate(floor) if label == "e")


@lru_cache(maxsize=1024)
def weight(X: FlagVariety, place: Place) -> RootPolynomial:
    """The weight of a rhombus."""
    i, j = place
    return sum(simple_roots(X)[j : X.n - i + j - 1], start=constant(X, 0))


def sum_of_weights(X: FlagVariety, puzzles: Iterable[Sequence[Place]]) -> RootPolynomial:
    """The sum over puzzles of the products of the weights of their rhombi; those with the same first rhombus are added first."""
    groups: dict[Place, list[Sequence[Place]]] = defaultdict(list)
    plain = 0
    for places in puzzles:
        if places:
            groups[places[0]].append(places[1:])
        else:
            plain += 1
    return sum((weight(X, first) * sum_of_weights(X, rest) for first, rest in groups.items()), start=constant(X, plain))


def constant(X: FlagVariety, value: int) -> RootPolynomial:
    """An integer as a polynomial in the simple roots."""
    return RootPolynomial.of(X.rank, {(0,) * X.rank: value})
