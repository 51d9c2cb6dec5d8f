"""Failures and agreements as arrays: every line is what the rule and the oracle say at that case."""

from time import perf_counter

import faulty
import numpy as np
import pytest

from conjcheck import Fl, Gr, Grassmannians, PartialFlags, candidate, product
from conjcheck.geometry.case import Row
from conjcheck.testing.compare import Comparer
from conjcheck.testing.gather import gather, gather_space, place


def value(X, u, v, w, d):
    """A value that is often wrong, in both directions, also where the constant is 0."""
    true = faulty.terms(u, v).get((w, d), 0)
    return max(true + (u.index + 2 * v.index + w.index + sum(d)) % 4 - 1, 0) if X.n > 3 else true


def rule(kind):
    """The values as a rule: case by case, or, where the constant is not 0, row by row."""

    @candidate(on=PartialFlags())
    def by_cases(X, u, v, w, d):
        return value(X, u, v, w, d)

    @candidate(on=PartialFlags())
    def by_rows(X, u, v):
        return {key: value(X, u, v, *key) for key in faulty.terms(u, v)}

    return by_cases if kind == "cases" else by_rows


def told(table, k):
    """What a table tells of a case."""
    c = table.cases
    return (
        int(table.errors[k]),
        bool(table.fails[k]),
        bool(table.informative[k]),
        bool(table.vanishing[k]),
        int(c.constant[k]),
        int(c.largest[k]),
    )


@pytest.mark.parametrize("kind", ["cases", "rows"])
@pytest.mark.parametrize("X", [Gr(2, 4), Fl(4)], ids=str)
@pytest.mark.parametrize("kept", [False, True])
def test_every_line_is_true(kind, X, kept):
    """Error, failure and constant are those of the case, also where only some cases are kept."""
    keep = (lambda cases: (cases.w + cases.u) % 3 == 1) if kept else None
    table = gather_space(Comparer(rule(kind)), X, deadline=perf_counter() + 60, most_rows=60, most_cases=5_000, keep=keep)
    assert len(table) > 10
    assert table.fails.any()
    assert not table.fails.all()
    for k in range(len(table)):
        case = place(table, k)
        terms = product(case.u, case.v)
        true = terms.get((case.w, case.d), 0)
        given = value(X, case.u, case.v, case.w, case.d) if kind == "cases" or true else 0
        assert told(table, k) == (given - true, given != true, bool(given or true), not true, true, max(terms.values()))
        assert case.obeys_degree_axiom
        assert case.row in table.rows
        assert not kept or (case.w.index + case.u.index) % 3 == 1
    assert len({place(table, k) for k in range(len(table))}) == len(table)


def test_small_spaces_are_looked_at_completely():
    """With time and room enough, every case of a small space is there once."""
    X = Gr(2, 4)
    comparer = Comparer(rule("cases"))
    table = gather_space(comparer, X, deadline=perf_counter() + 60, most_rows=1_000, most_cases=10_000)
    assert len(table) == sum(comparer.size(Row(X, u, v)) for u in X.classes for v in X.classes)
    assert len(table.rows) == 36


def test_samples_are_the_same_every_time():
    """The rows and zeros of a large space are a sample, the same one every time; the rows asked for come first, those to skip never."""
    X, late = Fl(5), perf_counter() + 60
    first = [Row(X, X.classes[60], X.classes[70])]
    once, again = (
        gather_space(Comparer(rule("rows")), X, deadline=late, most_rows=25, most_cases=9_000, first=first) for _ in range(2)
    )
    assert (once.cases.w == again.cases.w).all()
    assert (once.fails == again.fails).all()
    assert place(once, 0).row == first[0]
    assert len(once.rows) == 25
    other = gather_space(Comparer(rule("rows")), X, deadline=late, most_rows=25, most_cases=9_000, skip=once.rows)
    assert len(other.rows) == 25
    assert not other.rows & once.rows


def test_all_nonzero_values_of_a_large_row_are_there():
    """Of a row with many cases all nonzero constants and values are looked at, and some zeros."""
    X = Fl(5)
    u, v = X.classes[80], X.classes[90]
    table = gather_space(
        Comparer(rule("rows")), X, deadline=perf_counter() + 60, most_rows=1, most_cases=9_000, first=[Row(X, u, v)]
    )
    places = {(place(table, k).w, place(table, k).d) for k in range(len(table))}
    assert places > set(product(u, v))
    assert (table.vanishing & ~table.informative).any()


def test_premises_and_deadlines():
    """Rows outside the premise are left out, and after the deadline nothing is compared."""

    @candidate(on=Grassmannians(), premise=lambda X, u, v: u.length == 1)
    def divisors(X, u, v, w, d):
        return faulty.terms(u, v).get((w, d), 0)

    spaces = [Gr(2, 4), Gr(2, 5)]
    tables = gather(Comparer(divisors), spaces, deadline=perf_counter() + 60, most_rows=100)
    assert [table.cases.X for table in tables] == spaces
    assert [len(table.rows) for table in tables] == [6, 10]
    assert not any(table.fails.any() for table in tables)
    assert gather(Comparer(divisors), spaces, deadline=perf_counter() - 1, most_rows=100) == []


def test_huge_values():
    """A value that no 64-bit integer holds is cut off, and still fails."""

    @candidate(on=Grassmannians())
    def huge(X, u, v, w, d):
        return 10**30

    table = gather_space(Comparer(huge), Gr(1, 3), deadline=perf_counter() + 60, most_rows=9, most_cases=100)
    assert table.fails.all()
    assert np.unique(table.errors).tolist() == [2**62]
