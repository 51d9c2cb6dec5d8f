"""Rules with known faults, and an account of cases that owes nothing to the harness.

A rule here looks its values up in a dictionary that was filled before it runs. The order and the number of cases are written down
again from the definition, so that "the smallest" and "how many are smaller" are known independently.
"""

import importlib.util
from bisect import bisect_left
from functools import cache
from itertools import product as tuples
from pathlib import Path

from conjcheck import PartialFlags, Varieties, candidate, product
from conjcheck.geometry.case import Case

SMALL = tuple(PartialFlags().up_to(4))
"""Every flag variety with n <= 4, from Gr(1,2) to Fl(4)."""


@cache
def truth(X):
    """Every nonzero constant of X: ``{(u, v): {(w, d): N}}``."""
    return {(u, v): dict(product(u, v)) for u in X.classes for v in X.classes}


@cache
def weighted_degrees(weights, total):
    """Every degree d with ``sum d_i weights_i = total``."""
    boxes = tuples(*(range(total // weight + 1) for weight in weights))
    return [d for d in boxes if sum(a * b for a, b in zip(d, weights, strict=True)) == total]


@cache
def outcomes_of(X, total, *, classical=False):
    """Every ``(w, d)`` that the degree axiom allows, by ``sum d``, then d, then w."""
    found = [
        (w, d)
        for w in X.classes
        if w.length <= total
        for d in weighted_degrees(X.q_degrees, total - w.length)
        if not classical or not any(d)
    ]
    return sorted(found, key=lambda key: (sum(key[1]), key[1], key[0].index))


def key_of(case):
    """The one order of cases, written down from its definition."""
    X, u, v, w, d = case
    space = (X.rank, len(X.marked), X.dim, X.kind.letter, X.marked)
    return (*space, u.length + v.length, u.length, u.index, v.index, sum(d), d, w.index)


@cache
def cases_of(X, *, classical=False):
    """Every case of X as a tuple ``(X, u, v, w, d)``, in order."""
    pairs = sorted(((u, v) for u in X.classes for v in X.classes), key=lambda p: (p[0].length + p[1].length, p[0].length, p))
    return [(X, u, v, w, d) for u, v in pairs for w, d in outcomes_of(X, u.length + v.length, classical=classical)]


@cache
def _keys(X):
    return [key_of(case) for case in cases_of(X)]


def smaller_than(case, spaces):
    """How many cases of the spaces come before a case."""
    key = key_of(case)
    return sum(bisect_left(_keys(X), key) for X in spaces)


def rule_by_cases(faults=(), *, on=SMALL, **choices):
    """The true constants, each one too many at the faults, tuples ``(X, u, v, w, d)``; asked case by case."""
    tables, wrong = {X: truth(X) for X in on}, set(faults)

    @candidate(on=Varieties(*on), **choices)
    def by_cases(X, u, v, w, d):
        return tables[X][u, v].get((w, d), 0) + ((X, u, v, w, d) in wrong)

    return by_cases


def rule_by_rows(faults=(), *, on=SMALL, **choices):
    """The same, asked row by row."""
    tables = {X: truth(X) for X in on}
    wrong = {}
    for X, u, v, w, d in set(faults):
        row = wrong.setdefault((X, u, v), dict(tables[X][u, v]))
        row[w, d] = row.get((w, d), 0) + 1

    @candidate(on=Varieties(*on), **choices)
    def by_rows(X, u, v):
        return wrong.get((X, u, v)) or tables[X][u, v]

    return by_rows


def as_case(case):
    """The tuple as a ``Case``."""
    return Case(*case)


@cache
def plain_rows(n):
    """The rows ``{(u, v): {(w, d): N}}`` of ``Fl(n)``, permutations as tuples, by the plain script: another program."""
    path = Path(__file__).parents[1] / "benchmarks" / "plain_scipy.py"
    spec = importlib.util.spec_from_file_location("plain_scipy", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return dict(module.fill(n).constants())
