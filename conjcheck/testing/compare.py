"""The one way to compare: a rule against the oracle, a row at a time, zeros included."""

import random
from collections.abc import Iterable
from contextlib import nullcontext
from dataclasses import dataclass
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.geometry.case import Case, Row, degrees_of_total, place_in_row
from conjcheck.geometry.flag_variety import Degree
from conjcheck.oracle import row_terms
from conjcheck.oracle.equivariant import Sampled, equivariant_terms
from conjcheck.oracle.guard import Watch, watched
from conjcheck.testing.answer import Value, WrongAnswer, shown_objects, shown_value, truth_of
from conjcheck.testing.calls import Key, RuleCalls, Values
from conjcheck.testing.finding import Finding

__all__ = ["Comparer", "Key", "RowResult", "Truth", "sample_of_row"]

_MOST_SETTLED = 20
"""Of all failures in one row so many are asked for again: a rule that is no function shows it in the first ones."""

Truth = dict[Key, Any]
"""The oracle's nonzero terms of a row: integers, or sampled polynomials in the equivariant rings."""


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


class Comparer(RuleCalls):
    """Compares one conjecture with the oracle.

    Args:
        conjecture: the conjecture.
        call_limit: seconds one call of the rule may take.
        cross_check: ask two engines for every row.

    Use it inside ``with comparer.limit:`` so that calls are limited.
    """

    def __init__(self, conjecture: Conjecture, *, call_limit: float = 10.0, cross_check: bool = False) -> None:
        super().__init__(conjecture, call_limit=call_limit)
        self.cross_check = cross_check
        self._progress: tuple[Key | None, int, int] = None, 0, 0

    def truth(self, row: Row) -> Truth:
        """The oracle's nonzero terms that the conjecture speaks about."""
        if self.conjecture.is_equivariant:
            return dict(equivariant_terms(row.u, row.v, quantum=not self.conjecture.is_classical))
        terms = row_terms(row.u, row.v, cross_check=self.cross_check)
        return {key: n for key, n in terms.items() if not (self.conjecture.is_classical and any(key[1]))}

    def row(
        self, row: Row, *, deadline: float = float("inf"), most_cases: int | None = None, truth: Truth | None = None
    ) -> RowResult:
        """Compare one row, up to the first thing wrong.

        Args:
            row: the row; outside the premise nothing is compared.
            deadline: stop at this ``perf_counter()`` time, between two calls.
            most_cases: for a rule that answers case by case, compare at most about this many: all nonzero constants, and a sample
                of the zeros that is the same every time.
            truth: what ``truth(row)`` gave, if several conjectures that speak about the same constants share it.

        Raises:
            OutOfReach: no engine serves this row.
        """
        if truth is None:
            if not self.inside(row):  # the oracle is not asked in vain
                return RowResult(0, 0, None, True)
            truth = self.truth(row)
        return self._compare(row, truth, deadline=deadline, most_cases=most_cases)

    def findings(self, row: Row, *, deadline: float = float("inf")) -> tuple[list[Finding], bool]:
        """Everything that differs in one row, in order, and whether the whole row was looked at.

        A failure of the whole row is a single finding.
        """
        if not self.inside(row):
            return [], True
        found: list[Finding] = []
        result = self._compare(row, self.truth(row), deadline=deadline, collected=found)
        found[:_MOST_SETTLED] = [self.settle(finding) for finding in found[:_MOST_SETTLED]]
        if result.finding is None:
            return found, result.complete
        return [*found, result.finding], not isinstance(result.finding.where, Case)

    def case(self, case: Case) -> Finding | None:
        """Compare one single case."""
        return self._compare(case.row, self.truth(case.row), only=(case.w, case.d)).finding

    def _compare(self, row: Row, truth: Truth, **choices: Any) -> RowResult:
        """Compare under guard and limit; whatever ends a call becomes a finding."""
        watch = Watch()
        self._progress = None, 0, 0
        try:
            with nullcontext() if self.is_claim else watched(watch):
                result = self._walk(row, truth, **choices)
        except KeyboardInterrupt:
            raise
        except BaseException as error:  # whatever else ends a call, SystemExit and pytest.skip included, is the rule's doing
            self.limit.started = 0.0
            key, cases, nonzero = self._progress
            place = Case(row.X, row.u, row.v, *key) if key else row
            result = RowResult(cases, nonzero, self.settle(self.trouble(place, error)), False)
        finally:
            self.limit.started = 0.0
        if watch.asked:
            finding = Finding("not-independent", row, detail="the rule asked the oracle that is meant to judge it")
            return RowResult(result.cases, result.nonzero, finding, False)
        if result.finding:
            return RowResult(result.cases, result.nonzero, self.settle(result.finding), result.complete)
        return result

    def _walk(
        self,
        row: Row,
        truth: Truth,
        *,
        deadline: float = float("inf"),
        most_cases: int | None = None,
        collected: list[Finding] | None = None,
        only: Key | None = None,
    ) -> RowResult:
        """The comparison itself: the rule's answers against the truth, outcome by outcome; with a list to collect them, all failures."""
        conjecture, limit, claimed, oracle = self.conjecture, self.limit, self.is_claim, self.oracle
        rule, classical = conjecture.rule, conjecture.is_classical
        X, u, v = row.X, row.u, row.v
        limit.started = perf_counter()
        if conjecture.premise is not None and conjecture.premise_by_rows and not conjecture.premise(X, u, v):
            return RowResult(0, 0, None, True)
        premise = None if conjecture.premise_by_rows else conjecture.premise
        size, counting = self.size(row), not conjecture.is_equivariant
        values: Values | None = None
        complete, agreeing = only is None, 0
        keys: Iterable[Key]
        if conjecture.by_rows:
            answer = rule(X, u, v, *oracle)
            if claimed:
                holds = truth_of(answer)
                finding = None if holds else Finding("refuted", row, detail="the claim is false for this product")
                return RowResult(size * holds, len(truth) * holds, finding, True)
            values = self.whole(answer, row)
            if values == truth and premise is None:
                return RowResult(size, len(truth), None, complete)
            if premise is None:
                keys = sorted({*values, *truth}, key=place_in_row)
                agreeing = max(size - len(keys), 0)
            else:
                keys = sorted({*values, *self.outcomes(row)}, key=place_in_row)
        elif most_cases is not None and size > most_cases:
            keys, complete = sample_of_row(row, truth, most_cases, self.conjecture), False
        else:
            keys = self.outcomes(row)
        if only is not None:
            keys = [only]
        cases = nonzero = 0
        for key in keys:
            self._progress = key, cases, nonzero
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
                    count = answer if counting and type(answer) is int and answer >= 0 else self.read(answer, row)
            if count != true:
                limit.started = 0.0
                if collected is not None:
                    collected.append(self._difference(Case(X, u, v, w, d), count, true))
                    continue
                if values is not None and premise is None:
                    cases = self.below(row, key)
                return RowResult(cases, nonzero, self._difference(Case(X, u, v, w, d), count, true), complete)
            cases += 1
            if true:
                nonzero += 1
        return RowResult(cases + agreeing, nonzero, None, complete)

    def _difference(self, place: Case, count: Value, true: Value | Sampled) -> Finding:
        """The finding for two values that differ, with the rule's objects if it gives objects."""
        if self.is_claim:
            return Finding("refuted", place, None, true, f"the claim is false here; the constant is {true}")
        conjecture = self.conjecture
        if conjecture.is_equivariant:
            return Finding("refuted", place, count, true, f"the rule gives {count}, the oracle another polynomial")
        if conjecture.by_rows:
            answer = conjecture.rule(place.X, place.u, place.v)
            answer = answer.get(place.w if conjecture.is_classical else (place.w, place.d), 0)
        else:
            answer = conjecture.rule(*self.arguments(place.row, place.w, place.d))
        try:
            objects = shown_objects(answer)
        except WrongAnswer:
            objects = None
        return Finding("refuted", place, count, true, f"the rule gives {shown_value(count)}, the oracle {true}", objects)


def sample_of_row(row: Row, truth: Truth, most: int, conjecture: Conjecture) -> list[Key]:
    """All nonzero outcomes of a row and a sample of the others, the same every time, in order."""
    chooser = random.Random(str(row))  # noqa: S311  # a reproducible sample, no secret
    X, total = row.X, row.u.length + row.v.length
    weights: dict[int, tuple[Degree, ...]] = {}
    keys = set(truth)
    for _ in range(max(most - len(truth), 0)):
        w = chooser.choice(X.classes)
        left = total - w.length
        if conjecture.is_equivariant and left > 0:
            left = chooser.randint(0, left)
        if left not in weights:
            weights[left] = degrees_of_total(X, left) if not conjecture.is_classical or left == 0 else ()
        if weights[left]:
            keys.add((w, chooser.choice(weights[left])))
    return sorted(keys, key=place_in_row)
