"""Root systems, and cosets of the Weyl group as sets of roots: what the two Chevalley rules share (not a conjecture itself).

Everything follows from the Dynkin diagram (Bourbaki numbering) and the lengths of the simple roots. Roots are tuples of coefficients
in the simple roots. The coset ``u W_P`` is written as the set ``u(R+ - R_P+)`` of roots, which determines it since ``W_P`` is the
stabiliser of ``R+ - R_P+``; the length of its minimal representative is the number of negative roots in that set, for the minimal
representative leaves ``R_P+`` positive. So ``u s_alpha W_P`` and its length are read from ``u s_alpha (R+ - R_P+)`` alone.
"""

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
    for root in found:  # grows meanwhile
        for j in range(rank):
            image = _reflect(root, j, matrix)
            if image[j] > root[j] and image not in found:
                found.append(image)
    result = {}
    for root in found:
        norm = sum(a * b * matrix[i][j] * norms[j] for i, a in enumerate(root) for j, b in enumerate(root)) // 2
        result[root] = tuple(a * size // norm for a, size in zip(root, norms, strict=True))
    return result


def _reflect(root: Root, j: int, matrix: list[list[int]]) -> Root:
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


@lru_cache(maxsize=64)
def _cosets(X: FlagVariety) -> tuple[int, list[_Step], dict[SchubertClass, list[int]], dict[int, SchubertClass]]:
    """What a product on X needs; sets of roots are integers, bit k for the root of number k, negative roots last.

    Returns the number of positive roots; the steps; for each class u and each root beta the bit of ``u(beta)``; the class of each coset.
    """
    letter, rank = X.kind.letter, X.rank
    matrix, coroots = cartan(letter, rank), positive_roots(letter, rank)
    roots = [*coroots, *(tuple(-a for a in root) for root in coroots)]
    number = {root: k for k, root in enumerate(roots)}
    outside = [root for root in coroots if any(root[i - 1] for i in X.marked)]

    def pair(root: Root, coroot: Root) -> int:
        return sum(a * matrix[i][j] * c for i, a in enumerate(root) if a for j, c in enumerate(coroot) if c)

    steps = []
    for alpha in outside:
        coroot = coroots[alpha]
        shifts = [pair(gamma, coroot) for gamma in outside]
        moved = [
            tuple(a - shift * b for a, b in zip(gamma, alpha, strict=True)) for gamma, shift in zip(outside, shifts, strict=True)
        ]
        degree = tuple(coroot[i - 1] for i in X.marked)
        steps.append(_Step(coroot, degree, sum(shifts), tuple(number[root] for root in moved)))

    simple = [[number[_reflect(root, j, matrix)] for root in roots] for j in range(rank)]
    images, classes = {}, {}
    for u in X.classes:
        image = list(range(len(roots)))
        for letter_ in reversed(u.word):
            image = [simple[letter_ - 1][k] for k in image]
        images[u] = [1 << k for k in image]
        classes[sum(images[u][number[root]] for root in outside)] = u
    return len(coroots), steps, images, classes


def chevalley_terms(X: FlagVariety, i: int, u: SchubertClass) -> Terms:
    """``sigma_{s_i} * sigma_u`` in the quantum ring, i a marked node: Fulton and Woodward's formula, term by term."""
    positive, steps, images, classes = _cosets(X)
    bits, none = images[u], (0,) * len(X.marked)
    found = {}
    for step in steps:
        if step.coroot[i - 1]:
            coset = sum(bits[k] for k in step.images)
            rise = (coset >> positive).bit_count() - u.length
            if rise == 1:
                found[classes[coset], none] = step.coroot[i - 1]
            elif rise == 1 - step.cost:
                found[classes[coset], step.degree] = step.coroot[i - 1]
    return found
