"""One conjecture examined: the state that its parts share, and the one call that does it all."""

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import ConjcheckError
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.compare import Comparer
from conjcheck.testing.explain import explain
from conjcheck.testing.finding import Finding, Found
from conjcheck.testing.laws import NoValue, broken_laws
from conjcheck.testing.minimise import confirm, descend, layer_of, minimise
from conjcheck.testing.outcome import Outcome
from conjcheck.testing.probe import ProbeCount, probe_levels, run_probe
from conjcheck.testing.scope import probe_scope, survey_scope, survey_spaces
from conjcheck.testing.survey import Coverage, in_reach, survey

__all__ = ["EFFORTS", "Effort", "Examination", "examine"]


@dataclass(frozen=True, slots=True)
class Effort:
    """How much work goes into each part; seconds except where said.

    Attributes:
        survey: the survey.
        laws: the laws.
        probe: all probes together.
        minimise, layer: after a failure, looking below it and collecting the layer.
        most_cases: cases compared per row in a probe, for rules that answer case by case.
        most_classes: the largest space a probe goes to, in classes.
    """

    survey: float
    laws: float
    probe: float
    minimise: float
    layer: float
    most_cases: int
    most_classes: int


EFFORTS = {
    "quick": Effort(2.0, 0.5, 1.0, 5.0, 5.0, 500, 800),
    "normal": Effort(10.0, 1.0, 4.0, 20.0, 40.0, 2_000, 5_040),
    "thorough": Effort(120.0, 10.0, 60.0, 240.0, 120.0, 20_000, 40_320),
}
"""The levels of effort by name."""


