"""The closed formula on Grassmannians: its field, its bound, and the other engine on every row up to n = 6."""

from math import comb

import pytest
import sympy

from conjcheck import Fl, FlagVariety, Gr, product, table
from conjcheck.oracle import engines_for
from conjcheck.oracle.grassmannian import MOST_CLASSES, ResidueTable, VafaIntriligatorEngine, dimension

SPACES = [Gr(k, n) for n in range(2, 7) for k in range(1, n)]


def tableaux(shape, k):
    """The number of semistandard tableaux with entries 1..k, row by row from the branching rule."""
    if k == 0:
        return int(not any(shape))
    padded = (*shape, *[0] * k)[:k]
    total, stack = 0, [()]
    while stack:
        inner = stack.pop()
        i = len(inner)
        if i == k - 1:
            total += tableaux(inner, k - 1)
        else:
            stack += [(*inner, part) for part in range(padded[i + 1], padded[i] + 1)]
    return total


@pytest.mark.parametrize("X", [Gr(2, 5), Gr(3, 6), Gr(4, 7)], ids=str)
def test_the_bound_counts_tableaux(X):
    """``s_l(1, ..., 1)`` in k variables is the number of semistandard tableaux."""
    for u in X.classes:
        assert dimension(u.partition, X.steps[0]) == tableaux(u.partition, X.steps[0])


@pytest.mark.parametrize("X", [*SPACES, Gr(3, 7), Gr(4, 8), Gr(5, 10)], ids=str)
def test_the_field_holds_every_constant(X):
    """p is a prime, 1 modulo 2n, above every constant, and small enough that products of residues fit 63 bits."""
    made = ResidueTable(X)
    assert sympy.isprime(made.p)
    assert made.p % (2 * X.n) == 1
    assert max(made.bounds) < made.p < 2**31
    assert made.bounds == [dimension(u.partition, X.steps[0]) for u in X.classes]


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_the_two_engines_agree_on_every_row(X):
    """Associativity on complete flags with Peterson-Woodward, and the closed formula: two methods, one ring."""
    for u in X.classes:
        for v in X.classes:
            assert product(u, v, engine="recursion") == product(u, v, engine="vafa-intriligator")


@pytest.mark.parametrize("X", [Gr(3, 7), Gr(2, 8), Gr(4, 8)], ids=str)
def test_the_two_engines_agree_further_out(X):
    """Rows spread over larger Grassmannians, the last one included."""
    for u in X.classes[:: max(1, len(X.classes) // 6)]:
        for v in (X.classes[len(X.classes) // 2], X.classes[-2], X.point):
            assert product(u, v, engine="recursion") == product(u, v, engine="vafa-intriligator")


@pytest.mark.parametrize("X", [Gr(1, 2), Gr(2, 4), Gr(2, 5), Gr(3, 6)], ids=str)
def test_tables_and_single_constants_agree_with_rows(X):
    """Both engines' tables hold the rows; single constants are the terms of the rows, and 0 off the degree axiom."""
    rows = {(u.index, v.index): product(u, v) for u in X.classes for v in X.classes}
    expected = {(*pair, w.index, d): count for pair, row in rows.items() for (w, d), count in row.items()}
    for name in ("recursion", "vafa-intriligator"):
        found = {}
        for block in table(X, engine=name):
            for v, w, (d,), count in zip(block.v.tolist(), block.w.tolist(), block.d.tolist(), block.N.tolist(), strict=True):
                found[block.u.index, v, w, (d,)] = count
        assert found == expected
    for engine in engines_for(X):
        for (u, v), row in rows.items():
            for w in X.classes:
                for d in range(X.steps[0] + 1):
                    assert engine.constant(X.classes[u], X.classes[v], w, (d,)) == row.get((w, (d,)), 0)


def test_a_large_grassmannian():
    """``[pt]^2`` on ``Gr(5,10)`` is ``q^5`` (point times point: k = n - k), and a general product obeys the bound."""
    X = Gr(5, 10)
    assert product(X.point, X.point) == {(X.identity, (5,)): 1}
    u = X.schubert(partition=(4, 3, 2, 1))
    row = product(u, u)
    assert max(row.values()) <= dimension(u.partition, 5)
    assert row == product(u, u, engine="vafa-intriligator")


def test_what_is_out_of_reach():
    """The engine names the reason: not a Grassmannian, or too many classes."""
    assert VafaIntriligatorEngine().refuses(Gr(3, 6)) is None
    assert VafaIntriligatorEngine().refuses(Fl(3)) == "Fl(3) is not a Grassmannian"
    X = FlagVariety("C3/P3")
    assert VafaIntriligatorEngine().refuses(X) == f"{X} is not a Grassmannian"
    assert comb(14, 7) > MOST_CLASSES
    assert VafaIntriligatorEngine().refuses(Gr(7, 14)) == "Gr(7,14) has 3,432 classes, the table of residues stops at 1,000"
