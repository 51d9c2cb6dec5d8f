"""The survey: every case, zeros included, of the smallest spaces first, within a budget; it says exactly how far it got."""

from collections.abc import Iterator
from dataclasses import dataclass, field
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import OutOfReach
from conjcheck.geometry.cartan import LARGEST_RANK
from conjcheck.geometry.case import Row, rows
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import engines_for
from conjcheck.testing.compare import Comparer, RowResult
from conjcheck.testing.finding import Finding

__all__ = ["Coverage", "SpaceCoverage", "Survey", "in_reach", "survey"]


_MOST_EMPTY_RANKS = 12


@dataclass(slots=True)
class SpaceCoverage:
    """How far one space was compared.

    Attributes:
        rows_seen: rows passed, in the order of rows, those outside the premise included.
        rows, cases, nonzero: rows with at least one case inside the premise, their cases, and those with a nonzero constant.
        complete: whether no row is left.
    """

    X: FlagVariety
    rows_seen: int = 0
    rows: int = 0
    cases: int = 0
    nonzero: int = 0
    complete: bool = False
    seconds: float = 0.0

    def as_json(self) -> dict[str, Any]:
        """The same in JSON types; ``of`` is the number of rows of the space."""
        return {
            "space": self.X.name,
            "seen": self.rows_seen,
            "of": self.X.number_of_classes**2,
            "rows": self.rows,
            "cases": self.cases,
            "nonzero": self.nonzero,
            "complete": self.complete,
        }


@dataclass(slots=True)
class Coverage:
    """How far a survey got.

    Attributes:
        spaces: the spaces entered, in order; all but the last are complete.
        skipped: spaces of the family that came before the end but are out of reach of every engine.
        whole_family: whether a finite family was compared completely.
        budget: the seconds it was given.
        named: whether the spaces were named by the user, so that others may be missing between them.
    """

    spaces: list[SpaceCoverage] = field(default_factory=list)
    skipped: list[FlagVariety] = field(default_factory=list)
    whole_family: bool = False
    budget: float = 0.0
    named: bool = False

    @property
    def rows(self) -> int:
        """Rows compared."""
        return sum(space.rows for space in self.spaces)

    @property
    def cases(self) -> int:
        """Cases compared."""
        return sum(space.cases for space in self.spaces)

    @property
    def nonzero(self) -> int:
        """Cases compared whose constant is not zero."""
        return sum(space.nonzero for space in self.spaces)

    @property
    def complete(self) -> list[SpaceCoverage]:
        """The spaces compared completely."""
        return [space for space in self.spaces if space.complete]


@dataclass(frozen=True, slots=True)
class Survey:
    """What a survey found.

    Attributes:
        coverage: how far it got.
        finding: the first thing wrong: by the order of cases also the smallest.
        in_row: cases before the finding in its own row; they were compared, too, and agree.
        ran_out: whether the budget ended it before it was through.
    """

    coverage: Coverage
    finding: Finding | None
    in_row: int
    ran_out: bool


def in_reach(
    conjecture: Conjecture,
    skipped: list[FlagVariety] | None = None,
    *,
    last_rank: int = LARGEST_RANK,
    most_spaces: int = 5_000,
    deadline: float = float("inf"),
) -> Iterator[FlagVariety]:
    """The spaces of a conjecture in order, as far as some engine reaches; the others go to ``skipped``.

    Ends before a rank that is out of reach as a whole, that is above ``last_rank``, or that has more than ``most_spaces`` spaces; after
    a dozen ranks without any space; and when the deadline has passed, which is looked at before each rank.
    """
    last = conjecture.on.last_rank
    empty = 0
    for rank in range(1, min(last_rank, last or last_rank) + 1):
        if perf_counter() > deadline:
            return
        spaces = conjecture.on.of_rank(rank)
        reached = [X for X in spaces if engines_for(X)]
        if skipped is not None:
            skipped.extend(X for X in spaces if X not in reached)
        if (spaces and not reached and last is None) or len(spaces) > most_spaces:
            return
        empty = 0 if spaces else empty + 1
        if last is None and empty > _MOST_EMPTY_RANKS:
            return
        yield from reached


def survey(
    comparer: Comparer,
    *,
    budget: float,
    stop_before: Row | None = None,
    coverage: Coverage | None = None,
) -> Survey:
    """Compare all rows in order until something is wrong or the budget is spent.

    Args:
        comparer: what compares.
        budget: seconds.
        stop_before: do not go to this row or beyond it (used to look below a counterexample).
        coverage: go on from here instead of from the beginning; it is extended in place.
    """
    coverage = coverage or Coverage()
    coverage.budget += budget
    deadline = perf_counter() + budget
    done = {space.X: space for space in coverage.spaces}
    skipped: list[FlagVariety] = []
    result, ran_out = None, False
    with comparer.limit:
        for X in in_reach(comparer.conjecture, skipped, deadline=deadline):
            if stop_before and stop_before.X < X:
                break
            space = done.get(X)
            if space is None:
                space = SpaceCoverage(X)
                coverage.spaces.append(space)
            elif space.complete:
                continue
            result, ran_out = _space(comparer, space, deadline, stop_before)
            if result or not space.complete:
                break
        else:
            ran_out = perf_counter() > deadline
            coverage.whole_family = comparer.conjecture.on.last_rank is not None and not skipped and not ran_out
    coverage.skipped = skipped
    return Survey(coverage, result.finding if result else None, result.cases if result else 0, ran_out)


def _space(comparer: Comparer, space: SpaceCoverage, deadline: float, stop_before: Row | None) -> tuple[RowResult | None, bool]:
    """Compare one space from where its coverage ends: (the row with a finding, whether the time ran out)."""
    started = perf_counter()
    try:
        for row in rows(space.X, space.rows_seen):
            if stop_before is not None and not row < stop_before:
                return None, False
            if perf_counter() > deadline:
                return None, True
            try:
                result = comparer.row(row, deadline=deadline)
            except OutOfReach:
                return None, True  # as far as the oracle reaches in this space
            if result.finding:
                return result, False
            if not result.complete:
                return None, True
            space.rows_seen += 1
            space.rows += result.cases > 0
            space.cases += result.cases
            space.nonzero += result.nonzero
        space.complete = True
        return None, False
    finally:
        space.seconds += perf_counter() - started
