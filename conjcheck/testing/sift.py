"""The sieve: all variants of one rule compared together, row by row in **the** order, the dead ones never again.

Walking in the order of ``geometry/case.py`` serves both ends. Small rows come first: they are the cheap ones, and most wrong variants
differ there. And the first row where a variant differs holds its smallest counterexample. The oracle is asked once for a row, for all
variants that are alive.

What survives agrees with the oracle on everything that was compared, so survivors agree with each other there, too. Whether they are one
and the same function is looked for *beyond*: on rows drawn at random from the following spaces, also where no engine reaches.
"""

import random
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import DeclarationError, OutOfReach
from conjcheck.geometry.cartan import LARGEST_RANK
from conjcheck.geometry.case import Row, rows
from conjcheck.geometry.families import Varieties
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import engines_for
from conjcheck.testing.answer import plain_value
from conjcheck.testing.compare import Comparer, RowResult, Truth, sample_of_row
from conjcheck.testing.finding import Finding
from conjcheck.testing.scope import survey_scope
from conjcheck.testing.survey import Coverage, survey
from conjcheck.wording import counted

__all__ = ["Beyond", "DeadVariant", "Sifted", "sift"]

_SHARE_OF_THE_WALK = 0.75
_MOST_SPACES, _MOST_RANKS, _MOST_CLASSES = 8, 4, 3_000
_MOST_ROWS, _MOST_CASES, _MOST_DRAWS = 300, 300, 500
"""Beyond the walk: spaces, ranks and classes of a space; rows, cases of one row, and draws until one is inside the premise."""

_PATIENCE = 0.5
"""A space on which the oracle once took more seconds for a row than this is looked at without it."""

Watching = Callable[[str, float], None]
"""Told the place and the share of the budget that is spent."""


@dataclass(frozen=True, slots=True)
class DeadVariant:
    """A variant that failed.

    Attributes:
        conjecture: the variant; ``conjecture.choice`` tells which.
        finding: what is wrong: its smallest counterexample, or the first place where it gave no answer.
        below: how many smaller cases were compared and agree; of a failure that was found beyond the walk, all cases of the walk.
        minimal: whether everything smaller was compared and agrees.
    """

    conjecture: Conjecture
    finding: Finding
    below: int
    minimal: bool

    @property
    def behaviour(self) -> tuple[Any, ...]:
        """Equal for two variants that died alike: at one place, with one answer."""
        told = str(self.finding.rule) if self.finding.status == "refuted" else self.finding.detail
        return self.finding.where, self.finding.status, told


@dataclass(slots=True)
class Beyond:
    """What was looked at beyond the walk, to tell survivors from each other.

    Attributes:
        spaces: where rows were drawn.
        rows, judged: how many different rows, and on how many of them the oracle was asked, too.
        cases: how many single cases, where a rule answers case by case: of a long row only a sample.
        splits: the rows at which survivors differ and no engine reaches; their smallest tells them apart soonest.
    """

    spaces: list[FlagVariety] = field(default_factory=list)
    rows: int = 0
    judged: int = 0
    cases: int = 0
    splits: list[Row] = field(default_factory=list)

    def in_words(self) -> str:
        """One line."""
        if not self.rows:
            return "nothing"
        where = f"{self.spaces[0]} to {self.spaces[-1]}" if len(self.spaces) > 1 else str(self.spaces[0])
        cases = f", {counted(self.cases, 'case')} of them" if self.cases else ""
        return f"{counted(self.rows, 'row')} drawn at random on {where}{cases}; {self.judged:,} of the rows compared with the oracle, too"


