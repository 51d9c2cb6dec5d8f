"""Signed permutations and strict partitions: against multiplication, against published counts, the way back, and every refusal."""

from collections import Counter
from itertools import combinations, permutations, product

import numpy as np
import pytest

from conjcheck import product as product_of
from conjcheck.errors import NotationError
from conjcheck.geometry.cartan import CartanType
from conjcheck.geometry.case import Case, Row, parse_class
from conjcheck.geometry.flag_variety import IG, LG, OG, FlagVariety, Gr
from conjcheck.geometry.signed import read_signed, signed_from_partition, strict_partition_of, text_of_signed


def spaces(letter, rank):
    """Every G/P of a type."""
    nodes = range(1, rank + 1)
    return [FlagVariety(f"{letter}{rank}/P{','.join(map(str, marked))}") for m in nodes for marked in combinations(nodes, m)]


SMALL = [X for letter, rank in (("B", 2), ("C", 2), ("B", 3), ("C", 3)) for X in spaces(letter, rank)]
RANK_4 = [X for letter in "BCD" for X in spaces(letter, 4)]
LARGER = [
    FlagVariety(name) for name in ("C5/P2,5", "B6/P3", "D5/P4", "D5/P4,5", "D6/P2", "D7/P6", "D8/P8", "C8/P8", "B9/P1", "D10/P1")
]
MAXIMAL = [LG(n, 2 * n) for n in range(2, 8)] + [OG(n, 2 * n + 1) for n in range(2, 8)] + [OG(n, 2 * n) for n in range(4, 9)]


def generator(letter, n, i):
    """The simple reflection ``s_i`` as a signed permutation, from the simple roots of Bourbaki."""
    w = list(range(1, n + 1))
    if i < n:
        w[i - 1], w[i] = i + 1, i
    elif letter == "D":
        w[n - 2], w[n - 1] = -n, 1 - n
    else:
        w[n - 1] = -n
    return tuple(w)


def times(left, right):
    """The product as functions, with ``w(-j) = -w(j)``."""
    return tuple(left[j - 1] if j > 0 else -left[-j - 1] for j in right)


def length(letter, w):
    """The number of positive roots that become negative, counted one by one."""
    n = len(w)

    def image(root):
        moved = [0] * n
        for j, coefficient in enumerate(root):
            moved[abs(w[j]) - 1] += coefficient * (1 if w[j] > 0 else -1)
        return moved

    roots = []
    for a, b in combinations(range(n), 2):
        for sign in (1, -1):
            root = [0] * n
            root[a], root[b] = 1, sign
            roots.append(root)
    if letter != "D":
        roots += [[int(j == a) for j in range(n)] for a in range(n)]
    return sum(next(x for x in image(root) if x) < 0 for root in roots)


