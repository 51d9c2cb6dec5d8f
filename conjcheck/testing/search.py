"""The search behind a diagnosis: cases are looked at, conditions compared, and premises held against fresh cases.

Failures and agreements are collected up to one rank beyond the smallest failing space; the best short conditions are searched among
all pairs of tests; the premise that keeps most cases is compared again on fresh rows, next rank first. What fails there joins the
cases looked at, and the search is made again, a few times.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from itertools import groupby, islice
from time import perf_counter

import numpy as np

from conjcheck.geometry.case import Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.bank import TestBank
from conjcheck.testing.compare import Comparer
from conjcheck.testing.conditions import Found
from conjcheck.testing.features import FEATURES, Cases, Feature, Values, feature_values
from conjcheck.testing.gather import Table, gather
from conjcheck.testing.own_features import UnusableFeature, own_features
from conjcheck.testing.survey import in_reach
from conjcheck.testing.traits import Bools

__all__ = ["Looked", "Search", "inside", "premises", "search"]

_MOST_CLASSES = 800
_MOST_SPACES = 60
_MOST_ROWS = 700
_MOST_CASES = 60_000
_MOST_RANKS = 7
_FEWEST_FRESH = 20
_FRESH_ROWS = 500
_FRESH_CASES = 30_000
_ROUNDS = 6
_PAIR = 5.0


@dataclass(frozen=True, eq=False)
class Looked:
    """Everything looked at so far, joined."""

    tables: tuple[Table, ...]

    @property
    def fails(self) -> Bools:
        """Which cases fail."""
        return np.concatenate([table.fails for table in self.tables])

    @property
    def informative(self) -> Bools:
        """At which cases the rule or the constant is not 0."""
        return np.concatenate([table.informative for table in self.tables])

    @property
    def known(self) -> int:
        """The number of agreements at which the rule or the constant is not 0."""
        return int((self.informative & ~self.fails).sum())

    @property
    def rows(self) -> frozenset[Row]:
        """The rows they lie in."""
        return frozenset().union(*(table.rows for table in self.tables))


@dataclass(frozen=True, eq=False)
class Search:
    """What was looked at and found, before it is put into words.

    Attributes:
        tables: the cases looked at.
        conditions: the conditions to be shown, best first; ``others`` has for each the words of some that hold at the same cases.
        premise: a premise that stood a fresh comparison, ``None`` if none did; ``fresh`` holds the cases of that comparison.
        refused: how many premises failed it.
        unusable: features of the user that could not be used, and why.
    """

    tables: tuple[Table, ...]
    conditions: tuple[Found, ...] = ()
    others: tuple[tuple[str, ...], ...] = ()
    premise: Found | None = None
    fresh: tuple[Table, ...] = ()
    refused: int = 0
    unusable: tuple[str, ...] = ()


def search(comparer: Comparer, rows: Sequence[Row], *, budget: float) -> Search | None:
    """Look at cases, search conditions, and hold premises against fresh cases.

    Args:
        comparer: what compares.
        rows: failing rows of the smallest failing space, the smallest first; these are looked at first.
        budget: seconds, about; a single slow call of the rule can exceed it.

    Returns:
        What was found; ``None`` if within the budget no failure or no agreement was met.
    """
    started = perf_counter()
    X, first = rows[0].X, list(rows[: _MOST_ROWS // 2])
    tables, beyond = _first_look(comparer, X, first, started, budget)
    looked = Looked(tuple(tables))
    if not tables or not looked.fails.any() or looked.fails.all():
        return None
    premise, refused, fresh = None, 0, list[Table]()
    while True:
        bank, unusable = _bank(comparer, looked)
        conditions = bank.covering()
        left = started + budget - perf_counter()
        if left <= 0 or refused >= _ROUNDS:
            break
        tried = next(iter(premises(bank, conditions, looked.known)), None)
        if tried is None:
            break
        until = perf_counter() + 0.6 * left
        fresh = _fresh(comparer, tried, beyond, looked, until)
        if not fresh and not beyond and perf_counter() < until:
            premise = tried  # everything inside has been looked at
        if not fresh:
            break
        new = Looked(tuple(fresh))
        if not new.fails.any():
            premise = tried if new.known >= _FEWEST_FRESH else None
            break
        refused += 1
        looked = Looked((*looked.tables, *fresh))
    shown = tuple(_shown(bank, conditions, looked))
    others = tuple(bank.others(one) for one in shown)
    return Search(looked.tables, shown, others, premise, tuple(fresh) if premise else (), refused, unusable)


def _fresh(comparer: Comparer, premise: Found, beyond: list[FlagVariety], looked: Looked, deadline: float) -> list[Table]:
    """Cases inside a premise in rows not looked at: in the next rank, and where it has too few in the spaces looked at, largest first."""
    now = perf_counter()
    behind = sorted((table.cases.X for table in looked.tables), reverse=True)
    found: list[Table] = []
    for spaces, share in ((beyond, 0.75), (list(dict.fromkeys(behind)), 1.0)):
        if sum(int(table.informative.sum()) for table in found) >= _FEWEST_FRESH:
            break
        found += gather(
            comparer,
            spaces,
            deadline=now + share * (deadline - now),
            most_rows=_FRESH_ROWS,
            most_cases=_FRESH_CASES,
            skip=looked.rows,
            keep=partial(inside, premise),
        )
    return found


def _first_look(
    comparer: Comparer, X: FlagVariety, first: list[Row], started: float, budget: float
) -> tuple[list[Table], list[FlagVariety]]:
    """Cases up to one rank beyond X, X itself first, and beyond while that is quick; and the spaces of the rank that comes next."""
    conjecture = comparer.conjecture
    below = [Y for Y in in_reach(conjecture, last_rank=X.rank) if Y is not X and Y.number_of_classes <= _MOST_CLASSES]
    near = [X, *sorted(below, key=lambda Y: -Y.rank)]
    tables = gather(
        comparer, _thinned(near), deadline=started + 0.25 * budget, most_rows=_MOST_ROWS, most_cases=_MOST_CASES // 2, first=first
    )
    coming = _ranks_above(comparer, X.rank)
    upcoming, number = next(coming, []), 0
    for after in coming:
        cases = sum(map(len, tables))
        if number and (perf_counter() > started + 0.08 * budget or cases > _MOST_CASES // 6):
            break
        tables += gather(comparer, upcoming, deadline=started + 0.3 * budget, most_rows=_MOST_ROWS, most_cases=_MOST_CASES - cases)
        upcoming, number = after, number + 1
    return tables, upcoming


def _ranks_above(comparer: Comparer, rank: int) -> Iterator[list[FlagVariety]]:
    """The spaces of the next ranks in reach, rank by rank, without the large ones."""
    reached = in_reach(comparer.conjecture, last_rank=rank + _MOST_RANKS)
    for here, spaces in groupby(reached, key=lambda Y: Y.rank):
        small = [Y for Y in spaces if Y.number_of_classes <= _MOST_CLASSES]
        if here > rank and small:
            yield _thinned(small)


def _thinned(spaces: list[FlagVariety]) -> list[FlagVariety]:
    """At most some number of the spaces, evenly chosen, the first one among them."""
    if len(spaces) <= _MOST_SPACES:
        return spaces
    return [spaces[k * len(spaces) // _MOST_SPACES] for k in range(_MOST_SPACES)]


def _bank(comparer: Comparer, looked: Looked) -> tuple[TestBank, tuple[str, ...]]:
    """The tests over everything looked at, and what is wrong with features of the user that are unusable."""
    by_rows = comparer.is_claim and comparer.conjecture.by_rows
    counting = not comparer.conjecture.is_equivariant
    cases = [table.cases for table in looked.tables]
    values, problems = list[tuple[Feature, Values]](), list[str]()
    for feature in (*own_features(comparer.conjecture.features, comparer.limit), *FEATURES):
        if (by_rows and feature.needs == "case") or (not counting and feature.asks):
            if feature.name in comparer.conjecture.features:
                problems.append(f"{feature.name}: it is a feature of cases, and the claim is about whole products")
            continue
        try:
            found = feature_values(feature, cases)
        except UnusableFeature as error:
            problems.append(f"{feature.name}: {error}")
            continue
        if found is not None:
            values.append((feature, found))
    return TestBank(values, looked.fails, looked.informative, _independent(looked)), tuple(problems)


def _independent(looked: Looked) -> tuple[int, int]:
    """The number of pairs {u, v} with a failure, and of those with one where the constant is 0."""
    every = [_pairs(table, table.fails) for table in looked.tables]
    at_zeros = [_pairs(table, table.fails & table.vanishing) for table in looked.tables]
    return sum(every), sum(at_zeros)


def _pairs(table: Table, chosen: Bools) -> int:
    """The number of different pairs {u, v} among some cases of a table."""
    u, v = table.cases.u[chosen], table.cases.v[chosen]
    return len(set(zip(np.minimum(u, v).tolist(), np.maximum(u, v).tolist(), strict=True)))


def premises(bank: TestBank, conditions: Sequence[Found], known: int) -> list[Found]:
    """What is left outside conditions that hold at every failure, as premises: the best conditions first, those on rows before others.

    A premise on cases comes first only if its condition is better than that of any premise on rows by the price of two tests.
    """
    usable = [c for c in conditions if not c.asks and c.informative < known and c.opposite.reaches_on]
    usable.sort(key=lambda c: (2 * _PAIR * (not c.on_rows)) - bank.score(c))
    return [condition.opposite for condition in usable]


def inside(premise: Found, cases: Cases) -> Bools:
    """Where a premise holds; where it makes no sense it does not."""
    holds = premise.of(cases)
    return np.zeros(len(cases), dtype=bool) if holds is None else holds


def _shown(bank: TestBank, conditions: list[Found], looked: Looked) -> list[Found]:
    """The best condition; another one as good with other features; the best single test; a partial one if these say little."""
    shown = conditions[:1]

    def is_new(found: Found) -> bool:
        features = {test.feature for test in found.tests}
        return not any({test.feature for test in one.tests} <= features or bank.same(one, found) for one in shown)

    for best in list(shown):
        as_good = (c for c in conditions if len(c.tests) <= len(best.tests) and c.informative <= best.informative and is_new(c))
        shown += islice(as_good, 1)
        single = (c for c in conditions if len(c.tests) == 1 and is_new(c))
        shown += islice(single, 1)
    fallback = bank.partial(most=1)
    if fallback and (not shown or 2 * shown[0].informative > looked.known):
        shown = [*shown[:2], *fallback]
    return shown
