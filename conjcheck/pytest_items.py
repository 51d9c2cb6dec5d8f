"""The nodes and items of the pytest plug-in: a file, a conjecture in it, and one item per part of its examination."""

from __future__ import annotations

import json
import traceback
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from time import perf_counter
from typing import Any

import pytest
from hypothesis import settings

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import prefer_helpers_of
from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.evidence.record import Record, current_record, parse_place, read_record, stale_words, write_record
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle.guard import Watch, watched
from conjcheck.pytest_state import STATE, seconds
from conjcheck.report.text import replay_line, text_report
from conjcheck.testing.answer import plain_value
from conjcheck.testing.covered import covered
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.finding import Finding
from conjcheck.testing.limits import CallInterrupted, CallLimit
from conjcheck.testing.outcome import Outcome, no_verdict
from conjcheck.testing.probe import Check, ProbeCount, gravest, level_name, probe_test
from conjcheck.testing.recording import counterexample

__all__ = ["ConjectureNode", "PartItem", "PluginFile", "Verdict"]

_IMPORT_LIMIT = 60.0


class Verdict(Exception):
    """A part that fails: its text is the whole report, its first line the verdict."""


class PluginFile(pytest.Module):
    """A file of conjectures. What goes wrong when it is imported is one failing item, and stops nothing else."""

    def collect(self) -> Iterator[pytest.Item | pytest.Collector]:
        """The conjectures, and whatever else pytest finds in the file."""
        problem = self._import_problem()
        if problem:
            yield BrokenFile.from_parent(self, name="import", problem=problem)
            return
        found = list(super().collect())
        if not found:
            text = (
                "expected at least one @candidate or @claim in the file, got none; decorate a function, or give a file of helpers a name "
                "that begins with _"
            )
            yield BrokenFile.from_parent(self, name="import", problem=text)
        yield from found

    def _import_problem(self) -> str:
        """Import the file under a time limit; the text of what went wrong. Helpers beside the file can be imported by their name."""
        prefer_helpers_of(self.path.parent)
        watch = Watch(forbidding=False)
        with CallLimit(_IMPORT_LIMIT) as limit, watched(watch):
            limit.started = perf_counter()
            try:
                _ = self.obj
            except CallInterrupted:
                return f"importing the file took longer than {_IMPORT_LIMIT:g} s"
            except (Exception, SystemExit) as raised:
                error = (raised.__cause__ or raised) if isinstance(raised, self.CollectError) else raised
                frames = [f for f in traceback.extract_tb(error.__traceback__) if f.filename == str(self.path)]
                lines = traceback.format_list(frames) + traceback.format_exception_only(error)
                if type(error).__name__ == "ImportPathMismatchError":
                    lines.append("another module has the name of this file: rename it, or run pytest with --import-mode=importlib")
                return "".join(lines).rstrip()
        self.asked_oracle = watch.asked
        return ""


