"""Root systems, and cosets of the Weyl group as sets of roots: what the two Chevalley rules share (not a conjecture itself).

Everything follows from the Dynkin diagram (Bourbaki numbering) and the lengths of the simple roots. Roots are tuples of coefficients
in the simple roots. The coset ``u W_P`` is written as the set ``u(R+ - R_P+)`` of roots, which determines it since ``W_P`` is the
stabiliser of ``R+ - R_P+``; the length of its minimal representative is the number of negative roots in that set, for the minimal
representative leaves ``R_P+`` positive. So ``u s_alpha W_P`` and its length are read from ``u s_alpha (R+ - R_P+)`` alone.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from conjcheck import FlagVariety, SchubertClass

__all__ = ["Terms", "cartan", "chevalley_terms", "positive_roots"]

Root = tuple[int, ...]
Terms = dict[tuple[SchubertClass, tuple[int, ...]], int]


@lru_cache
def cartan(letter: str, rank: int) -> list[list[int]]:
    """The Cartan matrix ``C[i][j] = <alpha_i, alpha_j^vee>``, 0-based.

    >>> cartan("G", 2)
    [[2, -1], [-3, 2]]
    """
    bonds = {(i, i + 1) for i in range(rank - 1)}
    if letter == "D":
        bonds = bonds - {(rank - 2, rank - 1)} | {(rank - 3, rank - 1)}
    if letter == "E":
        bonds = bonds - {(0, 1), (1, 2)} | {(0, 2), (1, 3)}
    norms = _norms(letter, rank)

    def pairing(i: int, j: int) -> int:
        if i == j:
            return 2
        return -(max(norms[i], norms[j]) // norms[j]) if (min(i, j), max(i, j)) in bonds else 0

    return [[pairing(i, j) for j in range(rank)] for i in range(rank)]


def _norms(letter: str, rank: int) -> list[int]:
    """The squared lengths of the simple roots, the short ones 1."""
    special = {"B": [2] * (rank - 1) + [1], "C": [1] * (rank - 1) + [2], "F": [2, 2, 1, 1], "G": [1, 3]}
    return special.get(letter, [1] * rank)


@lru_cache
def positive_roots(letter: str, rank: int) -> dict[Root, Root]:
    """The positive roots, each with its coroot in simple coroots: ``alpha^vee = 2 alpha / (alpha, alpha)``."""
    matrix, norms = cartan(letter, rank), _norms(letter, rank)
    found = [tuple(int(i == j) for j in range(rank)) for i in range(rank)]
    for root in found:  # it grows meanwhile
        for j in range(rank):
            image = _reflect(root, j, matrix)
            if image[j] > root[j] and image not in found:
                found.append(image)
    result = {}
    for root in found:
        norm = sum(a * b * matrix[i][j] * norms[j] for i, a in enumerate(root) for j, b in enumerate(root)) // 2
        result[root] = tuple(a * size // norm for a, size in zip(root, norms, strict=True))
    return result


def _reflect(root: Root, j: int, matrix: Sequence[Sequence[int]]) -> Root:
    """``s_j root``, j 0-based."""
    return (*root[:j], root[j] - sum(a * row[j] for a, row in zip(root, matrix, strict=True)), *root[j + 1 :])


@dataclass(frozen=True, eq=False)
class _Step:
    """A positive root alpha outside the Levi.

    Attributes:
        coroot: ``alpha^vee`` in simple coroots.
        degree: ``d(alpha)``, the coordinates of ``alpha^vee`` at the marked nodes.
        cost: ``n_alpha``, the pairing of ``alpha^vee`` with the sum of ``R+ - R_P+``.
        images: the numbers of the roots ``s_alpha(gamma)``, gamma in ``R+ - R_P+``.
    """

    coroot: Root
    degree: tuple[int, ...]
    cost: int
    images: tuple[int, ...]


@dataclass(frozen=True, eq=False)
class _Cosets:
    """The cosets of a variety, each a set of roots, each set an integer: bit k stands for root number k, the positive ones first.

    Attributes:
        positive: the number of positive roots.
        steps: the roots outside the Levi.
        images: for each class u and each number k the bit of ``u(root k)``.
        classes: the class of each coset.
    """

    positive: int
    steps: list[_Step]
    images: dict[SchubertClass, list[int]]
    classes: dict[int, SchubertClass]


@lru_cache(maxsize=64)
def _cosets(X: FlagVariety) -> _Cosets:
    """The cosets of X, at the cost of applying one word per class to all roots."""
    matrix, coroots = cartan(X.kind.letter, X.rank), positive_roots(X.kind.letter, X.rank)
    roots = [*coroots, *(tuple(-a for a in root) for root in coroots)]
    number = {root: k for k, root in enumerate(roots)}
    outside = [root for root in coroots if any(root[i - 1] for i in X.marked)]
    steps = []
    for alpha in outside:
        coroot = coroots[alpha]
        shifts = [_pairing(gamma, coroot, matrix) for gamma in outside]
        moved = [
            tuple(a - shift * b for a, b in zip(gamma, alpha, strict=True)) for gamma, shift in zip(outside, shifts, strict=True)
        ]
        steps.append(_Step(coroot, tuple(coroot[i - 1] for i in X.marked), sum(shifts), tuple(number[root] for root in moved)))
    simple = [[number[_reflect(root, j, matrix)] for root in roots] for j in range(X.rank)]
    images, classes = {}, {}
    for u in X.classes:
        image = list(range(len(roots)))
        for j in reversed(u.word):
            image = [simple[j - 1][k] for k in image]
        images[u] = [1 << k for k in image]
        classes[sum(images[u][number[root]] for root in outside)] = u
    return _Cosets(len(coroots), steps, images, classes)


def _pairing(root: Root, coroot: Root, matrix: Sequence[Sequence[int]]) -> int:
    """``<root, coroot>``."""
    return sum(a * c * matrix[i][j] for i, a in enumerate(root) if a for j, c in enumerate(coroot) if c)


def chevalley_terms(X: FlagVariety, i: int, u: SchubertClass) -> Terms:
    """``sigma_{s_i} * sigma_u`` without equivariance, i a marked node: the formula of Fulton and Woodward, root by root.

    Each alpha leads to a class of its own, so no two terms have to be added.
    """
    cosets = _cosets(X)
    bits, found = cosets.images[u], {}
    for step in cosets.steps:
        if step.coroot[i - 1]:
            coset = sum(bits[k] for k in step.images)
            rise = (coset >> cosets.positive).bit_count() - u.length
            if rise == 1:
                found[cosets.classes[coset], (0,) * len(X.marked)] = step.coroot[i - 1]
            elif rise == 1 - step.cost:
                found[cosets.classes[coset], step.degree] = step.coroot[i - 1]
    return found
