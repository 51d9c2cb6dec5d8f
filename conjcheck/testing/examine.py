"""One conjecture examined: the state that its parts share, and the one call that does it all."""

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from itertools import islice
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import DeclarationError, NotationError, OutOfReach
from conjcheck.evidence.derivation import Derivation, derivation
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.compare import Comparer
from conjcheck.testing.diagnose import diagnose
from conjcheck.testing.explain import explain
from conjcheck.testing.finding import Finding, Found
from conjcheck.testing.laws import NoValue, broken_laws, laws_apply
from conjcheck.testing.minimise import Minimum, certified, confirm, descend, layer_of, minimise
from conjcheck.testing.outcome import Outcome
from conjcheck.testing.probe import ProbeCount, level_name, probe_levels, run_probe
from conjcheck.testing.scope import probe_scope, survey_scope, survey_spaces
from conjcheck.testing.survey import Coverage, in_reach, survey
from conjcheck.wording import counted

__all__ = ["EFFORTS", "Effort", "Examination", "examine"]


_LARGEST_N = 12


@dataclass(frozen=True, slots=True)
class Effort:
    """How much work goes into each part; seconds except where said.

    Attributes:
        survey: the survey.
        laws: the laws.
        probe: all probes together.
        draws: how many times the examples of the Hypothesis profile in force are drawn in a random part.
        minimise, layer, diagnosis: after a failure, looking below it, collecting the layer, and asking what all failures have in common.
        most_cases: cases compared per row in a probe, for rules that answer case by case.
        most_classes: the largest space a probe goes to, in classes.
    """

    survey: float
    laws: float
    probe: float
    draws: int
    minimise: float
    layer: float
    diagnosis: float
    most_cases: int
    most_classes: int