@pytest.mark.parametrize("X", [*SMALL, *RANK_4[::4], *LARGER], ids=str)
def test_signed_permutations_are_products_of_the_letters(X):
    """Multiplying out the word gives ``u.signed``, whose length, counted in roots, is ``u.length``; both ways; all different."""
    letter, n = X.kind.letter, X.rank
    for u in X.classes[:: max(1, len(X.classes) // 200)]:
        w = tuple(range(1, n + 1))
        for i in u.word:
            w = times(w, generator(letter, n, i))
        assert u.signed == w
        assert length(letter, w) == u.length
        assert all(type(x) is int for x in u.signed)
        assert X.schubert(signed=u.signed) is X.schubert(signed=list(w)) is X.schubert(signed=np.array(w)) is u
    assert len({u.signed for u in X.classes}) == len(X.classes)


@pytest.mark.parametrize(
    "X", [*SMALL, FlagVariety("D4/B"), FlagVariety("D4/P2"), FlagVariety("D4/P3"), FlagVariety("D4/P3,4")], ids=str
)
def test_minimal_representatives_are_the_shortest_of_their_cosets(X):
    """Of all signed permutations exactly those are classes that no reflection of the Levi shortens from the right; the
    refusal of any other names the one in its coset.
    """
    letter, n = X.kind.letter, X.rank
    everything = [
        tuple(s * x for s, x in zip(signs, w, strict=True))
        for w in permutations(range(1, n + 1))
        for signs in product((1, -1), repeat=n)
    ]
    classes = {u.signed for u in X.classes}
    levi = [generator(letter, n, i) for i in range(1, n + 1) if i not in X.marked]
    for w in everything:
        belongs = not (letter == "D" and sum(x < 0 for x in w) % 2)
        minimal = belongs and all(length(letter, times(w, s)) > length(letter, w) for s in levi)
        assert (w in classes) == minimal
        if minimal:
            assert read_signed(w, X.kind, X.marked) == w
            continue
        with pytest.raises(
            NotationError, match="expected a minimal representative" if belongs else "expected an even number"
        ) as error:
            X.schubert(signed=w)
        if belongs:
            best = w
            while shorter := [moved for s in levi if length(letter, moved := times(best, s)) < length(letter, best)]:
                best = shorter[0]
            assert str(error.value).endswith(f": the minimal representative is {best}")


@pytest.mark.parametrize("X", [*SMALL, *RANK_4, *LARGER], ids=str)
def test_classes_are_in_the_one_order(X):
    """By length, then lexicographically in ``signed``, compared as integers."""
    keys = [(u.length, u.signed) for u in X.classes]
    assert keys == sorted(keys)
    assert X.identity.signed == tuple(range(1, X.rank + 1))


def test_two_orders_by_hand():
    """The classes of ``Q^3`` and of ``C2/B``, written out."""
    assert [str(u) for u in FlagVariety("Q^3").classes] == ["[1.2]", "[2.1]", "[-2.1]", "[-1.2]"]
    expected = "[1.2] [1.-2] [2.1] [-2.1] [2.-1] [-2.-1] [-1.2] [-1.-2]"
    assert " ".join(str(u) for u in FlagVariety("C2/B").classes) == expected
    assert [str(u) for u in IG(2, 6).of_length(3)] == ["[1.-2.3]", "[2.-3.1]"]


@pytest.mark.parametrize(
    "X", [*SMALL, *RANK_4[::3], *LARGER, FlagVariety("G2/B"), FlagVariety("F4/P4"), FlagVariety("E6/P1")], ids=str
)
def test_texts_are_read_back(X):
    """``str(u)``, with spaces, and the word give u back; rows and cases with u as well."""
    for u in X.classes[:: max(1, len(X.classes) // 100)]:
        assert parse_class(X, str(u)) is parse_class(X, f" {str(u).replace('.', ' . ')} ") is u
        assert parse_class(X, f"<{'.'.join(map(str, u.word))}>") is u
        if X.kind.letter in "BCD":
            assert parse_class(X, f"[{text_of_signed(u.signed)}]") is u
            assert str(u) == (
                f"[{text_of_signed(u.signed)}]" if not X.is_maximal_isotropic else f"({','.join(map(str, u.partition))})"
            )
        row = Row(X, u, u.dual)
        assert Row.parse(str(row)) == row
        case = Case(X, u, u.dual, u, tuple(range(len(X.marked))))
        assert Case.parse(str(case)) == case


@pytest.mark.parametrize("X", MAXIMAL, ids=str)
def test_strict_partitions_number_the_classes(X):
    """All strict partitions with parts up to n (``OG(n,2n)``: n - 1) once each; the sum is the length; both ways, also as text."""
    most = X.rank - (X.kind.letter == "D")
    expected = {tuple(sorted(parts, reverse=True)) for m in range(most + 1) for parts in combinations(range(1, most + 1), m)}
    assert {u.partition for u in X.classes} == expected
    assert len(X.classes) == len(expected)
    for u in X.classes:
        assert sum(u.partition) == u.length
        assert X.schubert(partition=u.partition) is X.schubert(partition=[*u.partition, 0, 0]) is u
        assert str(u) == f"({','.join(map(str, u.partition))})"
        assert strict_partition_of(u.signed, X.kind.letter) == u.partition


@pytest.mark.parametrize("X", MAXIMAL, ids=str)
def test_the_dual_is_the_complement(X):
    """The strict partition of the dual class has exactly the parts that the other one has not."""
    most = X.rank - (X.kind.letter == "D")
    for u in X.classes:
        assert sorted((*u.partition, *u.dual.partition)) == list(range(1, most + 1))


def test_parts_come_from_negative_places_of_the_weight():
    """On ``LG(3,6)`` the weight ``(-1,1,-1)``, that is e_1 and e_3 negative, has the parts 3 and 1: worked out by hand."""
    u = LG(3, 6).schubert(partition=(3, 1))
    assert u.signed == (2, -3, -1)
    assert OG(3, 7).schubert(signed=(2, -3, -1)).partition == (3, 1)
    assert OG(4, 8).schubert(partition=(3,)).signed == (2, 3, -4, -1)
    assert OG(4, 8).schubert(partition=(2, 1)).signed == (1, 4, -3, -2)
    assert signed_from_partition((), CartanType("D", 5)) == (1, 2, 3, 4, 5)


def counts(X):
    """Numbers of classes by length."""
    return Counter(u.length for u in X.classes)


@pytest.mark.parametrize("n", range(3, 9))
def test_odd_and_even_maximal_orthogonal_grassmannians(n):
    """``OG(n,2n+1)`` and ``OG(n+1,2n+2)`` are isomorphic: the same classes by length and partition, the same q-degree (standard)."""
    odd, even = OG(n, 2 * n + 1), OG(n + 1, 2 * n + 2)
    assert counts(odd) == counts(even)
    assert odd.q_degrees == even.q_degrees == (2 * n,)
    assert {u.partition for u in odd.classes} == {u.partition for u in even.classes}


@pytest.mark.parametrize(("one", "other"), [("OG(3,7)", "OG(4,8)"), ("Q^3", "LG(2,4)"), ("OG(2,5)", "P^3")])
def test_isomorphic_spaces_have_the_same_products(one, other):
    """Matching classes by their partitions (one of each length, on the threefolds) matches the whole quantum multiplication tables."""

    def named(u):
        return u.partition if u.variety.dim == 6 else u.length

    def table(X):
        terms = {(u, v): product_of(u, v, engine="localisation") for u in X.classes for v in X.classes}
        return {(named(u), named(v)): {(named(w), d): N for (w, d), N in row.items()} for (u, v), row in terms.items()}

    assert table(FlagVariety(one)) == table(FlagVariety(other))


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("Q^3", "LG(2,4)"),
        ("OG(2,5)", "P^3"),
        ("IG(1,4)", "P^3"),
        ("IG(1,10)", "P^9"),
        ("D4/P3", "Q^6"),
        ("OG(4,8)", "Q^6"),
        ("OG(3,7)", "Q^6"),
        ("D5/P4", "OG(5,10)"),
        ("G2/P1", "Q^5"),
    ],
)
def test_spaces_with_two_names(one, other):
    """Isomorphic spaces have the same numbers of classes by length and the same q-degree (standard)."""
    X, Y = FlagVariety(one), FlagVariety(other)
    assert counts(X) == counts(Y)
    assert X.q_degrees == Y.q_degrees


@pytest.mark.parametrize("n", range(2, 8))
def test_index_of_isotropic_grassmannians(n):
    """``c_1`` is 2n + 1 - k on ``IG(k,2n)``, 2n - k on ``OG(k,2n+1)`` for k < n, 2n - 1 - k on ``OG(k,2n)`` for k < n - 1; all of
    them have ``2^k C(n,k)`` classes (standard).
    """
    for k in range(1, n + 1):
        sizes = 2**k * len(list(combinations(range(n), k)))
        assert (IG(k, 2 * n).q_degrees, IG(k, 2 * n).number_of_classes) == ((2 * n + 1 - k,), sizes)
        assert OG(k, 2 * n + 1).number_of_classes == sizes
        if k < n:
            assert OG(k, 2 * n + 1).q_degrees == (2 * n - k,)
        if n >= 4 and k < n - 1:
            assert (OG(k, 2 * n).q_degrees, OG(k, 2 * n).number_of_classes) == ((2 * n - 1 - k,), sizes)


C3, D4 = CartanType("C", 3), CartanType("D", 4)
ORDER = "the order 1, ..., {0}, -{0}, ..., -1"


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (
            lambda: read_signed("123", C3, (3,)),
            "expected a sequence of integers for signed, got signed='123'; write a tuple such as (2, 1)",
        ),
        (lambda: read_signed((1, 2.5, 3), C3, (3,)), "expected integers in signed, got entry 2 = 2.5 of signed=(1, 2.5, 3)"),
        (lambda: read_signed((1, 2), C3, (3,)), "expected a signed permutation of 1..3, got 2 entries in signed=(1, 2)"),
        (lambda: read_signed((1, 0, 3), C3, (3,)), "expected entries 1..3 or -1..-3, got entry 2 = 0 in signed=(1, 0, 3)"),
        (lambda: read_signed((1, 2, -4), C3, (3,)), "expected entries 1..3 or -1..-3, got entry 3 = -4 in signed=(1, 2, -4)"),
        (
            lambda: read_signed((1, 3, -1), C3, (3,)),
            "expected each of 1..3 once, with or without sign, got entry 3 = -1 after entry 1 = 1 in signed=(1, 3, -1)",
        ),
        (
            lambda: read_signed((1, 2, 3, -4), D4, (4,)),
            "expected an even number of signs in type D, got 1 in signed=(1, 2, 3, -4)",
        ),
        (
            lambda: read_signed((-1, -2, 3, -4), D4, (4,)),
            "expected an even number of signs in type D, got 3 in signed=(-1, -2, 3, -4)",
        ),
        (
            lambda: LG(3, 6).schubert(signed=(-3, -1, 2)),
            "expected a minimal representative, got -1 before 2 at entries 2 and 3 in signed=(-3, -1, 2): alpha_2 = e_2 - e_3 of the Levi "
            f"becomes negative; sort each block by {ORDER.format(3)}: the minimal representative is (2, -3, -1)",
        ),
        (
            lambda: FlagVariety("Q^5").schubert(signed=(1, 2, -3)),
            "expected a minimal representative, got entry 3 = -3 in signed=(1, 2, -3): alpha_3 = e_3 of the Levi becomes negative; "
            "drop the signs of the last block and sort it: the minimal representative is (1, 2, 3)",
        ),
        (
            lambda: IG(1, 6).schubert(signed=(-1, 2, -3)),
            "expected a minimal representative, got entry 3 = -3 in signed=(-1, 2, -3): alpha_3 = 2 e_3 of the Levi becomes negative; "
            "drop the signs of the last block and sort it: the minimal representative is (-1, 2, 3)",
        ),
        (
            lambda: FlagVariety("D4/P3").schubert(signed=(1, 2, -4, -3)),
            "expected a minimal representative, got -4, -3 as entries 3 and 4 in signed=(1, 2, -4, -3): alpha_4 = e_3 + e_4 of the Levi "
            f"becomes negative; negate both, swap them, and sort each block by {ORDER.format(4)}: the minimal representative is "
            "(1, 2, 3, 4)",
        ),
        (
            lambda: LG(3, 6).schubert(partition=(4,)),
            "expected a strict partition with parts up to 3, got row 1 = 4 in partition=(4,)",
        ),
        (
            lambda: OG(4, 8).schubert(partition=(4, 1)),
            "expected a strict partition with parts up to 3, got row 1 = 4 in partition=(4, 1)",
        ),
        (
            lambda: OG(3, 7).schubert(partition=(2, -1)),
            "expected a strict partition with parts up to 3, got row 2 = -1 in partition=(2, -1)",
        ),
        (
            lambda: OG(3, 7).schubert(partition=(2, 2)),
            "expected a strict partition, with rows that get shorter, got row 2 = 2 after 2 in partition=(2, 2)",
        ),
        (
            lambda: OG(3, 7).schubert(partition=(0, 1)),
            "expected a strict partition, with rows that get shorter, got row 2 = 1 after 0 in partition=(0, 1)",
        ),
        (
            lambda: LG(3, 6).schubert(partition="31"),
            "expected a sequence of integers for partition, got partition='31'; write a tuple such as (2, 1)",
        ),
    ],
)
def test_refusals_name_the_offending_entry(call, message):
    """Each refusal is a ``NotationError`` that says what was expected, which entry came instead, and how to sort."""
    with pytest.raises(NotationError) as error:
        call()
    assert str(error.value) == message


def test_type_a_has_no_signs():
    """A Grassmannian keeps its box partitions beside the strict ones: (1, 1) is a partition there and none on ``LG(2,4)``."""
    assert Gr(2, 4).schubert(partition=(1, 1)).length == 2
    with pytest.raises(NotationError, match="expected a strict partition"):
        LG(2, 4).schubert(partition=(1, 1))
