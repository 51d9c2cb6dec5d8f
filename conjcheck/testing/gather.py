"""Failures and agreements side by side: what a diagnosis looks at, space by space, as arrays."""

import random
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import chain
from time import perf_counter
from typing import Any

import numpy as np

from conjcheck.errors import EnginesDisagree, OutOfReach
from conjcheck.geometry.case import Case, Row, place_in_row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.calls import Key
from conjcheck.testing.compare import Comparer, Truth, sample_of_row
from conjcheck.testing.features import Cases, Values
from conjcheck.testing.traits import Bools

__all__ = ["Keep", "Table", "gather", "gather_space", "place"]

Keep = Callable[[Cases], Bools]
"""Which cases of some are wanted."""

_MOST_IN_ROW = 400
_ZEROS_IN_ROW = 15
_SMALL_ROW = 60
_CHUNK = 25
_QUICK = 0.05
_LARGEST_VALUE = 2**62


@dataclass(frozen=True, eq=False, slots=True)
class Table:
    """Compared cases of one space.

    Attributes:
        cases: the cases; rows, with w and d of no meaning, for a claim about rows.
        errors: ``(K,)``, the rule's values minus the constants, cut off at 62 bits; all 0 where there is no such difference.
        fails: ``(K,)``, which cases fail.
        informative: ``(K,)``, at which cases the rule or the constant is not 0.
        vanishing: ``(K,)``, at which cases the constant is 0; of rows none.
        rows: the rows they lie in.
    """

    cases: Cases
    errors: Values
    fails: Bools
    informative: Bools
    vanishing: Bools
    rows: frozenset[Row]

    def __len__(self) -> int:
        return len(self.fails)


def place(table: Table, k: int, *, by_rows: bool = False) -> Case | Row:
    """Case number k of a table, 0-based; its row if the table is about rows."""
    c = table.cases
    u, v, w = (c.X.classes[int(index[k])] for index in (c.u, c.v, c.w))
    return Row(c.X, u, v) if by_rows else Case(c.X, u, v, w, tuple(c.d[k].tolist()))


@dataclass(slots=True)
class _Lines:
    """The lines of a table while it grows."""

    lines: list[tuple[Any, ...]] = field(default_factory=list)
    rows: set[Row] = field(default_factory=set)


