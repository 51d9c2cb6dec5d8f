"""Cartan types: Cartan matrices, roots, coroots, diagram automorphisms. Integers only, no class per type.

Conventions: Bourbaki numbering of the nodes, 1..rank, in everything a caller sees; row and column ``i - 1`` of a matrix
belongs to node ``i``. Cartan matrix ``C[i, j] = <alpha_i, alpha_j^vee>``. Roots are tuples of coefficients in the simple
roots, coroots tuples of coefficients in the simple coroots, weights tuples of coefficients in the fundamental weights.
"""

from dataclasses import dataclass
from functools import lru_cache

from conjcheck.errors import NotationError, OutOfReach

__all__ = [
    "LARGEST_RANK",
    "CartanType",
    "automorphisms",
    "cartan_matrix",
    "cominuscule_nodes",
    "opposition",
    "positive_roots",
]

Vector = tuple[int, ...]

LARGEST_RANK = 200
"""All positive roots are listed, about ``rank^2`` tuples of that length: beyond this rank it would only take memory."""

_SMALLEST_RANK = {"A": 1, "B": 2, "C": 2, "D": 4, "E": 6, "F": 4, "G": 2}
_LARGEST_RANK = {"E": 8, "F": 4, "G": 2}


@dataclass(frozen=True, slots=True, order=True)
class CartanType:
    """An irreducible Cartan type, such as ``CartanType("A", 3)``.

    Raises:
        NotationError: no such type; ``B`` and ``C`` start at rank 2, ``D`` at rank 4.
        OutOfReach: a rank above ``LARGEST_RANK``.
    """

    letter: str
    rank: int

    def __post_init__(self) -> None:
        if type(self.rank) is not int:
            raise NotationError(f"expected an int for the rank, got rank={self.rank!r}")
        low = _SMALLEST_RANK.get(self.letter)
        if low is None:
            raise NotationError(f"expected a Cartan letter A, B, C, D, E, F or G, got letter={self.letter!r}")
        high = _LARGEST_RANK.get(self.letter)
        if self.rank > LARGEST_RANK:
            raise OutOfReach(f"expected a rank of at most {LARGEST_RANK}, got rank={self.rank}")
        if self.rank < low or (high is not None and self.rank > high):
            span = f"from {low} to {high}" if high else f"of {low} or more"
            raise NotationError(f"expected a rank {span} for type {self.letter}, got rank={self.rank}")

    def __str__(self) -> str:
        return f"{self.letter}{self.rank}"


def _edges(kind: CartanType) -> list[tuple[int, int, int, int]]:
    """Edges ``(i, j, C[i, j], C[j, i])`` of the Dynkin diagram, nodes 1-based."""
    r = kind.rank
    chain = [(i, i + 1, -1, -1) for i in range(1, r)]
    match kind.letter:
        case "B":
            chain[-1] = (r - 1, r, -2, -1)
        case "C":
            chain[-1] = (r - 1, r, -1, -2)
        case "D":
            chain[-1] = (r - 2, r, -1, -1)
        case "E":
            chain = [(1, 3, -1, -1), (2, 4, -1, -1)] + [(i, i + 1, -1, -1) for i in range(3, r)]
        case "F":
            chain[1] = (2, 3, -2, -1)
        case "G":
            chain[0] = (1, 2, -1, -3)
    return chain


@lru_cache
def cartan_matrix(kind: CartanType) -> tuple[Vector, ...]:
    """The Cartan matrix ``C[i, j] = <alpha_i, alpha_j^vee>``; row i is ``alpha_i`` in fundamental weights.

    >>> cartan_matrix(CartanType("G", 2))
    ((2, -1), (-3, 2))

    Source: Bourbaki, Groupes et algebres de Lie, ch. 4-6 (1968), plates I-IX.
    """
    rows = [[2 * (i == j) for j in range(kind.rank)] for i in range(kind.rank)]
    for i, j, there, back in _edges(kind):
        rows[i - 1][j - 1], rows[j - 1][i - 1] = there, back
    return tuple(map(tuple, rows))


@lru_cache
def positive_roots(kind: CartanType) -> tuple[tuple[Vector, Vector], ...]:
    """All pairs ``(alpha, alpha^vee)`` of a positive root and its coroot, by height, then lexicographically.

    >>> positive_roots(CartanType("B", 2))
    (((0, 1), (0, 1)), ((1, 0), (1, 0)), ((1, 1), (2, 1)), ((1, 2), (1, 1)))
    """
    matrix, r = cartan_matrix(kind), kind.rank
    near = [[i for i in range(r) if matrix[i][j]] for j in range(r)]
    units = [tuple(int(i == j) for j in range(r)) for i in range(r)]
    found = {unit: unit for unit in units}
    todo = list(found)
    for root in todo:
        coroot = found[root]
        for j in range(r):
            down = sum(root[i] * matrix[i][j] for i in near[j])
            if down >= 0:
                continue
            image = (*root[:j], root[j] - down, *root[j + 1 :])
            if image not in found:
                codown = sum(coroot[i] * matrix[j][i] for i in near[j])
                found[image] = (*coroot[:j], coroot[j] - codown, *coroot[j + 1 :])
                todo.append(image)
    return tuple(sorted(found.items(), key=lambda pair: (sum(pair[0]), pair[0])))


@lru_cache
def automorphisms(kind: CartanType) -> tuple[Vector, ...]:
    """Diagram automorphisms, each a tuple whose entry ``i - 1`` is the image of node ``i``; the identity first.

    >>> automorphisms(CartanType("A", 3))
    ((1, 2, 3), (3, 2, 1))
    """
    matrix, r = cartan_matrix(kind), kind.rank
    near = [[j for j in range(r) if matrix[i][j] and i != j] for i in range(r)]
    partial: list[Vector] = [()]
    for i in range(r):
        before = next((j for j in near[i] if j < i), None)
        partial = [
            (*images, x)
            for images in partial
            for x in (range(r) if before is None else near[images[before]])
            if x not in images and all(matrix[x][y] == matrix[i][j] and matrix[y][x] == matrix[j][i] for j, y in enumerate(images))
        ]
    return tuple(tuple(x + 1 for x in images) for images in partial)


@lru_cache
def opposition(kind: CartanType) -> Vector:
    """The diagram automorphism ``i -> i*`` with ``w0 omega_i = -omega_{i*}`` (entry ``i - 1`` is ``i*``).

    >>> opposition(CartanType("A", 3))
    (3, 2, 1)
    """
    r = kind.rank
    if kind.letter == "A" or str(kind) == "E6" or (kind.letter == "D" and r % 2):
        return automorphisms(kind)[-1]
    return tuple(range(1, r + 1))


@lru_cache
def cominuscule_nodes(kind: CartanType) -> Vector:
    """The nodes whose simple root has coefficient 1 in the highest root.

    >>> cominuscule_nodes(CartanType("A", 3)), cominuscule_nodes(CartanType("C", 3))
    ((1, 2, 3), (3,))
    """
    highest = positive_roots(kind)[-1][0]
    return tuple(i + 1 for i, a in enumerate(highest) if a == 1)
