"""Orbits of weights against permutations, Poincare polynomials and orders of Weyl groups."""

from collections import Counter
from itertools import combinations, pairwise, permutations, product
from math import comb, factorial, prod

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy.combinatorics import Permutation

from conjcheck.geometry.cartan import CartanType, cartan_matrix, positive_roots
from conjcheck.geometry.weyl import (
    dual_indices,
    number_of_cosets,
    one_lines,
    orbit,
    reflected_by_word,
    roots,
    weight_drops,
    weight_images,
)

# Degrees of the basic invariants, Bourbaki, ch. 5, no. 6.2 and the plates; from memory.
DEGREES = {
    "A": lambda r: range(2, r + 2),
    "B": lambda r: range(2, 2 * r + 1, 2),
    "C": lambda r: range(2, 2 * r + 1, 2),
    "D": lambda r: [*range(2, 2 * r - 1, 2), r],
    "E": {6: (2, 5, 6, 8, 9, 12), 7: (2, 6, 8, 10, 12, 14, 18), 8: (2, 8, 12, 14, 18, 20, 24, 30)}.__getitem__,
    "F": {4: (2, 6, 8, 12)}.__getitem__,
    "G": {2: (2, 6)}.__getitem__,
}


def kind_of(name):
    return CartanType(name[0], int(name[1:]))


def everything(kind):
    return tuple(range(1, kind.rank + 1))


def multiply(left, right):
    """Product of two polynomials in q given by their lists of coefficients."""
    result = [0] * (len(left) + len(right) - 1)
    for i, a in enumerate(left):
        for j, b in enumerate(right):
            result[i + j] += a * b
    return result


def inversions(w):
    return sum(a > b for a, b in combinations(w, 2))


def minimal_permutations(n, steps):
    """All permutations whose descents are all marked, by length, then lexicographically."""
    allowed = [w for w in permutations(range(1, n + 1)) if all(w[i - 1] < w[i] or i in steps for i in range(1, n))]
    return sorted(allowed, key=lambda w: (inversions(w), w))


@pytest.mark.parametrize("name", ["A1", "A4", "A7", "B2", "B5", "C4", "D4", "D7", "E6", "E7", "E8", "F4", "G2"])
def test_order_of_the_weyl_group(name):
    """``|W|`` is the product of the degrees of the basic invariants."""
    kind = kind_of(name)
    assert number_of_cosets(kind, everything(kind)) == prod(DEGREES[kind.letter](kind.rank))


@pytest.mark.parametrize("name", ["A3", "A5", "B2", "B4", "C3", "D4", "F4", "G2"])
def test_lengths_follow_the_poincare_polynomial(name):
    """On G/B the number of classes of each length is a coefficient of ``prod (1 + q + ... + q^(d - 1))`` (Chevalley, Solomon)."""
    kind = kind_of(name)
    expected = [1]
    for degree in DEGREES[kind.letter](kind.rank):
        expected = multiply(expected, [1] * degree)
    assert np.bincount(orbit(kind, everything(kind)).lengths).tolist() == expected


@pytest.mark.parametrize(("k", "n"), [(1, 5), (2, 5), (3, 6), (4, 8)])
def test_grassmannian_lengths_are_gaussian_binomials(k, n):
    """On ``Gr(k, n)`` they count the partitions in a box of k rows and n - k columns."""
    boxes = Counter(sum(shape) for shape in product(range(n - k + 1), repeat=k) if list(shape) == sorted(shape))
    assert np.bincount(orbit(CartanType("A", n - 1), (k,)).lengths).tolist() == [boxes[i] for i in range(k * (n - k) + 1)]
    assert number_of_cosets(CartanType("A", n - 1), (k,)) == comb(n, k)


