"""The quantum Chevalley formula on every type: printed products, relations, degrees, and commuting operators."""

import re
from collections import Counter
from itertools import combinations
from itertools import product as cartesian
from math import factorial

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import Fl, FlagVariety
from conjcheck.oracle.chevalley import chevalley

# Computed: agreed on by two independent programs, no published source. alpha_1 is short in both: Sp4 is C2 in Bourbaki's numbering.
SP_4 = """
s1 1 = 21 + q1
s2 2 = 2*12 + q2
s1 121 = q1 12 + q1q2
"""
G_2 = """
s1 1 = 21 + q1
s2 2 = 3*12 + q2
s1 121 = 2121 + q1 12 + q1q2
s2 121 = 1212 + 2*2121 + q1q2
s2 21212 = q2 2121 + 2*q1q2^2
s1 21212 = 212121 + q1q2^2
"""


def multiply(X, node, element):
    """``sigma_{s_node} * element`` by the Chevalley terms; an element is ``{(class index, d): count}``."""
    place, total = X.marked.index(node), Counter()
    for (u, d), count in element.items():
        for w, step, coefficients in chevalley(X).terms(u):
            total[w, tuple(map(sum, zip(d, step, strict=True)))] += coefficients[place] * count
    return Counter({term: count for term, count in total.items() if count})


def read(X, text):
    """``2*12 + q1q2^2``: reduced words as digits, powers of q by node."""
    total = Counter()
    for term in text.split(" + "):
        count, powers, word = re.fullmatch(r"(?:(\d+)\*)?((?:q\d(?:\^\d)?)*) ?(\d*)", term).groups()
        d = [0] * len(X.marked)
        for node, power in re.findall(r"q(\d)(?:\^(\d))?", powers):
            d[X.marked.index(int(node))] += int(power or 1)
        total[X.schubert(word=map(int, word)).index, tuple(d)] += int(count or 1)
    return total


def one(X, u=0):
    return Counter({(u, (0,) * len(X.marked)): 1})


@pytest.mark.parametrize(
    ("X", "line"),
    [(FlagVariety(name), line) for name, text in (("C2/B", SP_4), ("G2/B", G_2)) for line in text.strip().splitlines()],
    ids=str,
)
def test_printed_products(X, line):
    """Divisor times class on ``Sp4/B`` and ``G2/B`` (computed)."""
    left, right = line.split(" = ")
    node, word = left[1:].split()
    u = X.schubert(word=map(int, word))
    assert multiply(X, int(node), one(X, u.index)) == read(X, right)


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_divisors_on_complete_flags_are_quantum_monk(n):
    """Fomin, Gelfand, Postnikov 1997, Theorem 1.3, written out with permutations."""
    X = Fl(n)
    for u in X.classes:
        w, here = u.permutation, u.length
        for r in range(1, n):
            expected = Counter()
            for a, b in cartesian(range(1, r + 1), range(r + 1, n + 1)):
                end = list(w)
                end[a - 1], end[b - 1] = end[b - 1], end[a - 1]
                rise = sum(x > y for x, y in combinations(end, 2)) - here
                if rise in (1, 1 - 2 * (b - a)):
                    d = tuple(int(rise < 1 and a <= i < b) for i in range(1, n))
                    expected[X.schubert(permutation=end).index, d] += 1
            assert multiply(X, r, one(X, u.index)) == expected


NAMES = [
    "A3/B",
    "A4/P2,3",
    "A5/P1,3,4",
    "B2/B",
    "B3/B",
    "B3/P1,3",
    "B4/P2,3",
    "C3/B",
    "C3/P1,2",
    "C4/P1,4",
    "D4/B",
    "D4/P1,2",
    "D5/P1,5",
    "E6/P1,6",
    "F4/P1,4",
    "G2/B",
]