@dataclass(frozen=True, slots=True)
class Sifted:
    """What is left of the variants of a rule.

    Attributes:
        conjecture: the rule as declared.
        survivors: the variants that never failed, in classes of equal values on everything that was looked at beyond.
        dead: the others, in the order of their counterexamples.
        coverage: what was compared in order: all of it by every survivor.
        scope: the same in words that can be quoted.
        beyond: what was looked at beyond.
        seconds: how long it took.
    """

    conjecture: Conjecture
    survivors: tuple[tuple[Conjecture, ...], ...]
    dead: tuple[DeadVariant, ...]
    coverage: Coverage
    scope: str
    beyond: Beyond
    seconds: float

    @property
    def alike(self) -> tuple[tuple[DeadVariant, ...], ...]:
        """The dead variants in classes: at one place with one answer, right at everything smaller."""
        classes: dict[tuple[Any, ...], list[DeadVariant]] = {}
        for one in self.dead:
            classes.setdefault(one.behaviour, []).append(one)
        return tuple(map(tuple, classes.values()))

    def as_json(self) -> dict[str, Any]:
        """The same in JSON types; values of open choices as Python would write them."""
        return {
            "conjecture": self.conjecture.name,
            "file": self.conjecture.file,
            "variants": self.conjecture.number_of_variants,
            "choices": {name: list(map(repr, values)) for name, values in self.conjecture.variants.items()},
            "scope": self.scope,
            "spaces": [space.as_json() for space in self.coverage.spaces],
            "survivors": [[_choice(one) for one in group] for group in self.survivors],
            "beyond": {
                "spaces": [X.name for X in self.beyond.spaces],
                "rows": self.beyond.rows,
                "judged": self.beyond.judged,
                "cases": self.beyond.cases,
                "splits": [str(row) for row in self.beyond.splits],
            },
            "dead": [
                {
                    "choice": _choice(one.conjecture),
                    "status": one.finding.status,
                    "where": str(one.finding.where),
                    "rule": plain_value(one.finding.rule),
                    "oracle": plain_value(one.finding.oracle),
                    "detail": one.finding.detail,
                    "below": one.below,
                    "minimal": one.minimal,
                }
                for one in self.dead
            ],
            "seconds": round(self.seconds, 3),
        }


def sift(
    conjecture: Conjecture,
    *,
    spaces: Iterable[FlagVariety] | None = None,
    budget: float = 30.0,
    call_limit: float = 5.0,
    seed: int = 0,
    watching: Watching | None = None,
) -> Sifted:
    """Compare all variants of a rule with the oracle, and drop each where it first fails.

    Args:
        conjecture: a candidate with ``variants=``; one without any is its own only variant.
        spaces: walk through these spaces of its family instead of through all of it.
        budget: seconds. The walk takes three quarters of it, all of it if one variant is left.
        call_limit: seconds that one call of a variant may take.
        seed: chooses the rows beyond.
        watching: is told the place and the share of the budget that is spent.

    Cost: a dead variant costs the rows up to its counterexample, a survivor all of them, the oracle one product for each row.

    Raises:
        DeclarationError: a claim, or a space that the conjecture does not speak about.
    """
    if conjecture.role != "candidate":
        raise DeclarationError(f"expected a candidate to sift, got the claim {conjecture.name}; claims have no variants")
    named = None if spaces is None else sorted(set(spaces))
    far = [X for X in named or () if not engines_for(X)]
    if strange := [X for X in named or () if X not in conjecture.on]:
        raise DeclarationError(f"expected spaces of {conjecture.on}, got {strange[0]}")
    if named is not None and not named:
        raise DeclarationError("expected at least one space, got none")
    started = perf_counter()
    variants = list(conjecture.all_variants()) if conjecture.variants else [conjecture]
    written = {replace(one, on=Varieties(*named)) if named else one: one for one in variants}
    together = _Together(list(written), call_limit, started, budget, watching)
    coverage = together.coverage
    walk = survey(together, budget=budget * _SHARE_OF_THE_WALK, coverage=coverage)
    if walk.ran_out and len(together.living) == 1:
        survey(together, budget=max(started + budget - perf_counter(), 0.0), coverage=coverage)
    coverage.budget = budget
    beyond = Beyond()
    classes = [tuple(together.living)]
    if len(together.living) > 1:
        classes = _look_beyond(together, conjecture, beyond, seed, started + budget)
    if named is not None:
        coverage.whole_family = False
    scope = survey_scope(coverage, conjecture) if coverage.rows else "no row that a variant got through"
    if named is not None and coverage.rows:
        scope = f"of the {'space' if len(named) == 1 else f'{len(named)} spaces'} named: {scope}"
    if far:
        scope += f"; out of reach of every engine, of the spaces named: {', '.join(X.name for X in far)}"
    gaps = min(coverage.skipped, default=None)
    dead = [
        replace(one, conjecture=written[one.conjecture], minimal=one.minimal and not (gaps and gaps < one.finding.row.X))
        for one in together.dead
    ]
    return Sifted(
        conjecture,
        tuple(tuple(written[one.conjecture] for one in group) for group in classes if group),
        tuple(sorted(dead, key=lambda one: one.finding.where.sort_key)),
        coverage,
        scope,
        beyond,
        perf_counter() - started,
    )