@pytest.mark.parametrize(
    ("name", "marked"),
    [
        ("A4", (2, 3)),
        ("A5", (1, 5)),
        ("B3", (2,)),
        ("C4", (4,)),
        ("D5", (1, 4)),
        ("E6", (1,)),
        ("E7", (7,)),
        ("F4", (4,)),
        ("G2", (1,)),
    ],
)
def test_number_of_cosets_counts_the_orbit(name, marked):
    """The closed formula of heights agrees with the enumeration."""
    kind = kind_of(name)
    assert number_of_cosets(kind, marked) == len(orbit(kind, marked).lengths)


@pytest.mark.parametrize(("n", "steps"), [(2, (1,)), (4, (1, 2, 3)), (5, (2,)), (5, (1, 3)), (6, (1, 4, 5))])
def test_type_a_orbit_is_the_list_of_minimal_permutations(n, steps):
    """The orbit holds the permutations with marked descents, by inversions, then lexicographically."""
    expected = minimal_permutations(n, steps)
    found = orbit(CartanType("A", n - 1), steps)
    assert list(map(tuple, one_lines(found.weights).tolist())) == expected
    assert found.lengths.tolist() == [Permutation([x - 1 for x in w]).inversions() for w in expected]


@pytest.mark.parametrize(
    ("name", "marked"), [("A3", (1, 2, 3)), ("A4", (2,)), ("B2", (1, 2)), ("C3", (1, 3)), ("D4", (2,)), ("G2", (1, 2))]
)
def test_words_are_the_first_reduced_words(name, marked):
    """The word of each class is the lexicographically first of all reduced words of it, found by brute force."""
    kind = kind_of(name)
    matrix = np.array(cartan_matrix(kind))
    found = orbit(kind, marked)
    best = {tuple(found.weights[0].tolist()): ()}
    level = dict(best)
    while level:
        following = {}
        for weight, word in level.items():
            for i in range(kind.rank):
                if weight[i] > 0:
                    image = tuple((np.array(weight) - weight[i] * matrix[i]).tolist())
                    following[image] = min((i + 1, *word), following.get(image, (kind.rank + 1,)))
        best |= following
        level = following
    assert {tuple(w): found.word(k) for k, w in enumerate(found.weights.tolist())} == best
    if kind.letter in "EFG":
        order = [found.word(k) for k in range(len(found.lengths))]
        assert order == sorted(order, key=lambda word: (len(word), word))


def test_letters_and_parents_lead_down_to_the_identity():
    """``letters`` is the smallest left descent and ``parents`` one shorter; the identity has neither."""
    found = orbit(CartanType("A", 4), (1, 3))
    assert found.letters[0] == found.parents[0] == 0
    for k in range(1, len(found.lengths)):
        assert found.lengths[found.parents[k]] == found.lengths[k] - 1
        assert found.letters[k] == 1 + np.flatnonzero(found.weights[k] < 0)[0]


@pytest.mark.parametrize(("name", "marked"), [("A4", (1, 2, 3, 4)), ("C3", (2,)), ("E6", (1,))])
def test_locate_finds_every_weight_and_no_other(name, marked):
    """``locate`` inverts the table of weights and answers -1 outside the orbit."""
    found = orbit(kind_of(name), marked)
    assert found.locate(found.weights).tolist() == list(range(len(found.lengths)))
    assert found.locate(found.weights + 7).tolist() == [-1] * len(found.lengths)


@settings(deadline=None)
@given(st.integers(2, 5).flatmap(lambda n: st.tuples(st.just(n), st.sets(st.integers(1, n - 1), min_size=1))))
def test_images_of_fundamental_weights_in_type_a(case):
    """``u omega_k = e_u(1) + ... + e_u(k)``, in fundamental weights and as a drop ``omega_k - u omega_k`` in simple roots."""
    n, steps = case
    steps = tuple(sorted(steps))
    kind = CartanType("A", n - 1)
    images, drops = weight_images(kind, steps), weight_drops(kind, steps)
    for index, w in enumerate(minimal_permutations(n, steps)):
        for k in range(1, n):
            head = w[:k]
            for i in range(1, n):
                assert images[index, k - 1, i - 1] == (i in head) - (i + 1 in head)
                assert drops[index, k - 1, i - 1] == min(k, i) - sum(x <= i for x in head)