EFFORTS = {
    "quick": Effort(2.0, 0.5, 1.0, 1, 5.0, 5.0, 1.0, 500, 800),
    "normal": Effort(10.0, 1.0, 4.0, 1, 20.0, 60.0, 4.0, 2_000, 5_040),
    "thorough": Effort(120.0, 10.0, 60.0, 50, 240.0, 120.0, 60.0, 20_000, 40_320),
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
            minimum = certified(done.finding, self.coverage, self.coverage.cases + done.in_row)
            return self.work_out(done.finding, "survey", started, minimum=minimum)
        coverage = self.coverage
        if not coverage.rows:
            return Outcome(self.conjecture, "survey", "undefined", _nothing(coverage), survey_spaces(coverage))
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
            spaces=_spaces(coverage),
        )

    def laws(self, *, seed: int | None = None) -> Outcome | None:
        """Hold the rule against the laws on drawn rows of small spaces; no oracle takes part unless a law breaks.

        Returns:
            The outcome; ``None`` if no row inside the premise was met.
        """
        started = perf_counter()
        count = ProbeCount(started + self.effort.laws)
        try:
            if spaces := self.small_spaces():
                run_probe(self.law_check(count), spaces, self.comparer, count, seed=seed, draws=self.effort.draws)
        except Found as found:
            return self.work_out(found.finding, "laws", started, count.broken_law)
        return self.laws_agree(count, started)

    def probe(self, spaces: list[FlagVariety], seconds: float, *, seed: int | None = None) -> Outcome | None:
        """Compare rows drawn at random on some spaces; ``None`` if no row inside the premise was met."""
        started = perf_counter()
        count = ProbeCount(started + seconds)
        try:
            run_probe(self.probe_check(count), self.unfinished(spaces), self.comparer, count, seed=seed, draws=self.effort.draws)
        except Found as found:
            return self.work_out(found.finding, f"probe[{level_name(spaces)}]", started)
        return self.probe_agrees(spaces, count, started)

    def case(self, where: Case | Row) -> Outcome:
        """Compare one single case, or row, and nothing else."""
        started = perf_counter()
        conjecture, row = self.conjecture, where.row if isinstance(where, Case) else where
        if where.X not in conjecture.on:
            raise NotationError(f"expected a case on {conjecture.on}, the family of {conjecture.name}, got {where}")
        if isinstance(where, Case) and conjecture.is_classical and any(where.d):
            raise NotationError(f"expected a case with d = 0, since {conjecture.name} is about the classical ring, got {where}")
        with self.comparer.limit:
            if not self.comparer.inside(row) or (isinstance(where, Case) and not self.comparer.admits(where)):
                raise NotationError(f"expected a case inside the premise of {conjecture.name}, got {where}; nothing was compared")
            if isinstance(where, Case):
                finding, cases = self.comparer.case(where), 1
            else:
                result = self.comparer.row(row)
                finding, cases = result.finding, result.cases
        if finding is None and not cases:
            raise NotationError(
                f"expected a row with cases inside the premise of {conjecture.name}, got {where}; nothing was compared"
            )
        if finding is None and isinstance(where, Case) and not self.comparer.speaks_of(where):
            raise NotationError(
                f"expected a case with l(u) + l(v) = l(w) + sum d_i deg q_i, got {where}, where lengths and degrees do not add up; "
                "nothing was compared"
            )
        if finding is None:
            scope = f"the one case {where}" if isinstance(where, Case) else f"the one row {where}, {counted(cases, 'case')}"
            return Outcome(conjecture, "case", "agrees", scope, str(where), 1, cases, seconds=perf_counter() - started)
        return self._describe(Outcome(conjecture, "case", finding.status, "one case", finding=finding), started)

    # -- what a drawn row is checked for --------------------------------------------------------------------------------

    def law_check(self, count: ProbeCount) -> Callable[[Row, int], None]:
        """A check of one row against the laws; raises ``Found``. After the deadline it lets rows pass, unless one failed before."""

        def check(row: Row, choice: int) -> None:
            if count.is_over(row):
                return
            with self.comparer.limit:
                if not self.comparer.inside(row):
                    return
                if finding := self.comparer.premise_trouble(row):
                    count.fail(finding)
                try:
                    broken = next(broken_laws(self.comparer, row, choice), None)
                    suspects, law = (sorted(set(broken.rows)), f"{broken.law}: {broken.detail}") if broken else ([], "")
                except NoValue as error:
                    suspects, law = [error.row], ""
                if suspects:
                    count.broken_law = law
                    finding = next((f for r in suspects if (f := self.comparer.row(r).finding)), None)
                    if finding is None:
                        # No wrong value now, though a law was broken or a value was missing before: the rule is not a function.
                        finding = Finding("unstable", row, detail=law or "the rule gave no value, but gives one when asked again")
                    count.fail(finding)
                if laws_apply(self.comparer, row):
                    count.add(row, 0, 0)

        return check

    def probe_check(self, count: ProbeCount) -> Callable[[Row, int], None]:
        """A check of one row against the oracle; raises ``Found``. After the deadline it lets rows pass, unless one failed before."""

        def check(row: Row, choice: int) -> None:
            if count.is_over(row):
                return
            try:
                with self.comparer.limit:
                    result = self.comparer.row(row, most_cases=self.effort.most_cases)
            except OutOfReach:
                return
            if result.finding:
                count.fail(result.finding)
            if result.cases:
                count.add(row, result.cases, result.nonzero, sampled=not result.complete)

        return check

    # -- spaces for the random parts -------------------------------------------------------------------------------------

    def small_spaces(self) -> list[FlagVariety]:
        """The spaces on which laws are tried."""
        reached = list(islice(in_reach(self.conjecture, last_rank=_LARGEST_N - 1), 60))
        small = [X for X in reached if X.rank <= 4 and X.number_of_classes <= 130]
        return small or sorted(reached, key=lambda X: X.number_of_classes)[:3]

    def levels(self) -> list[tuple[int, list[FlagVariety]]]:
        """The levels of the probe, n rising."""
        return probe_levels(self.conjecture, self.effort.most_classes)

    def unfinished(self, spaces: list[FlagVariety]) -> list[FlagVariety]:
        """The spaces that the survey has not completed; all of them if it has completed them all."""
        complete = {space.X for space in self.coverage.complete}
        return [X for X in spaces if X not in complete] or spaces

    # -- outcomes --------------------------------------------------------------------------------------------------------

    def laws_agree(self, count: ProbeCount, started: float) -> Outcome | None:
        """The outcome of laws that hold; ``None`` if they were tried nowhere."""
        if not count.rows:
            return None
        scope = f"the laws hold around {counted(count.rows, 'row')} drawn at random ({count.distinct:,} distinct)"
        return Outcome(self.conjecture, "laws", "agrees", scope, rows=count.rows, seconds=perf_counter() - started)

    def probe_agrees(self, spaces: list[FlagVariety], count: ProbeCount, started: float) -> Outcome | None:
        """The outcome of a probe that found nothing wrong; ``None`` if it compared nothing."""
        if not count.rows:
            return None
        return Outcome(
            self.conjecture,
            f"probe[{level_name(spaces)}]",
            "agrees",
            probe_scope(spaces, count),
            rows=count.rows,
            cases=count.cases,
            nonzero=count.nonzero,
            seconds=perf_counter() - started,
            spaces=tuple({"space": X.name, "drawn": True} for X in spaces),
        )

    def work_out(
        self, finding: Finding, part: str, started: float, broken_law: str = "", minimum: Minimum | None = None
    ) -> Outcome:
        """From the first failure to the smallest one, confirmed and explained; remembered for the parts that follow."""
        if minimum is None:
            if finding.status != "too-slow":
                finding = descend(self.comparer, finding, budget=self.effort.minimise / 4)
            minimum = minimise(self.comparer, finding, self.coverage, budget=self.effort.minimise)
        finding = minimum.finding
        layer = layer_of(self.comparer, finding, budget=self.effort.layer) if finding.status == "refuted" else None
        diagnosis = diagnose(self.comparer, minimum, layer, budget=self.effort.diagnosis) if layer else None
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
            diagnosis=diagnosis,
            spaces=_spaces(coverage),
        )
        self.failure = self._describe(outcome, started)
        return self.failure

    def _describe(self, outcome: Outcome, started: float) -> Outcome:
        """Confirm the oracle's value and explain the failure."""
        finding = outcome.finding
        if finding and finding.status == "refuted":
            finding, how = confirm(finding)
            outcome = replace(outcome, finding=finding, confirmed_by=how, explanation=explain(self.comparer, finding))
            outcome = replace(outcome, derivation=self._derive(finding.where))
        return replace(outcome, seconds=perf_counter() - started)

    def _derive(self, where: Case | Row) -> Derivation | None:
        """A chain that leads to the oracle's value, where there is a short one."""
        if not isinstance(where, Case) or self.conjecture.is_equivariant:
            return None
        try:
            return derivation(where)
        except OutOfReach:
            return None


