"""Cartan types against Bourbaki's plates and sympy."""

import pytest
import sympy
from sympy.liealgebras.cartan_matrix import CartanMatrix

from conjcheck.errors import NotationError, OutOfReach
from conjcheck.geometry.cartan import (
    LARGEST_RANK,
    CartanType,
    automorphisms,
    cartan_matrix,
    cominuscule_nodes,
    opposition,
    positive_roots,
)

NAMES = ["A1", "A2", "A3", "A4", "A7", "B2", "B3", "B4", "C2", "C3", "C4", "D4", "D5", "D6", "E6", "E7", "E8", "F4", "G2"]

# Bourbaki, Groupes et algebres de Lie, ch. 4-6, plates I-IX; from memory.
NUMBER_OF_POSITIVE_ROOTS = {
    "A": lambda r: r * (r + 1) // 2,
    "B": lambda r: r * r,
    "C": lambda r: r * r,
    "D": lambda r: r * (r - 1),
    "E": {6: 36, 7: 63, 8: 120}.__getitem__,
    "F": {4: 24}.__getitem__,
    "G": {2: 6}.__getitem__,
}
HIGHEST_ROOT = {
    "A4": (1, 1, 1, 1),
    "B4": (1, 2, 2, 2),
    "C4": (2, 2, 2, 1),
    "D6": (1, 2, 2, 2, 1, 1),
    "E6": (1, 2, 2, 3, 2, 1),
    "E7": (2, 2, 3, 4, 3, 2, 1),
    "E8": (2, 3, 4, 6, 5, 4, 3, 2),
    "F4": (2, 3, 4, 2),
    "G2": (3, 2),
}
DETERMINANT = {
    "A": lambda r: r + 1,
    "B": lambda r: 2,
    "C": lambda r: 2,
    "D": lambda r: 4,
    "E": lambda r: 9 - r,
    "F": lambda r: 1,
    "G": lambda r: 1,
}


def kind_of(name):
    return CartanType(name[0], int(name[1:]))


def pairing(kind, root, coroot):
    """``<root, coroot>`` from coefficients in simple roots and simple coroots."""
    matrix = cartan_matrix(kind)
    return sum(a * matrix[i][j] * c for i, a in enumerate(root) for j, c in enumerate(coroot))


@pytest.mark.parametrize("name", [name for name in NAMES if name not in ("A1", "C2")])
def test_cartan_matrix_is_the_one_of_sympy(name):
    """``C[i, j] = <alpha_i, alpha_j^vee>`` in Bourbaki numbering, as in sympy's tables (which start at A2 and C3)."""
    assert sympy.Matrix(cartan_matrix(kind_of(name))) == CartanMatrix(name)


def test_short_roots_stand_where_bourbaki_puts_them():
    """``alpha_r`` is short in B, long in C; ``alpha_1`` is short in G2; ``alpha_3, alpha_4`` are short in F4."""
    assert cartan_matrix(CartanType("B", 3))[1][2] == -2
    assert cartan_matrix(CartanType("C", 3))[2][1] == -2
    assert cartan_matrix(CartanType("G", 2))[1][0] == -3
    assert cartan_matrix(CartanType("F", 4))[1][2] == -2


@pytest.mark.parametrize("name", NAMES)
def test_determinant_of_the_cartan_matrix(name):
    """The determinant is the index of the root lattice in the weight lattice, as tabulated by Bourbaki."""
    kind = kind_of(name)
    assert sympy.Matrix(cartan_matrix(kind)).det() == DETERMINANT[kind.letter](kind.rank)


@pytest.mark.parametrize("name", NAMES)
def test_number_of_positive_roots(name):
    """The number of positive roots is Bourbaki's."""
    kind = kind_of(name)
    assert len(positive_roots(kind)) == NUMBER_OF_POSITIVE_ROOTS[kind.letter](kind.rank)


@pytest.mark.parametrize("name", sorted(HIGHEST_ROOT))
def test_highest_root_comes_last(name):
    """The last positive root is Bourbaki's highest root."""
    assert positive_roots(kind_of(name))[-1][0] == HIGHEST_ROOT[name]


@pytest.mark.parametrize("name", NAMES)
def test_positive_roots_are_sorted_and_paired_with_their_coroots(name):
    """Roots come by height, then lexicographically; ``<alpha, alpha^vee> = 2``; coroots are the positive roots of the dual type."""
    kind = kind_of(name)
    pairs = positive_roots(kind)
    roots = [root for root, _ in pairs]
    assert roots == sorted(set(roots), key=lambda root: (sum(root), root))
    assert all(pairing(kind, root, coroot) == 2 for root, coroot in pairs)
    if kind.letter in "BC" and kind.rank > 2:
        dual = CartanType({"B": "C", "C": "B"}[kind.letter], kind.rank)
        assert sorted(coroot for _, coroot in pairs) == sorted(root for root, _ in positive_roots(dual))