@dataclass
class Examination:
    """The examination of one conjecture: what its parts have found so far.

    Args:
        conjecture: the conjecture.
        effort: how much work.
        call_limit: seconds one call of the rule may take.
        cross_check: ask two engines everywhere.
    """

    conjecture: Conjecture
    effort: Effort = EFFORTS["normal"]
    call_limit: float = 10.0
    cross_check: bool = False
    coverage: Coverage = field(default_factory=Coverage)
    failure: Outcome | None = None
    """The worked-out failure, once there is one: later parts repeat it instead of searching again."""

    def __post_init__(self) -> None:
        self.comparer = Comparer(self.conjecture, call_limit=self.call_limit, cross_check=self.cross_check)

    # -- the parts ---------------------------------------------------------------------------------------------------

    def survey(self) -> Outcome:
        """Compare everything in order, as far as the budget reaches."""
        started = perf_counter()
        done = survey(self.comparer, budget=self.effort.survey, coverage=self.coverage)
        if done.finding:
            return self.work_out(done.finding, "survey", started)
        coverage = self.coverage
        return Outcome(
            self.conjecture,
            "survey",
            "agrees",
            survey_scope(coverage, self.conjecture),
            survey_spaces(coverage),
            coverage.rows,
            coverage.cases,
            coverage.nonzero,
            seconds=perf_counter() - started,
        )

    def laws(self, *, seed: int | None = None) -> Outcome:
        """Hold the rule against the laws on drawn rows of small spaces; no oracle takes part unless a law breaks."""
        started = perf_counter()
        count = ProbeCount()
        try:
            run_probe(self.law_check(started + self.effort.laws, count), self.small_spaces(), self.conjecture, seed=seed)
        except Found as found:
            return self.work_out(found.finding, "laws", started)
        return self.laws_agree(count, started)

    def probe(self, n: int, spaces: list[FlagVariety], seconds: float, *, seed: int | None = None) -> Outcome:
        """Compare rows drawn at random on some spaces."""
        started = perf_counter()
        count = ProbeCount()
        try:
            run_probe(self.probe_check(started + seconds, count), self.unfinished(spaces), self.conjecture, seed=seed)
        except Found as found:
            return self.work_out(found.finding, f"probe[n={n}]", started)
        return self.probe_agrees(n, spaces, count, started)

    def case(self, where: Case | Row) -> Outcome:
        """Compare one single case, or row, and nothing else."""
        started = perf_counter()
        with self.comparer.limit:
            finding = self.comparer.case(where) if isinstance(where, Case) else self.comparer.row(where).finding
        if finding is None:
            return Outcome(self.conjecture, "case", "agrees", f"the one case {where}", str(where), 1, 1, seconds=perf_counter() - started)
        return self._describe(Outcome(self.conjecture, "case", finding.status, "one case", finding=finding), started)

    # -- what a drawn row is checked for --------------------------------------------------------------------------------

    def law_check(self, deadline: float, count: ProbeCount) -> Callable[[Row, int], None]:
        """A check of one row against the laws; raises ``Found``. After the deadline it lets rows pass, unless one failed before."""

        def check(row: Row, choice: int) -> None:
            if count.is_over(row, deadline):
                return
            with self.comparer.limit:
                if not self.comparer.inside(row):
                    return
                try:
                    broken = next(broken_laws(self.comparer, row, choice), None)
                    suspects, law = (sorted(set(broken.rows)), f"{broken.law}: {broken.detail}") if broken else ([], "")
                except NoValue as error:
                    suspects, law = [error.row], ""
                if suspects:
                    count.broken_law = law
                    finding = next((f for r in suspects if (f := self.comparer.row(r).finding)), None)
                    if finding is None:
                        raise ConjcheckError(f"a rule breaks a law ({law}) on rows where the oracle agrees with it: {suspects}")
                    count.fail(finding)
            count.add(row, 0, 0)

        return check

    def probe_check(self, deadline: float, count: ProbeCount) -> Callable[[Row, int], None]:
        """A check of one row against the oracle; raises ``Found``. After the deadline it lets rows pass, unless one failed before."""

        def check(row: Row, choice: int) -> None:
            if count.is_over(row, deadline):
                return
            with self.comparer.limit:
                result = self.comparer.row(row, most_cases=self.effort.most_cases)
            if result.finding:
                count.fail(result.finding)
            if result.cases:
                count.add(row, result.cases, result.nonzero, sampled=not result.complete)

        return check

    # -- spaces for the random parts -------------------------------------------------------------------------------------

    def small_spaces(self) -> list[FlagVariety]:
        """The spaces on which laws are tried."""
        small: list[FlagVariety] = []
        for X in in_reach(self.conjecture):
            if X.rank > 4 and small:
                break
            if len(X.classes) <= 130:
                small.append(X)
        return small

    def levels(self) -> list[tuple[int, list[FlagVariety]]]:
        """The levels of the probe, n rising."""
        return probe_levels(self.conjecture, self.effort.most_classes)

    def unfinished(self, spaces: list[FlagVariety]) -> list[FlagVariety]:
        """The spaces that the survey has not completed; all of them if it has completed them all."""
        complete = {space.X for space in self.coverage.complete}
        return [X for X in spaces if X not in complete] or spaces

    # -- outcomes --------------------------------------------------------------------------------------------------------

    def laws_agree(self, count: ProbeCount, started: float) -> Outcome:
        """The outcome of laws that hold."""
        scope = f"the laws hold around {count.rows:,} rows drawn at random ({count.distinct:,} distinct)"
        return Outcome(self.conjecture, "laws", "agrees", scope, rows=count.rows, seconds=perf_counter() - started)

    def probe_agrees(self, n: int, spaces: list[FlagVariety], count: ProbeCount, started: float) -> Outcome:
        """The outcome of a probe that found nothing."""
        return Outcome(
            self.conjecture,
            f"probe[n={n}]",
            "agrees",
            probe_scope(n, spaces, count),
            rows=count.rows,
            cases=count.cases,
            nonzero=count.nonzero,
            seconds=perf_counter() - started,
        )

    def work_out(self, finding: Finding, part: str, started: float, broken_law: str = "") -> Outcome:
        """From the first failure to the smallest one, confirmed and explained; remembered for the parts that follow."""
        if part != "survey" and finding.status != "too-slow":
            finding = descend(self.comparer, finding, budget=self.effort.minimise / 4)
        minimum = minimise(self.comparer, finding, self.coverage, budget=self.effort.minimise)
        finding = minimum.finding
        layer = layer_of(self.comparer, finding, budget=self.effort.layer) if finding.status == "refuted" else None
        coverage = self.coverage
        outcome = Outcome(
            self.conjecture,
            part,
            finding.status,
            survey_scope(coverage, self.conjecture),
            survey_spaces(coverage),
            coverage.rows,
            coverage.cases,
            coverage.nonzero,
            finding=finding,
            minimum=minimum,
            layer=layer,
            broken_law=broken_law,
        )
        self.failure = self._describe(outcome, started)
        return self.failure

    def _describe(self, outcome: Outcome, started: float) -> Outcome:
        """Confirm the oracle's value and explain the failure."""
        finding = outcome.finding
        if finding and finding.status == "refuted":
            finding, how = confirm(finding)
            outcome = replace(outcome, finding=finding, confirmed_by=how, explanation=explain(self.comparer, finding))
        return replace(outcome, seconds=perf_counter() - started)


def examine(conjecture: Conjecture, *, effort: str = "normal", seed: int | None = None, **options: Any) -> list[Outcome]:
    """Examine one conjecture from Python: survey, laws, probes; ends after the first part that finds something wrong.

    Args:
        conjecture: a decorated function.
        effort: ``"quick"``, ``"normal"`` or ``"thorough"``.
        seed: makes the random parts reproducible.
        options: ``call_limit=`` seconds, ``cross_check=`` bool.

    Returns:
        The outcomes in the order in which the parts ran; ``print(outcome.verdict)`` says the most important thing of each.
    """
    examination = Examination(conjecture, EFFORTS[effort], **options)
    outcomes = [examination.survey()]
    if conjecture.role == "candidate" and not examination.failure:
        outcomes.append(examination.laws(seed=seed))
    levels = examination.levels()
    for n, spaces in levels:
        if not examination.failure:
            outcomes.append(examination.probe(n, spaces, examination.effort.probe / len(levels), seed=seed))
    return outcomes


