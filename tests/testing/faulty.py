"""Right rules with a planted fault each, and how well a diagnosis finds the fault again.

A rule here knows the right products: it reads them under a watch of its own, which only a test of the harness may do. Where the planted
condition holds, a nonzero constant (or, for some, every constant) becomes another value.
"""

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from time import perf_counter

import numpy as np

from conjcheck import CompleteFlags, Grassmannians, PartialFlags, StepFlags, candidate
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import row_terms
from conjcheck.oracle.guard import Watch, watched
from conjcheck.testing.compare import Comparer
from conjcheck.testing.gather import gather
from conjcheck.testing.minimise import layer_of
from conjcheck.testing.search import search
from conjcheck.testing.survey import survey

__all__ = ["FAULTS", "STRANGE", "Fault", "figures", "measure", "planted"]


@dataclass(frozen=True)
class Fault:
    """A planted fault: the condition as plain code that owes nothing to ``testing/features.py``, and what becomes of a constant there."""

    name: str
    family: object
    holds: Callable[..., bool]
    ring: str = "quantum"
    wrong: Callable[[int], int] = lambda constant: constant + 1
    next_n: int = 6


@lru_cache(maxsize=200_000)
def terms(u, v):
    """The right product, under a watch of its own."""
    with watched(Watch(forbidding=False)):
        return row_terms(u, v)


def has_pattern(w, pattern):
    """Whether a permutation contains a pattern, by recursion over its entries."""

    def grow(chosen, start):
        k = len(chosen)
        if any((chosen[i] < chosen[j]) != (pattern[i] < pattern[j]) for i in range(k) for j in range(i)):
            return False
        return k == len(pattern) or any(grow([*chosen, w[place]], place + 1) for place in range(start, len(w)))

    return grow([], 0)


@lru_cache(maxsize=100_000)
def vexillary(u):
    return not has_pattern(u.permutation, (2, 1, 4, 3))


@lru_cache(maxsize=100_000)
def dominant(u):
    return not has_pattern(u.permutation, (1, 3, 2))


def is_hook(u):
    return len(u.partition) < 2 or u.partition[1] == 1


def separated(u, v):
    """Whether there is a place k with all descents of one up to k and those of the other from k on."""
    return any(all(a <= b for a in x.descents for b in y.descents) for x, y in ((u, v), (v, u)))


FAULTS = (
    Fault("d is one too large", Grassmannians(), lambda c: any(c.d), wrong=lambda n: -1, next_n=8),
    Fault("only d > 0", Grassmannians(), lambda c: sum(c.d) > 0, next_n=8),
    Fault("u not vexillary", CompleteFlags(), lambda c: not vexillary(c.u), "classical"),
    Fault("u or v not vexillary", CompleteFlags(), lambda c: not (vexillary(c.u) and vexillary(c.v)), "quantum"),
    Fault("descents overlap", CompleteFlags(), lambda c: not set(c.u.descents).isdisjoint(c.v.descents)),
    Fault("u after v", Grassmannians(), lambda c: c.v < c.u, wrong=lambda n: 0, next_n=8),
    Fault("multiplicity in the product", Grassmannians(), lambda c: c.largest >= 2, "classical", next_n=8),
    Fault("two hooks", Grassmannians(), lambda c: is_hook(c.u) and is_hook(c.v), next_n=8),
    Fault("w Grassmannian", CompleteFlags(), lambda c: len(c.w.descents) < 2, "classical"),
    Fault("l(u) + l(v) > dim", Grassmannians(), lambda c: c.u.length + c.v.length > c.X.dim, next_n=8),
    Fault("n >= 4", CompleteFlags(), lambda c: c.X.n > 3),
    Fault("d with full support", CompleteFlags(), lambda c: 0 not in c.d),
    Fault("|d| >= 2", StepFlags(2), lambda c: c.d[0] + c.d[1] > 1, wrong=lambda n: 0),
    Fault("two descents each", StepFlags(2), lambda c: len(c.u.descents) == len(c.v.descents) == 2, "classical"),
    Fault("an entry of d >= 2", CompleteFlags(), lambda c: max(c.d) > 1, wrong=lambda n: n - 1),
    Fault("squares", CompleteFlags(), lambda c: c.u is c.v and c.u.length > 1, "classical"),
    Fault("u not dominant and d > 0", CompleteFlags(), lambda c: any(c.d) and not dominant(c.u)),
    Fault("steps >= 2 and d > 0", PartialFlags(), lambda c: len(c.d) > 1 and any(c.d)),
    Fault("constants above 1", Grassmannians(), lambda c: c.constant > 1, wrong=lambda n: 1, next_n=8),
    Fault("columns", Grassmannians(), lambda c: c.u.length > 0 and set(c.u.partition) == {1}, next_n=8),
    Fault("rectangle v at d > 0", Grassmannians(), lambda c: len(set(c.v.partition)) == 1 and any(c.d), next_n=8),
    Fault("classical product is 0", Grassmannians(), lambda c: not any(sum(d) == 0 for _, d in terms(c.u, c.v)), next_n=8),
    Fault("descents not separated", CompleteFlags(), lambda c: not separated(c.u, c.v), "classical"),
    Fault("both long", StepFlags(2), lambda c: min(c.u.length, c.v.length) > 3, "classical"),
)
"""Faults whose conditions can be said with the features there are."""

