"""The one way to compare: a rule against the oracle, a row at a time, zeros included."""

import random
import reprlib
from collections.abc import Container, Iterable, Mapping
from contextlib import nullcontext
from dataclasses import dataclass
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import NotationError
from conjcheck.geometry.case import Case, Row, count_below, count_cases, degrees_of_total, outcomes, place_in_row, read_degree
from conjcheck.geometry.flag_variety import Degree, SchubertClass
from conjcheck.oracle import row_terms
from conjcheck.oracle.engine import RowTerms
from conjcheck.oracle.guard import Watch, watched
from conjcheck.testing.answer import WrongAnswer, count_of, shown_number, shown_objects, truth_of
from conjcheck.testing.asker import Asker
from conjcheck.testing.finding import Finding
from conjcheck.testing.limits import CallInterrupted, CallLimit
from conjcheck.testing.trouble import trouble

__all__ = ["Comparer", "Key", "RowResult"]

Key = tuple[SchubertClass, Degree]

_DOUBTS = 8
_DOUBT_SECONDS = 0.5
"""A wrong answer is asked for again up to eight times, but after half a second only once."""


@dataclass(frozen=True, slots=True)
class RowResult:
    """What comparing one row gave.

    Attributes:
        cases: how many cases were compared and agree.
        nonzero: how many of them have a nonzero constant.
        finding: the first thing wrong, in the order of cases; ``None`` if nothing is.
        complete: whether every case of the row (inside the premise) was compared.
    """

    cases: int
    nonzero: int
    finding: Finding | None
    complete: bool


