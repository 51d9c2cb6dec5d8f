"""Equivariant puzzles: equivariant constants of Grassmannians, as sums over puzzles of products of weights.

On ``Gr(k, n)`` write u, v, w as 01-strings. The puzzles have u on the north-west side, v on the north-east side, both read clockwise,
and w along the bottom from left to right. They are laid with the one-step pieces, ``(0, 0, 0)``, ``(1, 1, 1)`` and all rotations of
``(1, 0, 10)``, and one rhombus more that may not be turned: two triangles that share a horizontal edge, with 0 on its NW and SE side and
1 on its NE and SW side. With its upper triangle in row i (0-based, from the top), the j-th in it (0-based), the rhombus weighs
``y_{n-i+j} - y_{j+1} = alpha_{j+1} + ... + alpha_{n-i+j-1}``. The constant is the sum over the puzzles of the products of these
weights; without a rhombus it is the classical puzzle rule.

Here the rhombus is a piece like any other: its upper triangle ``(0, 1, e)``, e a label that occurs nowhere else, and the half turn of
that below. See ``_puzzles.py``.

Source: A. Knutson and T. Tao, Puzzles and (equivariant) cohomology of Grassmannians, Duke Math. J. 119 (2003), 221-260.
"""

from collections import Counter
from collections.abc import Iterable
from functools import cache, lru_cache

from _puzzles import Pieces, Puzzle, classes_by_string

from conjcheck import FlagVariety, Grassmannians, RootPolynomial, SchubertClass, candidate, simple_roots

__all__ = ["equivariant_puzzles"]


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
        classes[bottom]: total(weight(X, rhombi(puzzle)) for puzzle in puzzles)
        for bottom, puzzles in equivariant_pieces().fill(u.string, v.string).items()
    }


@cache
def equivariant_pieces() -> Pieces:
    """The one-step triangles and the two halves of the rhombus."""
    return Pieces(
        [("0", "0", "0"), ("1", "1", "1"), ("1", "0", "10"), ("0", "10", "1"), ("10", "1", "0"), ("0", "1", "e")], plain="01"
    )


def rhombi(puzzle: Puzzle) -> tuple[tuple[int, int], ...]:
    """The places ``(i, j)`` of the rhombi of a puzzle."""
    return tuple((i, j) for i, floor in enumerate(puzzle) for j, label in enumerate(floor) if label == "e")


@lru_cache(maxsize=65536)
def weight(X: FlagVariety, places: tuple[tuple[int, int], ...]) -> RootPolynomial:
    """The product of the weights of rhombi."""
    alpha = simple_roots(X)
    if not places:
        return alpha[0] ** 0
    *others, (i, j) = places
    return weight(X, tuple(others)) * sum(alpha[j : X.n - i + j - 1])


def total(polynomials: Iterable[RootPolynomial]) -> RootPolynomial:
    """The sum of one polynomial or more, term by term."""
    first, *others = polynomials
    terms = Counter(dict(first.terms))
    for other in others:
        for exponents, coefficient in other.terms:
            terms[exponents] += coefficient
    return RootPolynomial.of(first.rank, terms)