@pytest.mark.parametrize(
    ("name", "marked"), [("B3", (1, 2, 3)), ("C3", (2,)), ("D4", (2, 3)), ("E6", (1,)), ("G2", (1, 2)), ("F4", (4,))]
)
def test_images_of_fundamental_weights_in_every_type(name, marked):
    """They come from the reduced words letter by letter, the last letter first, and the drops are nonnegative sums of roots."""
    kind = kind_of(name)
    matrix = np.array(cartan_matrix(kind))
    found, images, drops = orbit(kind, marked), weight_images(kind, marked), weight_drops(kind, marked)
    assert (drops >= 0).all()
    assert (np.eye(kind.rank, dtype=int) - images == drops @ matrix).all()
    for index in range(len(found.lengths)):
        moved = np.eye(kind.rank, dtype=int)
        for i in reversed(found.word(index)):
            moved = moved - moved[:, i - 1, None] * matrix[i - 1]
        assert (images[index] == moved).all()
        assert (reflected_by_word(kind, np.eye(kind.rank, dtype=int), found.word(index)) == moved).all()
        assert (images[index, [i - 1 for i in marked]].sum(axis=0) == found.weights[index]).all()


def test_words_act_as_functions():
    """``s1 s2`` sends ``omega_1`` to ``omega_1 - alpha_1`` and ``omega_2`` to ``omega_2 - alpha_1 - alpha_2``."""
    kind = CartanType("A", 2)
    weights = np.eye(2, dtype=int)
    expected = weights - np.array([[1, 0], [1, 1]]) @ np.array(cartan_matrix(kind))
    assert (reflected_by_word(kind, weights, (1, 2)) == expected).all()


def test_roots_are_the_arrays_of_positive_roots():
    """``roots`` is ``positive_roots`` as two arrays in the same order."""
    for name in ("A3", "B3", "G2"):
        above, below = roots(kind_of(name))
        assert list(zip(map(tuple, above.tolist()), map(tuple, below.tolist()), strict=True)) == list(positive_roots(kind_of(name)))


@pytest.mark.parametrize(("n", "steps"), [(4, (1, 2, 3)), (5, (2,)), (5, (1, 3)), (6, (2, 3, 5))])
def test_dual_is_the_block_sorted_reverse_complement_in_values(n, steps):
    """In type A the minimal representative of ``w0 w W_P``: values x become n + 1 - x, then each block is sorted."""
    ws = minimal_permutations(n, steps)
    cuts = [0, *steps, n]
    for k, w in enumerate(ws):
        blocks = [sorted(n + 1 - x for x in w[a:b]) for a, b in pairwise(cuts)]
        assert ws[dual_indices(CartanType("A", n - 1), steps)[k]] == tuple(x for block in blocks for x in block)


@pytest.mark.parametrize(
    ("name", "marked"), [("A5", (3,)), ("B3", (1, 3)), ("D5", (5,)), ("E6", (1,)), ("E6", (1, 6)), ("D4", (1, 2, 3, 4))]
)
def test_duality_is_an_involution_with_complementary_lengths(name, marked):
    """``l(u) + l(u^vee) = dim`` and ``u^vee^vee = u`` in every type, also where ``-1`` is not in W."""
    kind = kind_of(name)
    lengths, dual = orbit(kind, marked).lengths, dual_indices(kind, marked)
    assert (dual[dual] == np.arange(len(dual))).all()
    assert (lengths + lengths[dual] == lengths[-1]).all()


def test_the_largest_type_a_orbit_in_use():
    """``Fl(7)`` has 5040 classes and the longest has length 21."""
    found = orbit(CartanType("A", 6), (1, 2, 3, 4, 5, 6))
    assert (len(found.lengths), found.lengths[-1]) == (factorial(7), 21)