class Comparer:
    """Compares one conjecture with the oracle.

    Args:
        conjecture: the conjecture.
        call_limit: seconds one call of the rule may take.
        cross_check: ask two engines for every row.

    Use it inside ``with comparer.limit:`` so that calls are limited.
    """

    def __init__(self, conjecture: Conjecture, *, call_limit: float = 10.0, cross_check: bool = False) -> None:
        self.conjecture = conjecture
        self.cross_check = cross_check
        self.limit = CallLimit(call_limit)
        self.asker = Asker(conjecture.is_classical)
        self._is_claim = conjecture.role == "claim"
        self._premise_hangs = False
        self._oracle: tuple[Asker, ...] = (self.asker,) if self._is_claim else ()
        self._progress: tuple[Key | None, int, int] = None, 0, 0

    def inside(self, row: Row) -> bool:
        """Whether the premise on rows holds (a premise on cases is asked case by case).

        A premise that raises or hangs counts as holding: then ``Comparer.row`` meets that and reports it.
        """
        premise = self.conjecture.premise
        if premise is None or not self.conjecture.premise_by_rows or self._premise_hangs:
            return True
        try:
            self.limit.started = perf_counter()
            return bool(premise(row.X, row.u, row.v))
        except KeyboardInterrupt:
            raise
        except CallInterrupted:
            self._premise_hangs = True
            return True
        except BaseException:
            return True
        finally:
            self.limit.started = 0.0

    def premise_trouble(self, row: Row) -> Finding | None:
        """The finding if a premise on rows does not answer."""
        premise = self.conjecture.premise
        if premise is None or not self.conjecture.premise_by_rows:
            return None
        try:
            with watched(Watch()):
                self.limit.started = perf_counter()
                premise(row.X, row.u, row.v)
        except KeyboardInterrupt:
            raise
        except BaseException as error:
            return self._settle(self._trouble(row, error))
        finally:
            self.limit.started = 0.0
        return None

    def admits(self, case: Case) -> bool:
        """Whether a premise on cases, if that is what there is, holds; raises what it raises."""
        conjecture = self.conjecture
        if conjecture.premise is None or conjecture.premise_by_rows:
            return True
        tail = (case.w,) if conjecture.is_classical else (case.w, case.d)
        return bool(conjecture.premise(case.X, case.u, case.v, *tail))

    def truth(self, row: Row) -> RowTerms:
        """The oracle's nonzero terms that the conjecture speaks about."""
        terms = row_terms(row.u, row.v, cross_check=self.cross_check)
        return {key: n for key, n in terms.items() if not any(key[1])} if self.conjecture.is_classical else terms

    def row(self, row: Row, *, deadline: float = float("inf"), most_cases: int | None = None) -> RowResult:
        """Compare one row, up to the first thing wrong.

        Args:
            row: the row; outside the premise nothing is compared.
            deadline: stop at this ``perf_counter()`` time, between two calls.
            most_cases: for a rule that answers case by case, compare at most about this many: all nonzero constants, and a sample
                of the zeros that is the same every time.
        """
        return self._compare(row, self.truth(row), deadline=deadline, most_cases=most_cases)

    def findings(self, row: Row, *, deadline: float = float("inf")) -> tuple[list[Finding], bool]:
        """Everything that differs in one row, in order, and whether the whole row was looked at.

        A failure of the whole row is a single finding.
        """
        truth, found = self.truth(row), list[Finding]()
        skipped: set[Key] = set()
        while True:
            result = self._compare(row, truth, deadline=deadline, skipped=skipped)
            if result.finding is None:
                return found, result.complete
            found.append(result.finding)
            if not isinstance(result.finding.where, Case) or result.finding.status != "refuted":
                return found, not isinstance(result.finding.where, Case)
            skipped.add((result.finding.where.w, result.finding.where.d))

    def case(self, case: Case) -> Finding | None:
        """Compare one single case."""
        return self._compare(case.row, self.truth(case.row), only=(case.w, case.d)).finding

    def values(self, row: Row, keys: Iterable[Key]) -> dict[Key, int]:
        """The rule's nonzero values at those of some outcomes of a row that the premise admits; none for a claim.

        A rule that answers by rows gives all its admitted values, also at other outcomes. Raises whatever the rule raises;
        ``Comparer.row`` turns that into a finding.
        """
        if self._is_claim:
            return {}
        by_cases = not self.conjecture.premise_by_rows
        with watched(Watch()):
            try:
                self.limit.started = perf_counter()
                if self.conjecture.by_rows:
                    whole = self._whole(self.conjecture.rule(row.X, row.u, row.v), row)
                    return {key: n for key, n in whole.items() if self.admits(Case(row.X, row.u, row.v, *key))}
                found = {}
                for key in keys:
                    self.limit.started = perf_counter()
                    if by_cases and not self.admits(Case(row.X, row.u, row.v, *key)):
                        continue
                    if count := count_of(self.conjecture.rule(*self._arguments(row, *key))):
                        found[key] = count
                return found
            finally:
                self.limit.started = 0.0

    # -- the comparison itself ---------------------------------------------------------------------------------------

    def _arguments(self, row: Row, w: SchubertClass, d: Degree) -> tuple[Any, ...]:
        """What the rule is called with at one case."""
        tail = (w,) if self.conjecture.is_classical else (w, d)
        return (row.X, row.u, row.v, *tail, *self._oracle)

    def _compare(self, row: Row, truth: RowTerms, **choices: Any) -> RowResult:
        """Compare under guard and limit; whatever ends a call becomes a finding."""
        watch = Watch()
        self._progress = None, 0, 0
        try:
            with nullcontext() if self._is_claim else watched(watch):
                result = self._walk(row, truth, **choices)
        except KeyboardInterrupt:
            raise
        except BaseException as error:  # whatever else ends a call, SystemExit and pytest.skip included, is the rule's doing
            self.limit.started = 0.0
            key, cases, nonzero = self._progress
            place = Case(row.X, row.u, row.v, *key) if key else row
            result = RowResult(cases, nonzero, self._settle(self._trouble(place, error)), False)
        finally:
            self.limit.started = 0.0
        if watch.asked:
            finding = Finding("not-independent", row, detail="the rule asked the oracle that is meant to judge it")
            return RowResult(result.cases, result.nonzero, finding, False)
        if result.finding:
            return RowResult(result.cases, result.nonzero, self._settle(result.finding), result.complete)
        return result

    def _walk(
        self,
        row: Row,
        truth: RowTerms,
        *,
        deadline: float = float("inf"),
        most_cases: int | None = None,
        skipped: Container[Key] = (),
        only: Key | None = None,
    ) -> RowResult:
        """The comparison itself: the rule's answers against the truth, outcome by outcome."""
        conjecture, limit, claimed, oracle = self.conjecture, self.limit, self._is_claim, self._oracle
        rule, classical = conjecture.rule, conjecture.is_classical
        X, u, v = row.X, row.u, row.v
        limit.started = perf_counter()
        if conjecture.premise is not None and conjecture.premise_by_rows and not conjecture.premise(X, u, v):
            return RowResult(0, 0, None, True)
        premise = None if conjecture.premise_by_rows else conjecture.premise
        size = count_cases(X, u.length + v.length, classical=classical)
        values: RowTerms | None = None
        complete, agreeing = only is None, 0
        keys: Iterable[Key]
        if conjecture.by_rows:
            answer = rule(X, u, v, *oracle)
            if claimed:
                holds = truth_of(answer)
                finding = None if holds else Finding("refuted", row, detail="the claim is false for this product")
                return RowResult(size * holds, len(truth) * holds, finding, True)
            values = self._whole(answer, row)
            if values == truth and premise is None:
                return RowResult(size, len(truth), None, complete)
            if premise is None:
                keys = sorted({*values, *truth}, key=place_in_row)
                agreeing = max(size - len(keys), 0)
            else:
                keys = sorted({*values, *outcomes(X, u.length + v.length, classical=classical)}, key=place_in_row)
        elif most_cases is not None and size > most_cases:
            keys, complete = _sample(row, truth, most_cases, classical), False
        else:
            keys = outcomes(X, u.length + v.length, classical=classical)
        if only is not None:
            keys = [only]
        cases = nonzero = 0
        for key in keys:
            self._progress = key, cases, nonzero
            if skipped and key in skipped:
                continue
            w, d = key
            limit.started = started = perf_counter()
            if started > deadline:
                return RowResult(cases, nonzero, None, False)
            if premise is not None and not (premise(X, u, v, w) if classical else premise(X, u, v, w, d)):
                continue
            true = truth.get(key, 0)
            if values is not None:
                count = values.get(key, 0)
            else:
                answer = rule(X, u, v, w, *oracle) if classical else rule(X, u, v, w, d, *oracle)
                if claimed:
                    count = true if truth_of(answer) else -1
                else:
                    count = answer if type(answer) is int and answer >= 0 else count_of(answer)
            if count != true:
                limit.started = 0.0
                if values is not None and premise is None:
                    cases = count_below(X, u.length + v.length, key, classical=classical)
                return RowResult(cases, nonzero, self._difference(Case(X, u, v, w, d), count, true), complete)
            cases += 1
            if true:
                nonzero += 1
        return RowResult(cases + agreeing, nonzero, None, complete)

    def _whole(self, answer: Any, row: Row) -> RowTerms:
        """A rule's answer for a whole row as ``{(w, d): count}``, zeros dropped.

        Raises:
            WrongAnswer: no mapping, a key that is no outcome, or a value that is no count.
        """
        expected = "{w: count}" if self.conjecture.is_classical else "{(w, d): count}"
        if not isinstance(answer, Mapping):
            raise WrongAnswer(
                f"expected a mapping {expected} for a whole product, got {type(answer).__name__} {reprlib.repr(answer)}"
            )
        zero = (0,) * len(row.X.marked)
        values: RowTerms = {}
        for key, value in answer.items():
            try:
                w, d = (key, zero) if self.conjecture.is_classical else key
                if type(w) is not SchubertClass or w.variety is not row.X:
                    raise NotationError(f"w={w!r} is no class of {row.X}")
                d = read_degree(row.X, d)
            except (TypeError, ValueError, NotationError) as error:
                raise WrongAnswer(f"expected keys as in {expected}, got the key {reprlib.repr(key)} ({error})") from None
            if (w, d) in values:
                raise WrongAnswer(f"expected one value for each outcome, got two keys for {w!r} and d={d}")
            values[w, d] = value if type(value) is int and value >= 0 else count_of(value)
        return {key: count for key, count in values.items() if count}

    def _difference(self, place: Case, count: int, true: int) -> Finding:
        """The finding for two values that differ, with the rule's objects if it gives objects."""
        if self._is_claim:
            return Finding("refuted", place, None, true, f"the claim is false here; the constant is {true}")
        conjecture = self.conjecture
        if conjecture.by_rows:
            answer = conjecture.rule(place.X, place.u, place.v)
            answer = answer.get(place.w if conjecture.is_classical else (place.w, place.d), 0)
        else:
            answer = conjecture.rule(*self._arguments(place.row, place.w, place.d))
        try:
            objects = shown_objects(answer)
        except WrongAnswer:
            objects = None
        return Finding("refuted", place, count, true, f"the rule gives {shown_number(count)}, the oracle {true}", objects)

    def _trouble(self, place: Case | Row, error: BaseException) -> Finding:
        return trouble(place, error, limit=self.limit.seconds, file=self.conjecture.file)

    def _settle(self, finding: Finding) -> Finding:
        """Call the rule again at the same place, some times: if the answer is another one now, that is the finding."""
        if finding.status in ("too-slow", "not-independent", "unstable"):
            return finding
        first, until = self._portrait(finding), perf_counter() + _DOUBT_SECONDS
        for _ in range(_DOUBTS):
            again = self._answer_again(finding.where)
            if again != first:
                detail = f"expected one answer for one case, got {first}, and another time {again}"
                return Finding("unstable", finding.where, detail=detail)
            if perf_counter() > until:
                break
        return finding

    def _portrait(self, finding: Finding) -> str:
        if finding.status == "refuted":
            return "False" if self._is_claim else shown_number(finding.rule or 0)
        return _kind_of_trouble(finding)

    def _answer_again(self, place: Case | Row) -> str:
        rule, row = self.conjecture.rule, place.row if isinstance(place, Case) else place
        conjecture = self.conjecture
        with nullcontext() if self._is_claim else watched(Watch()):
            try:
                self.limit.started = perf_counter()
                if conjecture.premise is not None and conjecture.premise_by_rows:
                    conjecture.premise(row.X, row.u, row.v)
                if isinstance(place, Case):
                    self.admits(place)
                if conjecture.by_rows:
                    answer = rule(row.X, row.u, row.v, *self._oracle)
                    if self._is_claim:
                        return str(truth_of(answer))
                    values = self._whole(answer, row)
                    return shown_number(values.get((place.w, place.d), 0)) if isinstance(place, Case) else "an answer"
                if not isinstance(place, Case):
                    return "an answer"
                answer = rule(*self._arguments(row, place.w, place.d))
                return str(truth_of(answer)) if self._is_claim else shown_number(count_of(answer))
            except KeyboardInterrupt:
                raise
            except BaseException as error:
                return _kind_of_trouble(self._trouble(place, error))
            finally:
                self.limit.started = 0.0


def _kind_of_trouble(finding: Finding) -> str:
    """What must be the same when a rule fails twice: of a crash only its type, since messages may hold addresses and counters."""
    return finding.detail.split(":")[0] if finding.status == "crashed" else finding.detail


def _sample(row: Row, truth: RowTerms, most: int, classical: bool) -> list[Key]:
    """All nonzero outcomes of a row and a sample of the others, the same every time, in order."""
    chooser = random.Random(str(row))  # noqa: S311  # a reproducible sample, no secret
    X, total = row.X, row.u.length + row.v.length
    weights: dict[int, tuple[Degree, ...]] = {}
    keys = set(truth)
    for _ in range(max(most - len(truth), 0)):
        w = chooser.choice(X.classes)
        left = total - w.length
        if left not in weights:
            weights[left] = degrees_of_total(X, left) if not classical or left == 0 else ()
        if weights[left]:
            keys.add((w, chooser.choice(weights[left])))
    return sorted(keys, key=place_in_row)