@pytest.mark.parametrize("name", ["A4", "B3", "C3", "D5", "F4", "G2"])
def test_every_reflection_permutes_the_roots(name):
    """``s_alpha(beta) = beta - <beta, alpha^vee> alpha`` is again a root, and its coroot is the reflected coroot."""
    kind = kind_of(name)
    coroot_of = {}
    for root, coroot in positive_roots(kind):
        coroot_of[root] = coroot
        coroot_of[tuple(-x for x in root)] = tuple(-x for x in coroot)
    for alpha, alpha_vee in positive_roots(kind):
        for beta, beta_vee in coroot_of.items():
            down, codown = pairing(kind, beta, alpha_vee), pairing(kind, alpha, beta_vee)
            image = tuple(b - down * a for a, b in zip(alpha, beta, strict=True))
            assert coroot_of[image] == tuple(b - codown * a for a, b in zip(alpha_vee, beta_vee, strict=True))


@pytest.mark.parametrize(
    ("name", "count"),
    [("A1", 1), ("A4", 2), ("B2", 1), ("B3", 1), ("C3", 1), ("D4", 6), ("D5", 2), ("E6", 2), ("E7", 1), ("F4", 1), ("G2", 1)],
)
def test_diagram_automorphisms(name, count):
    """As many as the picture of the diagram shows, each preserves the Cartan matrix, the identity comes first."""
    kind = kind_of(name)
    matrix, found = cartan_matrix(kind), automorphisms(kind)
    assert len(found) == len(set(found)) == count
    assert found[0] == tuple(range(1, kind.rank + 1))
    for images in found:
        assert sorted(images) == sorted(found[0])
        assert all(matrix[a - 1][b - 1] == matrix[i][j] for i, a in enumerate(images) for j, b in enumerate(images))


@pytest.mark.parametrize("name", NAMES)
def test_opposition_is_what_the_longest_element_does(name):
    """Reflecting ``omega_i`` down to the antidominant chamber ends at ``-omega_{i*}``."""
    kind = kind_of(name)
    matrix = cartan_matrix(kind)
    for i in range(kind.rank):
        weight = [int(i == j) for j in range(kind.rank)]
        while max(weight) > 0:
            node = next(j for j, x in enumerate(weight) if x > 0)
            down = weight[node]
            weight = [x - down * c for x, c in zip(weight, matrix[node], strict=True)]
        assert weight == [-int(opposition(kind)[i] == j + 1) for j in range(kind.rank)]


@pytest.mark.parametrize(
    ("name", "nodes"),
    [
        ("A4", (1, 2, 3, 4)),
        ("B4", (1,)),
        ("C4", (4,)),
        ("D5", (1, 4, 5)),
        ("E6", (1, 6)),
        ("E7", (7,)),
        ("E8", ()),
        ("F4", ()),
        ("G2", ()),
    ],
)
def test_cominuscule_nodes(name, nodes):
    """Bourbaki's list; with the node 0 they number the determinant of the Cartan matrix."""
    kind = kind_of(name)
    assert cominuscule_nodes(kind) == nodes
    assert len(nodes) + 1 == DETERMINANT[kind.letter](kind.rank)


@pytest.mark.parametrize(
    ("letter", "rank", "message"),
    [
        ("H", 3, "expected a Cartan letter A, B, C, D, E, F or G, got letter='H'"),
        ("A", 0, "expected a rank of 1 or more for type A, got rank=0"),
        ("B", 1, "expected a rank of 2 or more for type B, got rank=1"),
        ("D", 3, "expected a rank of 4 or more for type D, got rank=3"),
        ("E", 9, "expected a rank from 6 to 8 for type E, got rank=9"),
        ("E", 5, "expected a rank from 6 to 8 for type E, got rank=5"),
        ("F", 3, "expected a rank from 4 to 4 for type F, got rank=3"),
        ("G", 3, "expected a rank from 2 to 2 for type G, got rank=3"),
        ("A", 2.0, "expected an int for the rank, got rank=2.0"),
        ("A", "2", "expected an int for the rank, got rank='2'"),
    ],
)
def test_types_that_do_not_exist(letter, rank, message):
    """A type that does not exist is refused with the letter or the rank named."""
    with pytest.raises(NotationError) as error:
        CartanType(letter, rank)
    assert str(error.value) == message


def test_huge_ranks_are_refused_at_once():
    """The number of roots grows with the square of the rank: beyond ``LARGEST_RANK`` nothing is listed."""
    assert CartanType("A", LARGEST_RANK).rank == LARGEST_RANK
    with pytest.raises(OutOfReach, match=f"expected a rank of at most {LARGEST_RANK}, got rank={LARGEST_RANK + 1}"):
        CartanType("A", LARGEST_RANK + 1)


def test_types_are_ordered_values():
    """Cartan types compare by letter and rank, hash by value and print as usual."""
    assert str(CartanType("E", 8)) == "E8"
    assert {CartanType("A", 2), CartanType("A", 2)} == {CartanType("A", 2)}
    assert CartanType("A", 9) < CartanType("B", 2) < CartanType("B", 3)
    with pytest.raises(AttributeError):
        CartanType("A", 2).rank = 3