class BrokenFile(pytest.Item):
    """The failing item of a file, a record or a family that cannot be used."""

    def __init__(self, *, problem: str, **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.problem = problem

    def runtest(self) -> None:
        """Fail."""
        self.user_properties.append(("conjcheck broken", json.dumps({"file": str(self.path), "problem": self.problem})))
        last = self.problem.rstrip().splitlines()[-1].strip()
        what = {"import": "cannot be imported", "record": "record cannot be used"}.get(self.name, "family cannot be listed")
        raise Verdict(f"{what}: {self.path.name}: {last}\n\n{self.problem}")

    def repr_failure(self, excinfo: pytest.ExceptionInfo[BaseException], style: Any = None) -> Any:
        """The problem, without a traceback through pytest."""
        return _plain(excinfo)

    def reportinfo(self) -> tuple[Any, int | None, str]:
        """Where it is."""
        return self.path, 0, f"{self.path.name}: import"


@dataclass(frozen=True)
class Draws:
    """What a drawing part needs when it runs: its count, the check of a row, where to draw, and the outcome if nothing is found."""

    count: ProbeCount
    check: Check
    spaces: list[FlagVariety]
    agrees: Callable[[], Outcome | None]


class ConjectureNode(pytest.Collector):
    """One conjecture: collects its parts."""

    def __init__(self, *, conjecture: Conjecture, **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.conjecture = conjecture
        self.obj = conjecture

    def collect(self) -> Iterator[pytest.Item]:
        """The parts that apply."""
        conjecture, config = self.conjecture, self.config
        case = config.getoption("--conjcheck-case")
        if case:
            yield self._plain_item("case", lambda examination: examination.case(parse_place(case)))
            return
        try:
            record = read_record(conjecture)
        except RecordError as error:
            yield BrokenFile.from_parent(self, name="record", problem=str(error))
            return
        if record.counterexamples:
            yield self._plain_item("recorded", lambda examination: recorded(examination, record), expected=record)
        if record.status == "refuted":
            yield self._plain_item("survey", lambda examination: examination.survey(), expected=record)
            return
        try:
            levels = self.examination.levels()
        except Exception as error:  # the predicate of a family is the user's
            problem = "".join(traceback.format_exception_only(error))
            yield BrokenFile.from_parent(self, name="family", problem=problem)
            return
        if conjecture.role == "candidate":
            yield self._drawing_item("laws", self._laws)
        yield self._plain_item("survey", lambda examination: examination.survey())
        for _, spaces in levels:
            yield self._drawing_item(f"probe[{level_name(spaces)}]", self._probe(spaces, len(levels)))

    @property
    def examination(self) -> Examination:
        """The examination that the parts share."""
        config = self.config
        shared: dict[Conjecture, Examination] = config.stash[STATE]["examinations"]
        if self.conjecture not in shared:
            effort = EFFORTS[config.getoption("--conjcheck-effort") or config.getini("conjcheck_effort")]
            budget = seconds(config, "conjcheck_budget")
            if budget:
                effort = replace(effort, survey=budget)
            shared[self.conjecture] = Examination(
                self.conjecture,
                effort,
                call_limit=seconds(config, "conjcheck_call_limit") or 10.0,
                cross_check=config.getoption("--conjcheck-cross-check"),
            )
        return shared[self.conjecture]

    def _plain_item(self, name: str, work: Callable[[Examination], Outcome], *, expected: Record | None = None) -> PartItem:
        """A part without random draws."""

        def run() -> None:
            item.outcome = work(self.examination)

        item: PartItem = PartItem.from_parent(self, name=name, callobj=run, expected=expected)
        return item

    def _drawing_item(self, name: str, draws: Callable[[], Draws]) -> PartItem:
        """A part that draws: its test function is a Hypothesis test, made now; what it checks is settled when it runs."""
        item: PartItem

        def check(row: Row, choice: int) -> None:
            item.draws.check(row, choice)

        def time_is_up() -> bool:
            return item.draws.count.time_is_up()

        fixed = None if settings().derandomize or self.config.getoption("--hypothesis-seed", None) is not None else self._seed
        examination = self.examination
        test: Any = probe_test(
            check,
            lambda: item.draws.spaces,
            examination.comparer,
            time_is_up,
            fixed_seed=fixed,
            draws=examination.effort.draws,
        )
        test.hypothesis.inner_test._hypothesis_internal_add_digest = f"{self.nodeid}::{name}".encode()  # noqa: SLF001  # one database key per item
        item = PartItem.from_parent(self, name=name, callobj=test, make_draws=draws)
        return item

    @property
    def _seed(self) -> Any:
        return self.config.stash[STATE]["seed"]

    def _laws(self) -> Draws:
        examination, started = self.examination, perf_counter()
        count = ProbeCount(started + examination.effort.laws)
        return Draws(
            count, examination.law_check(count), examination.small_spaces(), lambda: examination.laws_agree(count, started)
        )

    def _probe(self, spaces: list[FlagVariety], share: int) -> Callable[[], Draws]:
        def draws() -> Draws:
            examination, started = self.examination, perf_counter()
            count = ProbeCount(started + examination.effort.probe / share)
            return Draws(
                count,
                examination.probe_check(count),
                examination.unfinished(spaces),
                lambda: examination.probe_agrees(spaces, count, started),
            )

        return draws

    def reportinfo(self) -> tuple[Any, int | None, str]:
        """Where the rule is written."""
        return self.conjecture.file, self.conjecture.line - 1, self.name


def recorded(examination: Examination, record: Record) -> Outcome:
    """Compute the counterexamples on record again, by the rule and by the oracle.

    Raises:
        RecordError: one of them refutes no more, or with other values.
    """
    outcome = None
    for known in record.counterexamples:
        outcome = examination.case(known.where)
        found = outcome.finding
        if found is None or found.status != "refuted":
            what = (
                "the rule and the oracle agree there now" if found is None else f"the rule is {found.status} there: {found.detail}"
            )
            raise RecordError(
                f"stale record: expected {examination.conjecture.name} to be refuted at {known.where}, but {what}; "
                "if the rule was repaired, remove the counterexample from its record"
            )
        values = plain_value(found.rule), plain_value(found.oracle)
        recorded_values = known.rule, known.oracle
        if recorded_values not in (values, (None, None)):
            raise RecordError(
                f"stale record: expected rule {known.rule} and oracle {known.oracle} at {known.where}, "
                f"got rule {values[0]} and oracle {values[1]}; record it anew with --conjcheck-record"
            )
    assert outcome is not None, "a record is only verified when it holds a counterexample"
    return replace(outcome, part="recorded", scope=f"{len(record.counterexamples)} recorded counterexamples")


def _hold_to_minimal(record: Record | None, outcome: Outcome) -> None:
    """A record that calls a counterexample minimal is stale when the survey meets a smaller one."""
    finding = outcome.finding
    for known in record.counterexamples if record and finding else ():
        if finding and known.minimal and finding.where.sort_key < known.where.sort_key:
            raise RecordError(
                f"stale record: expected {known.where} to be the minimal counterexample, as it is on record, but the rule already fails at "
                f"{finding.where}; record it anew with --conjcheck-record"
            )


class PartItem(pytest.Function):
    """One part of an examination."""

    draws: Draws

    def __init__(self, *, expected: Record | None = None, make_draws: Callable[[], Draws] | None = None, **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.expected, self._make_draws = expected, make_draws
        self.outcome: Outcome | None = None

    @property
    def node(self) -> ConjectureNode:
        """The conjecture it belongs to."""
        assert isinstance(self.parent, ConjectureNode)
        return self.parent

    def runtest(self) -> None:
        """Run the part; whatever stops it without a verdict leaves a line in the summary, so that nobody takes it for agreement."""
        try:
            self._run_part()
        except (Verdict, pytest.skip.Exception, KeyboardInterrupt):
            raise
        except BaseException as error:
            line = no_verdict(
                self.node.conjecture, self.name, f"{type(error).__name__}: {str(error).strip().splitlines()[0][:200]}"
            )
            self.user_properties.append(("conjcheck", json.dumps(line)))
            raise

    def _run_part(self) -> None:
        """Run the part, work out what it finds, keep the outcome, and fail unless the status is as expected."""
        examination = self.node.examination
        if examination.failure and self.name != "case":
            pytest.skip(f"{examination.failure.status} already, see {self.node.name}::{examination.failure.part}")
        if self._make_draws is None:
            super().runtest()
        else:
            self._draw(examination, self._make_draws())
        outcome = self.outcome
        assert outcome is not None, "every part ends in an outcome"
        if self._make_draws is not None:
            outcome = replace(outcome, seed=str(self.config.stash[STATE]["seed"]))
        expected = self.expected is not None and outcome.status == "refuted" and self.expected.status == "refuted"
        recording = bool(self.config.getoption("--conjcheck-record"))
        if expected and self.name == "survey" and not recording:
            _hold_to_minimal(self.expected, outcome)
        if expected:
            outcome = replace(outcome, note="on record as refuted: this is the expected verdict")
        elif self.expected is not None and self.expected.status == "refuted" and outcome.status == "agrees":
            outcome = replace(outcome, note="on record as refuted; the budget ended before the counterexample")
            expected = True
        if getattr(self.node.parent, "asked_oracle", False) and self.node.conjecture.role == "candidate":
            warning = (
                "the file asked the oracle while it was imported: the verdict is no more independent than the use made of that"
            )
            outcome = replace(outcome, note=f"{outcome.note}; {warning}" if outcome.note else warning)
        if self.name == "survey" and not recording and (stale := self._stale()):
            outcome = replace(outcome, note=f"{outcome.note}; {stale}" if outcome.note else stale)
        self.outcome = outcome
        replay = f"pytest '{self.node.nodeid}'"
        whole = replay_line(replay, outcome.finding) if outcome.finding else replay
        self.user_properties.append(("conjcheck", json.dumps(outcome.as_json() | {"replay": whole})))
        text = text_report(outcome, replay=replay)
        if outcome.status == "agrees" or expected:
            self.add_report_section("call", "conjcheck", text)
        if recording and (self.name == "survey" or outcome.minimum) and outcome.status in ("agrees", "refuted"):
            self._record(outcome)
        if outcome.status != "agrees" and not expected:
            raise Verdict(text)

    def _draw(self, examination: Examination, draws: Draws) -> None:
        """Run the Hypothesis test of this item."""
        started = perf_counter()
        self.draws = draws
        if finding := self._failed_before(examination):
            self.outcome = examination.work_out(finding, self.name, started)
            return
        try:
            if draws.spaces:
                super().runtest()
        except BaseException as error:
            found = gravest(error)
            if found is None and not draws.count.ended_by(error):
                raise
            if found is None:
                self._keep(draws)
                return
            self.outcome = examination.work_out(found.finding, self.name, started, draws.count.broken_law)
            if self.outcome.finding:
                self._remember(str(self.outcome.finding.where))
            return
        self._keep(draws)

    def _remember(self, where: str | None) -> None:
        """Keep the place of a failure in pytest's cache: other draws may miss it, the next run (``--lf``, say) must not."""
        if (cache := getattr(self.config, "cache", None)) is not None:
            cache.set(f"conjcheck/{self.nodeid}", where)

    def _failed_before(self, examination: Examination) -> Finding | None:
        """What is wrong where this part failed in an earlier run, if anything still is."""
        cache = getattr(self.config, "cache", None)
        where = cache.get(f"conjcheck/{self.nodeid}", None) if cache is not None else None
        try:
            return examination.case(parse_place(where)).finding if isinstance(where, str) else None
        except ConjcheckError:
            return None  # the place is none of this conjecture's any more

    def _keep(self, draws: Draws) -> None:
        """Keep the outcome of a search that found nothing wrong."""
        self._remember(None)
        self.outcome = draws.agrees()
        if self.outcome is None:
            pytest.skip("no row inside the premise was drawn: nothing compared")

    def _record(self, outcome: Outcome) -> None:
        """Put on record how far the survey got, and the counterexample if there is one."""
        finding, examination = outcome.finding, self.node.examination
        entries = covered(examination.coverage, examination.conjecture, cross_check=examination.cross_check)
        record = current_record(examination.conjecture).with_coverage(entries)
        if finding is not None:
            minimal = outcome.minimum is not None and outcome.minimum.certified
            found = counterexample(finding, examination.conjecture, minimal=minimal, confirmed_by=outcome.confirmed_by)
            record = record.with_counterexample(found)
        write_record(examination.conjecture, record)

    def _stale(self) -> str:
        """What on record was computed for another version of the rule."""
        conjecture = self.node.conjecture
        return stale_words(read_record(conjecture), rule_hash(conjecture.file))

    def repr_failure(self, excinfo: pytest.ExceptionInfo[BaseException], style: Any = None) -> Any:
        """A verdict is its own report; anything else is shown as usual."""
        if isinstance(excinfo.value, (Verdict, ConjcheckError)):
            return _plain(excinfo)
        return super().repr_failure(excinfo)

    def reportinfo(self) -> tuple[Any, int | None, str]:
        """Where the rule is written."""
        file, line, name = self.node.reportinfo()
        return file, line, f"{name}::{self.name}"


def _plain(excinfo: pytest.ExceptionInfo[BaseException]) -> Any:
    """The text of an exception as a report without traceback; its first line goes to the short summary."""
    excinfo.value.__notes__ = []  # Hypothesis adds its own account of the example; ours is complete
    shown = excinfo.getrepr(style="value")
    if shown.reprcrash is not None:
        shown.reprcrash.message = str(excinfo.value).splitlines()[0]
    return shown