STRANGE = (
    Fault("l(u) even", CompleteFlags(), lambda c: c.u.length % 2 == 0, "classical"),
    Fault("d1 > d2", StepFlags(2), lambda c: c.d[0] > c.d[1]),
    Fault(
        "u longer in its first row",
        Grassmannians(),
        lambda c: max(c.u.partition, default=0) > max(c.v.partition, default=0),
        next_n=8,
    ),
    Fault("u starts above v", CompleteFlags(), lambda c: c.u.permutation[0] > c.v.permutation[0] and any(c.d)),
    Fault(
        "w contains 2413 or 15243",
        CompleteFlags(),
        lambda c: has_pattern(c.w.permutation, (2, 4, 1, 3)) or has_pattern(c.w.permutation, (1, 5, 2, 4, 3)),
        "classical",
    ),
    Fault("three conditions", CompleteFlags(), lambda c: any(c.d) and not dominant(c.u) and len(c.v.descents) > 1),
)
"""Faults with conditions that no feature, or no pair of tests, says."""


@dataclass(frozen=True)
class Place:
    """A case with its constant and the largest one of its product."""

    X: FlagVariety
    u: object
    v: object
    w: object
    d: tuple
    constant: int
    largest: int


def planted(fault):
    """The rule with the fault."""

    def faulty(X, u, v):
        right = {key: n for key, n in terms(u, v).items() if fault.ring == "quantum" or not any(key[1])}
        largest, found = max(right.values(), default=0), {}
        for (w, d), n in right.items():
            value, degree = fault.wrong(n) if fault.holds(Place(X, u, v, w, d, n, largest)) else n, d
            if value < 0:  # the right value at another degree
                value, degree = n, (d[0] + 1, *d[1:])
            found[w, degree] = found.get((w, degree), 0) + value
        return found if fault.ring == "quantum" else {w: n for (w, _), n in found.items()}

    return candidate(on=fault.family.where(lambda X: X.n < fault.next_n), ring=fault.ring)(faulty)


def truly(fault, table):
    """Where the planted condition holds among the nonzero constants of a table; all others are ``None``."""
    c, classes = table.cases, table.cases.X.classes
    return [
        fault.holds(Place(c.X, classes[u], classes[v], classes[w], tuple(d), n, m)) if n else None
        for u, v, w, d, n, m in zip(
            c.u.tolist(), c.v.tolist(), c.w.tolist(), c.d.tolist(), c.constant.tolist(), c.largest.tolist(), strict=True
        )
    ]


def agree(fault, condition, tables):
    """Whether a condition and the planted one hold at the same nonzero constants."""
    for table in tables:
        found = condition.of(table.cases)
        if found is None or any(b is not None and a != b for a, b in zip(found.tolist(), truly(fault, table), strict=True)):
            return False
    return True


@dataclass(frozen=True)
class Measured:
    """How well a fault was found again.

    Attributes:
        found: the search.
        named: whether a condition shown holds at the same nonzero constants as the planted one, among all looked at.
        still: whether it does so also at the next n, of which nothing was looked at.
        cases: how many cases inside the suggested premise were compared at the next n; 0 without a premise.
        holds: whether the rule is right at all of them.
    """

    found: object
    named: bool
    still: bool
    cases: int
    holds: bool


def measure(fault, *, budget, seconds=5.0):
    """Diagnose one planted fault, the rule being declared below the next n only; then look at the next n."""
    rule = planted(fault)
    comparer = Comparer(rule, call_limit=60)
    done = survey(comparer, budget=60)
    layer = layer_of(comparer, done.finding, budget=seconds)
    found = search(comparer, [finding.row for finding in layer.findings], budget=budget)
    if found is None:
        return Measured(None, False, False, 0, False)
    beyond = Comparer(candidate(on=fault.family, ring=fault.ring)(rule.rule), call_limit=60)
    spaces = fault.family.of_rank(fault.next_n - 1)

    def inside(cases):
        holds = found.premise.of(cases)
        return np.zeros(len(cases), dtype=bool) if holds is None else holds

    def gathered(**choices):
        return gather(beyond, spaces, deadline=perf_counter() + seconds, most_rows=400, most_cases=30_000, **choices)

    named = [one for one in found.conditions if agree(fault, one, found.tables)]
    probed = gathered()
    still = any(agree(fault, one, probed) for one in named) and sum(map(len, probed)) > 0
    again = gathered(keep=inside) if found.premise else []
    return Measured(found, bool(named), still, sum(map(len, again)), not any(table.fails.any() for table in again))


def figures(faults, *, budget, seconds=5.0):
    """One line per fault, and the three sums; printed by the slow test."""
    lines, sums = [], [0, 0, 0]
    for fault in faults:
        one = measure(fault, budget=budget, seconds=seconds)
        good = one.cases > 0 and one.holds
        sums = [a + b for a, b in zip(sums, (one.named, one.still, good), strict=True)]
        premise = one.found.premise.words if one.found and one.found.premise else "none"
        verdict = f"named {one.named!s:5}  at n = {fault.next_n} {one.still!s:5}  premise holds {good!s:5} at {one.cases:,}"
        lines.append(f"{fault.name:30}  {verdict}: {premise}")
    return lines, sums
