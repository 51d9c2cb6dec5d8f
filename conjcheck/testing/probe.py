"""The probe: rows drawn at random by Hypothesis on spaces too large to survey, n rising, each n a search of its own."""

from collections.abc import Callable
from dataclasses import dataclass, field
from time import perf_counter
from typing import Any, NoReturn

from hypothesis import HealthCheck, Phase, Verbosity, given, seed, settings
from hypothesis import strategies as st
from hypothesis.errors import HypothesisException, Unsatisfiable

from conjcheck.conjecture.declare import Conjecture
from conjcheck.geometry.case import Row
from conjcheck.geometry.families import Varieties
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.strategies import rows
from conjcheck.testing.compare import Comparer
from conjcheck.testing.finding import STATUSES, Finding, Found, raise_finding
from conjcheck.testing.survey import in_reach

__all__ = ["Check", "ProbeCount", "TimeIsUp", "gravest", "level_name", "probe_levels", "probe_test", "run_probe"]

Check = Callable[[Row, int], None]
"""A check of one drawn row; the integer is free for the check to use. Raises ``Found``."""

_FEWEST_CLASSES = 20
_MOST_LEVELS = 3
_MOST_SPACES = 200
_LAST_RANK = 11


class TimeIsUp(BaseException):
    """Ends a search for rows inside the premise; like Ctrl-C it goes through Hypothesis, and is no failure."""


@dataclass
class ProbeCount:
    """What a random search has compared so far.

    Args:
        deadline: the ``perf_counter()`` time after which rows pass unchecked, unless one has failed.

    Attributes:
        rows: rows compared, drawn independently, repetitions included.
        cases, nonzero: cases compared, and those with a nonzero constant.
        sampled: rows of which not every zero was compared.
        timed_out: whether the deadline was met.
        failed: whether something was found; from then on time limits do not apply, so that shrinking sees one and the same check.
        broken_law: the law that led to it, if one did.
        slow: a finding that took too long to be met twice; a search that has one repeats it instead of calling the rule again.
    """

    deadline: float = float("inf")
    rows: int = 0
    cases: int = 0
    nonzero: int = 0
    sampled: int = 0
    failed: bool = False
    timed_out: bool = False
    broken_law: str = ""
    slow: Finding | None = None
    _seen: set[Row] = field(default_factory=set)

    def add(self, row: Row, cases: int, nonzero: int, *, sampled: bool = False) -> None:
        """Count one row."""
        self.rows += 1
        self.cases += cases
        self.nonzero += nonzero
        self.sampled += sampled
        self._seen.add(row)

    def fail(self, finding: Finding) -> NoReturn:
        """Raise a finding, and remember that there is one."""
        self.failed = True
        if finding.status == "too-slow":
            self.slow = finding
        raise_finding(finding)

    def time_is_up(self) -> bool:
        """Whether the deadline has passed; not after a failure, so that shrinking sees one and the same check."""
        if not self.failed and perf_counter() > self.deadline:
            self.timed_out = True
        return self.timed_out and not self.failed

    def ended_by(self, error: BaseException) -> bool:
        """Whether an exception only says that the search ended: no row to draw, or the time was up, whatever Hypothesis makes of that."""
        return isinstance(error, (TimeIsUp, Unsatisfiable)) or (self.timed_out and isinstance(error, HypothesisException))

    def is_over(self, row: Row) -> bool:
        """Whether a row need not be checked any more: the time is up, or a call was too slow (then that row fails again, unasked)."""
        if self.slow is not None:
            if row == self.slow.row:
                raise_finding(self.slow)
            return True
        return self.time_is_up()

    @property
    def distinct(self) -> int:
        """Number of different rows."""
        return len(self._seen)

    @property
    def bound(self) -> float:
        """The largest share p of failing rows with ``(1 - p)^rows >= 0.05``: 95 % confidence after no failure at all."""
        return float(1 - 0.05 ** (1 / self.rows)) if self.rows else 1.0