def gather(
    comparer: Comparer,
    spaces: Sequence[FlagVariety],
    *,
    deadline: float,
    most_rows: int,
    most_cases: int = 60_000,
    first: Iterable[Row] = (),
    skip: frozenset[Row] = frozenset(),
    keep: Keep | None = None,
) -> list[Table]:
    """Compare cases of some spaces, as many as the time allows, which is divided among them.

    Args:
        comparer: what compares.
        spaces: where, in this order.
        deadline: the ``perf_counter()`` time at which it ends.
        most_rows: how many rows inside the premise of each space: all, or a sample that is the same every time.
        most_cases: how many cases altogether, about.
        first: rows that come first in their spaces.
        skip: rows to leave out.
        keep: which cases to compare; all, if ``None``.
    """
    found, chosen = list[Table](), list(first)
    for number, X in enumerate(spaces):
        now, left = perf_counter(), len(spaces) - number
        if now > deadline or most_cases <= 0:
            break
        rows = [row for row in chosen if row.X is X]
        share = max(most_cases // left, 200)
        table = gather_space(
            comparer,
            X,
            deadline=now + (deadline - now) / left,
            most_rows=most_rows,
            most_cases=share,
            first=rows,
            skip=skip,
            keep=keep,
        )
        if len(table):
            found.append(table)
            most_cases -= len(table)
    return found


def gather_space(
    comparer: Comparer,
    X: FlagVariety,
    *,
    deadline: float,
    most_rows: int,
    most_cases: int,
    first: Sequence[Row] = (),
    skip: frozenset[Row] = frozenset(),
    keep: Keep | None = None,
) -> Table:
    """The same on one space."""
    made = _Lines()
    seen = set(skip)
    with comparer.limit:
        for row in chain(first, _some_rows(X)):
            if row in seen:
                continue
            if perf_counter() > deadline or len(made.rows) >= most_rows or len(made.lines) >= most_cases:
                break
            seen.add(row)
            if not comparer.inside(row):
                continue
            try:
                lines = _row(comparer, row, deadline, keep)
            except OutOfReach:
                break
            except (EnginesDisagree, KeyboardInterrupt):
                raise
            except BaseException:  # noqa: S112  # what a rule that is refuted anyway does elsewhere is not this room's business
                continue
            finally:
                comparer.limit.started = 0.0
            if lines:
                made.rows.add(row)
                made.lines += lines
    return _table(comparer, X, made)


def _some_rows(X: FlagVariety) -> Iterator[Row]:
    """All rows in a random order that is the same every time."""
    chooser, size = random.Random(X.name), X.number_of_classes  # noqa: S311  # a reproducible sample, no secret
    numbers = list(range(size * size)) if size <= 200 else (chooser.randrange(size * size) for _ in range(100_000))
    if isinstance(numbers, list):
        chooser.shuffle(numbers)
    for number in numbers:
        yield Row(X, X.classes[number // size], X.classes[number % size])


def _row(comparer: Comparer, row: Row, deadline: float, keep: Keep | None) -> list[tuple[Any, ...]]:
    """The lines ``(u, v, w, *d, constant, largest, error, fails, informative, vanishing)`` of one row."""
    truth = comparer.truth(row)
    counting = not comparer.conjecture.is_equivariant
    largest = max(map(int, truth.values()), default=0) if counting and truth else 0
    head, largest = (row.u.index, row.v.index), min(largest, _LARGEST_VALUE)
    if comparer.is_claim and comparer.conjecture.by_rows:
        zero = (0,) * len(row.X.marked)
        if keep is not None and not keep(_cases(row.X, [(*head, 0, *zero, 0, largest)], counting)).all():
            return []
        return [(*head, 0, *zero, 0, largest, 0, bool(comparer.findings(row)[0]), bool(truth), False)]
    asked = comparer.values(row, []) if comparer.conjecture.by_rows else None
    keys = _keys(comparer, row, truth, asked or {})
    lines: list[tuple[Any, ...]] = [
        (*head, w.index, *d, min(int(truth.get((w, d), 0)), _LARGEST_VALUE) if counting else 0, largest) for w, d in keys
    ]
    if keep is not None and keys:
        wanted = keep(_cases(row.X, lines, counting)).tolist()
        keys = [key for key, yes in zip(keys, wanted, strict=True) if yes]
        lines = [line for line, yes in zip(lines, wanted, strict=True) if yes]
    judged = _judge(comparer, row, keys, truth, asked, deadline)
    return [(*line, *verdict) for line, verdict in zip(lines, judged, strict=False)]


def _keys(comparer: Comparer, row: Row, truth: Truth, asked: dict[Key, Any]) -> list[Key]:
    """The outcomes of a row to be looked at: all of a small row, else the nonzero ones and a sample of the zeros; in order."""
    if comparer.size(row) <= _SMALL_ROW:
        keys = {*comparer.outcomes(row), *asked}
    else:
        keys = {*truth, *asked}
        if len(keys) > _MOST_IN_ROW:
            chooser = random.Random(str(row))  # noqa: S311  # a reproducible sample, no secret
            keys = set(chooser.sample(sorted(keys, key=place_in_row), _MOST_IN_ROW))
        keys.update(key for key in sample_of_row(row, truth, len(truth) + _ZEROS_IN_ROW, comparer.conjecture) if key not in truth)
    return [key for key in sorted(keys, key=place_in_row) if comparer.admits(Case(row.X, row.u, row.v, *key))]


def _judge(
    comparer: Comparer, row: Row, keys: list[Key], truth: Truth, asked: dict[Key, Any] | None, deadline: float
) -> Iterator[tuple[int, bool, bool, bool]]:
    """``(error, fails, informative, vanishing)`` at the outcomes in order, as far as the time reaches."""
    if comparer.is_claim:
        for key in keys:
            if perf_counter() > deadline:
                return
            yield 0, comparer.case(Case(row.X, row.u, row.v, *key)) is not None, key in truth, key not in truth
        return
    counting = not comparer.conjecture.is_equivariant
    start, size = 0, 1
    while start < len(keys) and (began := perf_counter()) <= deadline:
        part = keys[start : start + size]
        values = asked if asked is not None else comparer.values(row, part)
        start += size
        size = min(2 * size, _CHUNK) if perf_counter() - began < _QUICK else 1
        for key in part:
            rule, true = values.get(key, 0), truth.get(key, 0)
            fails = bool(rule != true)
            error = _error(rule, true) if counting and fails else 0
            yield error, fails, bool(rule) or key in truth, key not in truth


def _error(rule: Any, true: Any) -> int:
    """The rule's value minus the constant, cut off where an array could not hold it."""
    return max(min(int(rule) - int(true), _LARGEST_VALUE), -_LARGEST_VALUE)


def _cases(X: FlagVariety, lines: Sequence[tuple[Any, ...]], counting: bool) -> Cases:
    m = len(X.marked)
    array = np.array([line[: 5 + m] for line in lines], dtype=np.int64).reshape(len(lines), 5 + m)
    known = (array[:, 3 + m], array[:, 4 + m]) if counting else (None, None)
    return Cases(X, array[:, 0], array[:, 1], array[:, 2], array[:, 3 : 3 + m], *known)


def _table(comparer: Comparer, X: FlagVariety, made: _Lines) -> Table:
    cases = _cases(X, made.lines, not comparer.conjecture.is_equivariant)
    errors = np.array([line[-4] for line in made.lines], dtype=np.int64)
    fails, informative, vanishing = (np.array([line[k] for line in made.lines], dtype=bool) for k in (-3, -2, -1))
    return Table(cases, errors, fails, informative, vanishing, frozenset(made.rows))
