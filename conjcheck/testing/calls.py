"""Calling a rule: its arguments, its premise, its answers as counts, and asking again when something is wrong.

Every call is made under the call limit and under the guard that notices questions to the oracle.
"""

import reprlib
from collections.abc import Iterable, Mapping
from contextlib import nullcontext
from time import perf_counter
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import NotationError
from conjcheck.geometry.case import Case, Row, count_below, count_cases, outcomes, read_degree
from conjcheck.geometry.flag_variety import Degree, SchubertClass
from conjcheck.oracle.guard import Watch, watched
from conjcheck.testing.answer import Value, WrongAnswer, count_of, polynomial_of, shown_value, truth_of
from conjcheck.testing.asker import Asker
from conjcheck.testing.finding import Finding
from conjcheck.testing.limits import CallInterrupted, CallLimit
from conjcheck.testing.trouble import trouble

__all__ = ["Key", "RuleCalls", "Values"]

Key = tuple[SchubertClass, Degree]
"""An outcome ``(w, d)`` of a row."""

Values = dict[Key, Value]
"""A rule's values on a row."""

_DOUBTS = 8
_DOUBT_SECONDS = 0.5
"""A wrong answer is asked for again up to eight times, but after half a second only once."""


class RuleCalls:
    """One conjecture's function and premise, ready to be called.

    Args:
        conjecture: the conjecture.
        call_limit: seconds one call may take. Use ``with calls.limit:`` around the calls.
    """

    def __init__(self, conjecture: Conjecture, *, call_limit: float = 10.0) -> None:
        self.conjecture = conjecture
        self.limit = CallLimit(call_limit)
        self.asker = Asker(conjecture.is_classical)
        self.is_claim = conjecture.role == "claim"
        self._premise_hangs = False
        self.oracle: tuple[Asker, ...] = (self.asker,) if self.is_claim else ()
        self._rings = {"classical": conjecture.is_classical, "equivariant": conjecture.is_equivariant}

    def outcomes(self, row: Row) -> tuple[Key, ...]:
        """All outcomes of a row that the conjecture's ring has, in order."""
        return outcomes(row.X, row.u.length + row.v.length, **self._rings)

    def size(self, row: Row) -> int:
        """Their number, without making them."""
        return count_cases(row.X, row.u.length + row.v.length, **self._rings)

    def below(self, row: Row, key: Key) -> int:
        """The number of outcomes smaller than a given one."""
        return count_below(row.X, row.u.length + row.v.length, key, **self._rings)

    def speaks_of(self, case: Case) -> bool:
        """Whether a case is an outcome of its row in the conjecture's ring."""
        weight = sum(a * b for a, b in zip(case.d, case.X.q_degrees, strict=True))
        left = case.u.length + case.v.length - case.w.length - weight
        return left >= 0 if self.conjecture.is_equivariant else left == 0

    def read(self, answer: Any, row: Row) -> Value:
        """The value an answer stands for: a count, or a polynomial in the equivariant rings.

        Raises:
            WrongAnswer: it stands for none.
        """
        return polynomial_of(answer, row.X.rank) if self.conjecture.is_equivariant else count_of(answer)

    def inside(self, row: Row) -> bool:
        """Whether the premise on rows holds (a premise on cases is asked case by case).

        A premise that raises or hangs counts as holding: then ``Comparer.row`` meets that and reports it.
        """
        premise = self.conjecture.premise
        if premise is None or not self.conjecture.premise_by_rows or self._premise_hangs:
            return True
        try:
            with nullcontext() if self.is_claim else watched(Watch()):
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
            return self.settle(self.trouble(row, error))
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

    def values(self, row: Row, keys: Iterable[Key]) -> Values:
        """The rule's nonzero values at those of some outcomes of a row that the premise admits; none for a claim.

        A rule that answers by rows gives all its admitted values, also at other outcomes. Raises whatever the rule raises;
        ``Comparer.row`` turns that into a finding.
        """
        if self.is_claim:
            return {}
        by_cases = not self.conjecture.premise_by_rows
        with watched(Watch()):
            try:
                self.limit.started = perf_counter()
                if self.conjecture.by_rows:
                    whole = self.whole(self.conjecture.rule(row.X, row.u, row.v), row)
                    return {key: n for key, n in whole.items() if self.admits(Case(row.X, row.u, row.v, *key))}
                found: Values = {}
                for key in keys:
                    self.limit.started = perf_counter()
                    if by_cases and not self.admits(Case(row.X, row.u, row.v, *key)):
                        continue
                    if count := self.read(self.conjecture.rule(*self.arguments(row, *key)), row):
                        found[key] = count
                return found
            finally:
                self.limit.started = 0.0

    def arguments(self, row: Row, w: SchubertClass, d: Degree) -> tuple[Any, ...]:
        """What the rule is called with at one case."""
        tail = (w,) if self.conjecture.is_classical else (w, d)
        return (row.X, row.u, row.v, *tail, *self.oracle)

    def whole(self, answer: Any, row: Row) -> Values:
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
        values: Values = {}
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
            values[w, d] = self.read(value, row)
        return {key: count for key, count in values.items() if count}

    def trouble(self, place: Case | Row, error: BaseException) -> Finding:
        """The finding for a call that ended with an exception."""
        return trouble(place, error, limit=self.limit.seconds, file=self.conjecture.file)

    def settle(self, finding: Finding) -> Finding:
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
            return "False" if self.is_claim else shown_value(finding.rule or 0)
        return _kind_of_trouble(finding)

    def _answer_again(self, place: Case | Row) -> str:
        rule, row = self.conjecture.rule, place.row if isinstance(place, Case) else place
        conjecture = self.conjecture
        with nullcontext() if self.is_claim else watched(Watch()):
            try:
                self.limit.started = perf_counter()
                if conjecture.premise is not None and conjecture.premise_by_rows:
                    conjecture.premise(row.X, row.u, row.v)
                if isinstance(place, Case):
                    self.admits(place)
                if conjecture.by_rows:
                    answer = rule(row.X, row.u, row.v, *self.oracle)
                    if self.is_claim:
                        return str(truth_of(answer))
                    values = self.whole(answer, row)
                    return shown_value(values.get((place.w, place.d), 0)) if isinstance(place, Case) else "an answer"
                if not isinstance(place, Case):
                    return "an answer"
                answer = rule(*self.arguments(row, place.w, place.d))
                return str(truth_of(answer)) if self.is_claim else shown_value(self.read(answer, row))
            except KeyboardInterrupt:
                raise
            except BaseException as error:
                return _kind_of_trouble(self.trouble(place, error))
            finally:
                self.limit.started = 0.0


def _kind_of_trouble(finding: Finding) -> str:
    """What must be the same when a rule fails twice: of a crash only its type, since messages may hold addresses and counters."""
    return finding.detail.split(":")[0] if finding.status == "crashed" else finding.detail