def probe_levels(conjecture: Conjecture, most_classes: int) -> list[tuple[int, list[FlagVariety]]]:
    """The levels of a probe: up to three n, rising, with the spaces of 20 classes or more that the oracle serves quickly.

    With more than three n to choose from, the smallest, the middle and the largest are taken.
    """
    levels: dict[int, list[FlagVariety]] = {}
    for X in in_reach(conjecture, last_rank=_LAST_RANK, most_spaces=_MOST_SPACES):
        if X.number_of_classes > most_classes or (X.n == 8 and len(X.marked) > 1 and most_classes < 40_320):
            continue
        if X.number_of_classes >= _FEWEST_CLASSES:
            levels.setdefault(X.n, []).append(X)
    chosen = sorted(levels)
    if len(chosen) > _MOST_LEVELS:
        chosen = [chosen[0], chosen[len(chosen) // 2], chosen[-1]]
    return [(n, levels[n]) for n in chosen]


def level_name(spaces: list[FlagVariety]) -> str:
    """``n=5``, or ``rank=4`` where not all spaces are of type A."""
    first = spaces[0]
    return f"n={first.n}" if all(X.kind.letter == "A" for X in spaces) else f"rank={first.rank}"


def probe_test(
    check: Check,
    spaces: Callable[[], list[FlagVariety]],
    comparer: Comparer,
    time_is_up: Callable[[], bool],
    *,
    fixed_seed: int | None = None,
    draws: int = 1,
    **choices: Any,
) -> Callable[[], None]:
    """A Hypothesis test without arguments that draws rows and checks them.

    Args:
        check: called with each row and a free integer.
        spaces: called at the first draw: where to draw.
        comparer: whose premise is respected.
        time_is_up: when it says so, the search for rows inside the premise ends.
        fixed_seed: makes the draws reproducible; ``None`` leaves the choice to Hypothesis.
        draws: how many times the examples of the profile are drawn.
        choices: further Hypothesis settings; the others are those of the profile in force.
    """
    conjecture = comparer.conjecture

    def inside(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> bool:
        if time_is_up():
            raise TimeIsUp
        with comparer.limit:
            return comparer.inside(Row(X, u, v))

    def strategy() -> st.SearchStrategy[Row]:
        premise = inside if conjecture.premise and conjecture.premise_by_rows else None
        return rows(on=Varieties(*spaces()), premise=premise, classical=conjecture.is_classical)

    profile = settings()

    @settings(
        profile,
        deadline=None,
        max_examples=profile.max_examples * draws,
        suppress_health_check=list(HealthCheck),
        print_blob=False,
        **choices,
        phases=[phase for phase in profile.phases if phase is not Phase.explain],
    )
    @given(row=st.deferred(strategy), choice=st.integers(0, 2**16))
    def probe(row: Row, choice: int) -> None:
        check(row, choice)

    return seed(fixed_seed)(probe) if fixed_seed is not None else probe


def run_probe(
    check: Check, spaces: list[FlagVariety], comparer: Comparer, count: ProbeCount, *, seed: int | None = None, draws: int = 1
) -> None:
    """Run the search outside pytest; raises what the check raises at the smallest failure found."""
    quiet = {"database": None, "verbosity": Verbosity.quiet}  # Hypothesis would call the end of the time a failure to be repeated
    test = probe_test(check, lambda: spaces, comparer, count.time_is_up, fixed_seed=seed, draws=draws, **quiet)
    try:
        test()
    except BaseException as error:
        if found := gravest(error):
            raise found from None
        if not count.ended_by(error):
            raise


def gravest(error: BaseException) -> Found | None:
    """The finding to report among all that a search ended with: of the first status, then the smallest; ``None`` if there is none."""
    if isinstance(error, BaseExceptionGroup):
        found = [inner for part in error.exceptions if (inner := gravest(part))]
        return min(found, key=lambda f: (STATUSES.index(f.finding.status), f.finding.row.sort_key), default=None)
    return error if isinstance(error, Found) else None
