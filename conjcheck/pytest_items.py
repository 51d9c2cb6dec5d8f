"""The nodes and items of the pytest plug-in: a file, a conjecture in it, and one item per part of its examination."""

from __future__ import annotations

import json
import shlex
import traceback
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import partial
from time import perf_counter
from typing import Any

import pytest
from hypothesis import settings

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import declared_twice, importing, prefer_helpers_of
from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.evidence.record import Record, parse_place, read_record, records_held, stale_words
from conjcheck.evidence.rerun import ask_afresh
from conjcheck.evidence.source import kept_version, rule_hash
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.pytest_state import STATE, seconds
from conjcheck.report.text import replay_line, text_report
from conjcheck.testing.answer import plain_value, shown_value
from conjcheck.testing.covered import covered
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.finding import Finding
from conjcheck.testing.limits import CallInterrupted, CallLimit
from conjcheck.testing.outcome import Outcome, no_verdict
from conjcheck.testing.probe import Check, ProbeCount, gravest, level_name, probe_test
from conjcheck.testing.recorded import hold_to_minimal, recorded
from conjcheck.testing.recording import asked_again, counterexample, recording, write_recording

__all__ = ["ConjectureNode", "PartItem", "PluginFile", "Verdict"]

_IMPORT_LIMIT = 60.0
_NOT_REACHED = "on record as refuted; the budget ended before the counterexample"


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
        if twice := declared_twice(self.path):
            yield BrokenFile.from_parent(self, name="import", problem=twice)
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
        with CallLimit(_IMPORT_LIMIT) as limit:
            limit.started = perf_counter()
            try:
                with importing(self.path):
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
            renewing = bool(config.getoption("--conjcheck-record"))
            yield self._plain_item(
                "recorded", lambda examination: recorded(examination, record, renewing=renewing), expected=record
            )
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
        if isinstance(self.node.parent, PluginFile):
            prefer_helpers_of(self.path.parent.resolve())
        examination = self.node.examination
        if examination.failure and self.name != "case":
            pytest.skip(f"{examination.failure.status} already, see {self.node.name}::{examination.failure.part}")
        if self._make_draws is None:
            super().runtest()
        else:
            self._draw(examination, self._make_draws())
        outcome = self.outcome
        assert outcome is not None, "every part ends in an outcome"
        if outcome.status == "refuted" and self.expected is None:
            outcome = self._asked_afresh(outcome)
        if self._make_draws is not None:
            outcome = replace(outcome, seed=str(self.config.stash[STATE]["seed"]))
        expected = self.expected is not None and outcome.status == "refuted" and self.expected.status == "refuted"
        on_record = bool(self.config.getoption("--conjcheck-record"))
        if expected and self.name == "survey" and not on_record:
            hold_to_minimal(self.expected, outcome)
        if expected:
            outcome = replace(outcome, note="on record as refuted: this is the expected verdict")
        elif self.expected is not None and self.expected.status == "refuted" and outcome.status == "agrees":
            outcome = replace(outcome, note=outcome.note or _NOT_REACHED)
            expected = True
        outcome = outcome.doubted()
        if self.name == "survey" and not on_record and (stale := self._stale()):
            outcome = outcome.noted(stale)
        if on_record and (self.name == "survey" or outcome.minimum) and outcome.status in ("agrees", "refuted"):
            outcome = self._record(outcome)
        self.outcome = outcome
        replay = f"pytest {shlex.quote(self._place())}"
        whole = replay_line(replay, outcome.finding) if outcome.finding else replay
        self.user_properties.append(("conjcheck", json.dumps(outcome.as_json() | {"replay": whole})))
        text = text_report(outcome, replay=replay)
        if outcome.status == "agrees" or expected:
            self.add_report_section("call", "conjcheck", text)
        if outcome.status != "agrees" and not expected:
            raise Verdict(text)

    def _asked_afresh(self, outcome: Outcome) -> Outcome:
        """A refutation, unless the rule says something else when it is asked there first, in another process: then it is unstable."""
        finding, conjecture = outcome.finding, self.node.conjecture
        if finding is None or not isinstance(finding.where, Case):
            return outcome
        answer = ask_afresh(f"{conjecture.file}::{conjecture.name}", finding.where)
        if answer is None or (answer["status"], answer["rule"]) == ("refuted", plain_value(finding.rule)):
            return outcome
        here = "False" if finding.rule is None else shown_value(finding.rule)
        there = f"{answer['status']}, value {answer['rule']}" if finding.rule is not None else answer["status"]
        detail = f"expected one answer for one case, got {here} in this run, and in a process that asks nothing else: {there}"
        found = Finding("unstable", finding.where, detail=detail)
        return replace(outcome, status="unstable", finding=found, layer=None, explanation=None, derivation=None, diagnosis=None)

    def _place(self) -> str:
        """The node as pytest takes it where the user is, whatever the root directory."""
        here, (_, *names) = self.config.invocation_params.dir, self.node.nodeid.split("::")
        path = self.path.relative_to(here) if self.path.is_relative_to(here) else self.path
        return "::".join([str(path), *names])

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

    def _record(self, outcome: Outcome) -> Outcome:
        """Put on record how far the survey got, and the counterexample if there is one; a failure to do so is a note on the verdict."""
        finding, examination = outcome.finding, self.node.examination
        entries = covered(examination.coverage, examination.conjecture, cross_check=examination.cross_check)
        conjecture, found = examination.conjecture, None
        try:
            if changed := kept_version(conjecture.file).changed:
                raise RecordError(f"expected {changed} as it was when the rule was imported, it was changed; run again")
            if finding is not None:
                minimal = outcome.minimum is not None and outcome.minimum.certified
                found = counterexample(finding, conjecture, minimal=minimal, confirmed_by=outcome.confirmed_by)
            with records_held(conjecture):
                made = recording(conjecture, partial(asked_again, examination.comparer), coverage=entries, found=found)
                write_recording(conjecture, made)
            notes = [made.note]
            if made.record.status == "open":
                outcome = replace(outcome, note=outcome.note.removeprefix(_NOT_REACHED).removeprefix("; "))
        except RecordError as error:
            notes = [f"not recorded: {error}"]
        return outcome.noted("; ".join(filter(None, notes)))

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