class _Together(Comparer):
    """All living variants as one: a row agrees as long as one of them agrees, and the others are noted as dead.

    Args:
        variants: what to compare; they differ in nothing but the rule.
        call_limit, started, budget, watching: see ``sift``.
    """

    def __init__(
        self, variants: Sequence[Conjecture], call_limit: float, started: float, budget: float, watching: Watching | None
    ) -> None:
        super().__init__(variants[0], call_limit=call_limit)
        self.living = [Comparer(variant, call_limit=call_limit) for variant in variants]
        for one in self.living:
            one.limit = self.limit
        self.dead: list[DeadVariant] = []
        self.coverage = Coverage()
        self._clock, self._watching = (started, budget), watching

    def row(
        self, row: Row, *, deadline: float = float("inf"), most_cases: int | None = None, truth: Truth | None = None
    ) -> RowResult:
        """Compare one row: what a survivor found, or the finding of the last variant that was alive.

        If the time runs out on the way the row counts as not compared; who has died in it is dead all the same.
        """
        self.tell(str(row.X))
        if not self.inside(row):
            return RowResult(0, 0, None, True)
        if self._premise_hangs and (finding := self.premise_trouble(row)):
            for one in self.living:
                self.bury(one, finding, 0, minimal=True)
            self.living = []
            return RowResult(0, 0, finding, False)
        truth = self.truth(row) if truth is None else truth
        agreed, waiting = None, self.living
        self.living = []
        for k, one in enumerate(waiting):
            late = perf_counter() > deadline
            result = RowResult(0, 0, None, False) if late else one.row(row, truth=truth, deadline=deadline, most_cases=most_cases)
            if result.finding is not None:
                self.bury(one, result.finding, result.cases, minimal=True)
            elif result.complete:
                self.living.append(one)
                agreed = result
            else:
                self.living += waiting[k:]
                return RowResult(0, 0, None, False)
        return agreed or RowResult(0, 0, self.dead[-1].finding, False)

    def bury(self, one: Comparer, finding: Finding, in_row: int, *, minimal: bool) -> None:
        """Note that a variant is dead."""
        self.dead.append(DeadVariant(one.conjecture, finding, self.coverage.cases + in_row, minimal))

    def tell(self, place: str) -> None:
        """Say where we are."""
        if self._watching is not None:
            started, budget = self._clock
            share = min((perf_counter() - started) / budget, 1.0) if budget > 0 else 1.0
            self._watching(f"{place}, {len(self.living)} alive", share)