def examine(
    conjecture: Conjecture,
    *,
    effort: str = "normal",
    budget: float | None = None,
    seed: int | None = None,
    call_limit: float = 10.0,
    cross_check: bool = False,
) -> list[Outcome]:
    """Examine one conjecture from Python: laws, survey, probes; ends after the first part that finds something wrong.

    Args:
        conjecture: a decorated function.
        effort: ``"quick"``, ``"normal"`` or ``"thorough"``.
        seed: makes the random parts reproducible.
        budget: seconds for the survey, if not those of the effort.
        call_limit: seconds one call of the rule may take.
        cross_check: compute every product of the oracle in two ways.

    Returns:
        The outcomes in the order in which the parts ran; ``print(outcome.verdict)`` says the most important thing of each.
    """
    if not isinstance(conjecture, Conjecture):
        raise DeclarationError(f"expected a function under @candidate or @claim, got {conjecture!r}")
    if effort not in EFFORTS:
        raise DeclarationError(f"expected effort to be one of {', '.join(map(repr, EFFORTS))}, got effort={effort!r}")
    work = replace(EFFORTS[effort], survey=budget) if budget else EFFORTS[effort]
    examination = Examination(conjecture, work, call_limit=call_limit, cross_check=cross_check)
    outcomes: list[Outcome | None] = []
    if conjecture.role == "candidate":
        outcomes.append(examination.laws(seed=seed))  # first, and in no order: a rule that lives on its earlier answers fails here
    if not examination.failure:
        outcomes.append(examination.survey())
    levels = examination.levels()
    for _, spaces in levels:
        if not examination.failure:
            outcomes.append(examination.probe(spaces, examination.effort.probe / len(levels), seed=seed))
    return [outcome.doubted() for outcome in outcomes if outcome]


def _spaces(coverage: Coverage) -> tuple[dict[str, Any], ...]:
    """How far each space was compared, then those in between that were not, in JSON types."""
    last = coverage.spaces[-1].X if coverage.spaces else None
    missed = [X for X in coverage.skipped if last and last > X]
    return (*(s.as_json() for s in coverage.spaces), *({"space": X.name, "out_of_reach": True} for X in missed))


def _nothing(coverage: Coverage) -> str:
    """What to say of a survey without a row: it must not be taken for agreement."""
    where = survey_spaces(coverage) or "no space in reach of the oracle"
    return (
        f"nothing compared: expected a row inside the premise among those reached ({where}), got none; "
        "restrict the family with .where() so that it begins where the premise holds, or raise the budget"
    )