@pytest.mark.parametrize("name", NAMES)
def test_divisors_commute(name):
    """Associativity and commutativity: the operators of two divisors commute, quantum terms included, in every type."""
    X = FlagVariety(name)
    for i, j in combinations(X.marked, 2):
        for u in range(0, len(X.classes), max(1, len(X.classes) // 200)):
            assert multiply(X, i, multiply(X, j, one(X, u))) == multiply(X, j, multiply(X, i, one(X, u)))


@pytest.mark.parametrize("name", [*NAMES, "E6/P1", "E7/P7", "E8/P8", "F4/P4", "G2/P1", "G2/P2", "C4/P4", "B4/P4", "D5/P5"])
def test_terms_obey_the_degree_axiom(name):
    """``l(u) + 1 = l(w) + sum d_i deg q_i``; classes do not repeat within one row and degree; coefficients are not negative."""
    X = FlagVariety(name)
    for u in X.classes[:500]:
        terms = chevalley(X).terms(u.index)
        assert len({(w, d) for w, d, _ in terms}) == len(terms)
        for w, d, coefficients in terms:
            assert u.length + 1 == X.classes[w].length + sum(a * b for a, b in zip(d, X.q_degrees, strict=True))
            assert min(coefficients) >= 0
            assert max(coefficients) > 0


def weyl_degree(X):
    """The classical ``D^dim`` for ``D`` the sum of the divisors, as a coefficient of the class of a point."""
    level = one(X)
    for _ in range(X.dim):
        following = Counter()
        for node in X.marked:
            following.update({term: count for term, count in multiply(X, node, level).items() if not any(term[1])})
        level = following
    assert set(level) == {(X.point.index, (0,) * len(X.marked))}
    return level.total()


@pytest.mark.parametrize(
    ("name", "degree"), [("A2/B", 48), ("A3/B", 46080), ("B2/B", 384), ("G2/B", 46080), ("B3/B", 185794560), ("C3/B", 185794560)]
)
def test_anticanonical_degree_of_complete_flags(name, degree):
    """``(2 rho)``-degree ``2^N N!`` (Weyl)."""
    X = FlagVariety(name)
    assert 2**X.dim * weyl_degree(X) == degree == 2**X.dim * factorial(X.dim)


@pytest.mark.parametrize(("n", "degree"), list(zip(range(2, 9), (1, 2, 12, 286, 33592, 23178480, 108995910720), strict=True)))
def test_degrees_of_orthogonal_grassmannians(n, degree):
    """``OG(n, 2n+1)`` in its half-spin embedding: 1, 1, 2, 12, 286, 33592, 23178480, 108995910720 (OEIS A003121, seen)."""
    assert weyl_degree(FlagVariety(f"B{n}/P{n}")) == degree


@pytest.mark.parametrize("n", [2, 3, 4, 5, 6])
def test_hyperplane_powers_on_quadrics_and_projective_spaces(n):
    """``h^(N+1) = q`` on ``P^N``; ``h^(N+1) = 4 q h`` on a quadric ``Q^N``, N of 3 or more (from memory)."""

    def power(X):
        element = one(X)
        for _ in range(X.dim + 1):
            element = multiply(X, X.marked[0], element)
        return element

    assert power(FlagVariety(f"A{n}/P1")) == {(0, (1,)): 1}
    for name in [f"B{n}/P1", *([f"D{n}/P1"] if n >= 4 else [])]:
        assert power(FlagVariety(name)) == {(1, (1,)): 4}


def test_the_smallest_lagrangian_grassmannian():
    """``LG(2,4)``: ``s1 s1 = 2 s2, s1 s2 = s21 + q, s1 s21 = q s1`` (Kresch, Tamvakis, J. Alg. Geom. 12 (2003), from memory)."""
    X = FlagVariety("C2/P2")
    assert [multiply(X, 2, one(X, u)) for u in range(4)] == [
        {(1, (0,)): 1},
        {(2, (0,)): 2},
        {(3, (0,)): 1, (0, (1,)): 1},
        {(1, (1,)): 1},
    ]


@settings(deadline=None)
@given(st.sampled_from(["A4/B", "B3/B", "C3/P1,3", "D4/P2", "E6/P1", "F4/P4", "G2/B"]).map(FlagVariety), st.data())
def test_every_class_below_a_class_is_reached(X, data):
    """The classical terms of all divisors of u are exactly the covers of u: each class but the last has one, each but the
    first is one.
    """
    u = data.draw(st.sampled_from(X.classes))
    covers = {w for w, d, _ in chevalley(X).terms(u.index) if not any(d)}
    assert bool(covers) == (u is not X.point)
    assert all(X.classes[w].length == u.length + 1 for w in covers)
    dual_covers = {X.classes[w].dual.index for w, d, _ in chevalley(X).terms(u.dual.index) if not any(d)}
    assert all(u.index in {w for w, d, _ in chevalley(X).terms(below) if not any(d)} for below in dual_covers)