def _look_beyond(
    together: _Together, conjecture: Conjecture, beyond: Beyond, seed: int, deadline: float
) -> list[tuple[Comparer, ...]]:
    """Compare the survivors beyond the walk, with each other and, where it is quick, with the oracle: their classes."""
    classes = [tuple(together.living)]
    place, spaces = _following(together.coverage, conjecture)
    chooser, slow, seen = random.Random(seed), set[FlagVariety](), set[Row]()  # noqa: S311  # reproducible, no secret
    with together.limit:
        for k in range(_MOST_ROWS if spaces else 0):
            row = _drawn(together, spaces[k % len(spaces)], chooser)
            if perf_counter() > deadline or len(together.living) < 2:
                break
            if row is None or row in seen or (place is not None and row < place):
                continue
            together.tell(str(row.X))
            seen.add(row)
            truth = _quick_truth(together, row, slow)
            answers = _answers(together, row, truth)
            parted = [part for group in classes for part in _parted(group, answers)]
            if len(parted) > sum(any(one in answers for one in group) for group in classes):
                beyond.splits.append(row)
            classes = parted
            beyond.rows += 1
            beyond.judged += truth is not None
            if not conjecture.by_rows:
                beyond.cases += min(together.size(row), _MOST_CASES)
    beyond.spaces = sorted({row.X for row in seen})
    beyond.splits.sort()
    return classes


def _following(coverage: Coverage, conjecture: Conjecture) -> tuple[Row | None, list[FlagVariety]]:
    """The first row that was not compared, if there is a space that was begun, and the next spaces of the family from there on."""
    if not coverage.spaces:
        return None, []
    last = coverage.spaces[-1]
    X, found = last.X, [] if last.complete else [last.X]
    end = min(X.rank + _MOST_RANKS, conjecture.on.last_rank or LARGEST_RANK, LARGEST_RANK)
    for rank in range(X.rank, end + 1):
        found += [Y for Y in conjecture.on.of_rank(rank) if X < Y and Y.number_of_classes <= _MOST_CLASSES]
    return None if last.complete else next(rows(X, last.rows_seen)), found[:_MOST_SPACES]


def _drawn(together: _Together, X: FlagVariety, chooser: random.Random) -> Row | None:
    """A row of X inside the premise, if one turns up soon."""
    for _ in range(_MOST_DRAWS):
        row = Row(X, chooser.choice(X.classes), chooser.choice(X.classes))
        if together.inside(row):
            return row
    return None


def _quick_truth(together: _Together, row: Row, slow: set[FlagVariety]) -> Truth | None:
    """The oracle's terms of a row, unless it is out of reach, or was slow on this space; such a space is noted as slow."""
    if row.X in slow or not engines_for(row.X):
        return None
    started, truth = perf_counter(), None
    try:
        truth = together.truth(row)
    except OutOfReach:
        slow.add(row.X)
    if perf_counter() - started > _PATIENCE:
        slow.add(row.X)
    return truth


def _answers(together: _Together, row: Row, truth: Truth | None) -> dict[Comparer, Any]:
    """What each survivor answers on a row beyond the walk, or on a sample of its cases; who differs from the truth is dead."""
    keys = [] if together.conjecture.by_rows else sample_of_row(row, truth or {}, _MOST_CASES, together.conjecture)
    found: dict[Comparer, Any] = {}
    for one in together.living:
        finding = None
        if truth is not None:
            finding = one.row(row, truth=truth, most_cases=_MOST_CASES).finding
            found[one] = None
        else:
            try:
                found[one] = one.values(row, keys)
            except KeyboardInterrupt:
                raise
            except BaseException as error:  # whatever ends a call is the rule's doing
                finding = one.settle(one.trouble(row, error))
        if finding is not None:
            together.bury(one, finding, 0, minimal=False)
            found.pop(one, None)
    together.living = list(found)
    return found


def _parted(group: tuple[Comparer, ...], answers: dict[Comparer, Any]) -> Iterator[tuple[Comparer, ...]]:
    """The living members of a class, by what they answered."""
    left = [one for one in group if one in answers]
    while left:
        same = [one for one in left if answers[one] == answers[left[0]]]
        yield tuple(same)
        left = [one for one in left if one not in same]


def _choice(conjecture: Conjecture) -> dict[str, str]:
    """The choice of a variant, values as Python would write them."""
    return {name: repr(value) for name, value in conjecture.choice.items()}
