"""Peterson-Woodward: the lift of degrees, the longest elements, and partial flags against their own Chevalley formula."""

from itertools import product as cartesian

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import Fl, product
from conjcheck.geometry.cartan import CartanType, cartan_matrix, positive_roots
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.comparison import comparison, lift, longest_word
from conjcheck.oracle.recursion import CompleteFlagRing

PARTIAL = [
    Fl(*steps, n=n)
    for n, steps in [
        (3, (1,)),
        (4, (2,)),
        (4, (1, 3)),
        (4, (1, 2)),
        (5, (2,)),
        (5, (1, 4)),
        (5, (2, 3)),
        (5, (1, 3, 4)),
        (6, (3,)),
        (6, (2, 4)),
        (6, (1, 2, 5)),
    ]
]


def heights(kind, marked, point):
    """``<alpha, point>`` for the positive roots of the Levi of P."""
    matrix = cartan_matrix(kind)
    for root, _ in positive_roots(kind):
        if not any(root[i - 1] for i in marked):
            yield sum(a * c * matrix[i][j] for i, a in enumerate(root) for j, c in enumerate(point))


@pytest.mark.parametrize(
    ("marked", "d", "expected"),
    [
        ((2,), (1,), (0, 1, 0)),
        ((2,), (2,), (1, 2, 1)),
        ((2,), (3,), (1, 3, 1)),
        ((1,), (1,), (1, 0, 0)),
        ((1,), (2,), (2, 1, 0)),
        ((1,), (3,), (3, 2, 1)),
        ((1,), (4,), (4, 2, 1)),
        ((1, 3), (1, 1), (1, 1, 1)),
        ((1, 3), (1, 0), (1, 0, 0)),
        ((1, 2, 3), (1, 5, 2), (1, 5, 2)),
    ],
)
def test_lifts_by_hand(marked, d, expected):
    """On A3, worked out by hand from ``<alpha, lambda>`` in {0, -1} on the Levi."""
    assert lift(CartanType("A", 3), marked, d) == expected


@settings(deadline=None)
@given(
    st.sampled_from(["A2", "A3", "A4", "B3", "C3", "D4", "G2"]).flatmap(
        lambda name: st.tuples(st.just(CartanType(name[0], int(name[1]))), st.sets(st.integers(1, int(name[1])), min_size=1))
    ),
    st.data(),
)
def test_the_lift_is_the_only_one(case, data):
    """It extends d, satisfies the condition, and no other point of a box around it does."""
    kind, marked = case[0], tuple(sorted(case[1]))
    d = tuple(data.draw(st.integers(0, 3)) for _ in marked)
    found = lift(kind, marked, d)
    assert tuple(found[i - 1] for i in marked) == d
    assert all(height in (0, -1) for height in heights(kind, marked, found))
    free = [i for i in range(kind.rank) if i + 1 not in marked]
    for values in cartesian(*(range(found[i] - 2, found[i] + 3) for i in free)):
        point = list(found)
        for i, value in zip(free, values, strict=True):
            point[i] = value
        if tuple(point) != found:
            assert any(height not in (0, -1) for height in heights(kind, marked, point))


@pytest.mark.parametrize(
    ("name", "nodes", "length"),
    [
        ("A3", (), 0),
        ("A3", (1, 3), 2),
        ("A3", (1, 2), 3),
        ("A3", (1, 2, 3), 6),
        ("B3", (2, 3), 4),
        ("B3", (1, 2, 3), 9),
        ("G2", (1, 2), 6),
        ("E6", (1, 2, 3, 4, 5, 6), 36),
    ],
)
def test_longest_words(name, nodes, length):
    """The word has the length of the longest element, and sends every simple root of its nodes below."""
    kind = CartanType(name[0], int(name[1]))
    matrix, word = cartan_matrix(kind), longest_word(kind, nodes)
    assert len(word) == length
    assert set(word) <= set(nodes)
    weight = [int(i + 1 in nodes) for i in range(kind.rank)]
    for i in reversed(word):
        weight = [x - weight[i - 1] * c for x, c in zip(weight, matrix[i - 1], strict=True)]
    assert all(weight[i - 1] == -1 for i in nodes)


@pytest.mark.parametrize("X", PARTIAL, ids=str)
def test_divisors_on_partial_flags(X):
    """Divisor times class, lifted and compared, is the quantum Chevalley formula of G/P itself (Fulton-Woodward, Theorem 10.1)."""
    for place, node in enumerate(X.marked):
        divisor = X.schubert(word=(node,))
        for u in X.classes:
            expected = {(X.classes[w], d): c[place] for w, d, c in chevalley(X).terms(u.index) if c[place]}
            assert product(divisor, u, engine="recursion") == expected


@pytest.mark.parametrize("X", [Fl(1, 2, n=4), Fl(1, 3, n=4), Fl(2, n=4), Fl(1, 4, n=5)], ids=str)
def test_the_whole_ring_of_partial_flags_follows_from_divisors(X, times):
    """Every product agrees with associativity on G/P alone: ``sigma_i * (sigma_u * sigma_v) = (sigma_i * sigma_u) *
    sigma_v``, the left factor by the Chevalley formula of G/P and not by the comparison."""
    zero = (0,) * len(X.marked)

    def chevalley_times(place, element):
        total = {}
        for (u, d), count in element.items():
            for w, step, c in chevalley(X).terms(u.index):
                term = X.classes[w], tuple(map(sum, zip(d, step, strict=True)))
                total[term] = total.get(term, 0) + c[place] * count
        return {term: count for term, count in total.items() if count}

    for place in range(len(X.marked)):
        for u in X.classes:
            for v in X.classes:
                left = chevalley_times(place, product(u, v, engine="recursion"))
                right = times(chevalley_times(place, {(u, zero): 1}), {(v, zero): 1}, "recursion")
                assert left == right


def test_the_direct_route_reads_the_same_products():
    """With and without the symmetries of the complete flags."""
    X = Fl(1, 3, n=5)
    home = comparison(X)
    for u in X.classes[::3]:
        for v in X.classes[::2]:
            assert home.row(u, v) == home.row(u, v, direct=True)


def test_the_direct_route_asks_the_direct_route(monkeypatch):
    """``direct=True`` reads the products of the complete flags that use no symmetry, and the plain call the others."""
    X = Fl(1, 2, n=4)
    right = {(u, v): comparison(X).row(u, v) for u in X.classes for v in X.classes}
    monkeypatch.setattr(CompleteFlagRing, "packed_row", lambda self, u, v: {})
    assert {pair: comparison(X).row(*pair, direct=True) for pair in right} == right
    assert comparison(X).row(X.point, X.point) == {}
