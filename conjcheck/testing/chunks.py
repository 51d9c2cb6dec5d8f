"""Chunks: a survey cut into pieces that depend on the conjecture and the space alone, and the comparison of one piece."""

import json
from collections.abc import Callable, Iterator
from dataclasses import asdict, dataclass, replace
from random import Random
from time import perf_counter
from typing import Any, Self

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import Case, Row, count_cases, rows
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.answer import plain_value
from conjcheck.testing.compare import Comparer
from conjcheck.testing.finding import STATUSES, Finding

__all__ = ["Chunk", "ChunkResult", "chunks", "compare_chunk", "entry_of", "rows_of_chunk", "sample_chunks"]

_MOST_ROWS = 512
_MOST_CASES = 100_000
_SAMPLE_ROWS = 64
_MOST_KEPT = 1_000
"""Failures of one chunk that are kept one by one; beyond that they are only counted."""


@dataclass(frozen=True, slots=True)
class Chunk:
    """One piece of a survey, in plain data, so that it can travel to any process.

    Attributes:
        file, name, rule: the plug-in file, the conjecture in it, and the hash that the source must have.
        ring: the conjecture's ring.
        space: the name of the flag variety.
        seed: ``None`` for rows in order, otherwise the seed of a sample.
        first, last: the 0-based places ``first <= k < last``, of rows in order or of draws.
        every: whether to go on after a failure.
        call_limit, memory: seconds and bytes that a call of the rule may take.
        cross_check: compute every product in two ways.
        library: the mark that the library must have where it is compared; empty for any.
    """

    file: str
    name: str
    rule: str
    ring: str
    space: str
    seed: int | None
    first: int
    last: int
    every: bool = False
    call_limit: float = 10.0
    memory: int = 2 << 30
    cross_check: bool = False
    library: str = ""

    @property
    def rings(self) -> dict[str, bool]:
        """The ring as ``outcomes`` and its like take it."""
        return {"classical": self.ring in ("classical", "equivariant"), "equivariant": self.ring.startswith("equivariant")}

    def part(self, first: int, last: int) -> "Chunk":
        """The same with other rows."""
        return replace(self, first=first, last=last)

    def as_text(self) -> str:
        """One line of JSON."""
        return json.dumps(asdict(self))

    @classmethod
    def parse(cls, text: str) -> Self:
        """The chunk of a line of JSON."""
        return cls(**json.loads(text))


@dataclass(frozen=True, slots=True)
class ChunkResult:
    """What comparing a chunk gave.

    Attributes:
        seen: rows passed in order, those outside the premise included; the failing row is not among them if it ended the chunk.
        rows, cases, nonzero: rows with a case inside the premise, their cases, and those with a nonzero constant; of rows compared to
            the end.
        failing_rows, failing: rows and cases that fail.
        before: cases that were compared before the first failure, those in its own row not counted.
        seconds: processor time of the comparison, by the wall clock.
        findings: the failures as JSON, in order, at most a thousand: ``where``, ``status``, ``rule``, ``oracle``, ``detail``.
        ended: whether a failure ended it.
        problem: why there is no result: nothing that the rule did.
    """

    seen: int = 0
    rows: int = 0
    cases: int = 0
    nonzero: int = 0
    failing_rows: int = 0
    failing: int = 0
    before: int = 0
    seconds: float = 0.0
    findings: tuple[dict[str, Any], ...] = ()
    ended: bool = False
    problem: str = ""

    def __add__(self, other: "ChunkResult") -> "ChunkResult":
        """The two one after the other."""
        numbers = {
            name: getattr(self, name) + getattr(other, name)
            for name in ("seen", "rows", "cases", "nonzero", "failing_rows", "failing", "seconds")
        }
        numbers["before"] = self.before if self.failing_rows else self.before + other.before
        found = (*self.findings, *other.findings)[:_MOST_KEPT]
        return ChunkResult(**numbers, findings=found, ended=other.ended, problem=self.problem or other.problem)

    def as_json(self) -> dict[str, Any]:
        """In JSON types."""
        return {**asdict(self), "findings": list(self.findings), "seconds": round(self.seconds, 4)}

    @classmethod
    def parse(cls, found: dict[str, Any]) -> Self:
        """The result behind JSON of ``as_json``.

        Raises:
            ValueError: it is none.
        """
        if set(found) != set(cls.__dataclass_fields__) or not all(_KINDS[name](value) for name, value in found.items()):
            raise ValueError("expected the result of a chunk")
        result = cls(**{**found, "findings": tuple(found["findings"])})
        if not (
            result.rows <= result.seen
            and max(result.nonzero, result.before, result.rows) <= result.cases
            and bool(result.findings) == bool(result.failing) == bool(result.failing_rows)
            and max(len(result.findings), result.failing_rows) <= result.failing
            and (result.failing or not result.ended)
        ):
            raise ValueError("expected the result of a chunk with numbers that go together")
        return result

    def covers(self, first: int, last: int) -> bool:
        """Whether it is the whole result of those rows: all of them seen, or fewer because a failure ended it."""
        return not self.problem and (self.seen < last - first if self.ended else self.seen == last - first)


def _is_number(value: Any) -> bool:
    return type(value) is int and 0 <= value < 2**63


def _is_finding(value: Any) -> bool:
    if not isinstance(value, dict) or not all(isinstance(value.get(name), str) for name in ("where", "status", "detail", "trace")):
        return False
    return value["status"] in STATUSES[1:] and "rule" in value and "oracle" in value


_KINDS: dict[str, Callable[[Any], bool]] = {
    **dict.fromkeys(("seen", "rows", "cases", "nonzero", "failing_rows", "failing", "before"), _is_number),
    "seconds": lambda value: type(value) in (int, float) and 0 <= value < float("inf"),
    "findings": lambda value: isinstance(value, list) and all(map(_is_finding, value)),
    "ended": lambda value: isinstance(value, bool),
    "problem": lambda value: isinstance(value, str),
}
"""What each field of a result must be in JSON."""


def chunks(conjecture: Conjecture, X: FlagVariety) -> Iterator[tuple[int, int]]:
    """The pieces ``(first, last)`` of all rows of a space, in order: the same on every machine.

    A piece has at most 512 rows; for a rule that answers case by case also at most about 100,000 cases.
    """
    rings = {"classical": conjecture.is_classical, "equivariant": conjecture.is_equivariant}
    first = place = cases = 0
    for total in range(2 * X.dim + 1):
        size = 0 if conjecture.by_rows else count_cases(X, total, **rings)
        left = sum(len(X.of_length(k)) * len(X.of_length(total - k)) for k in range(max(0, total - X.dim), min(total, X.dim) + 1))
        while left:
            room = _MOST_ROWS - (place - first)
            if size:
                room = min(room, max((_MOST_CASES - cases) // size, int(place == first)))
            step = min(left, room)
            place, left, cases = place + step, left - step, cases + step * size
            if step == room:
                yield first, place
                first, cases = place, 0
    if place > first:
        yield first, place


def sample_chunks(draws: int) -> Iterator[tuple[int, int]]:
    """The pieces of a sample of that many draws."""
    for first in range(0, draws, _SAMPLE_ROWS):
        yield first, min(first + _SAMPLE_ROWS, draws)


def rows_of_chunk(chunk: Chunk) -> Iterator[Row]:
    """The rows of a chunk in order; of a sample, drawn uniformly with repetition: draw k depends on seed, space and k alone."""
    X = FlagVariety(chunk.space)
    if chunk.seed is None:
        yield from rows(X, chunk.first, chunk.last)
        return
    for k in range(chunk.first, chunk.last):
        place = Random(f"{chunk.seed} {X.name} {k}").randrange(X.number_of_classes**2)  # noqa: S311  # a reproducible sample
        yield from rows(X, place, place + 1)


def compare_chunk(comparer: Comparer, chunk: Chunk, mark: Callable[[int], None] = lambda _: None) -> ChunkResult:
    """Compare the rows of a chunk in order.

    Args:
        comparer: what compares.
        chunk: the piece.
        mark: told the place of each row before it is compared.
    """
    started = perf_counter()
    total = ChunkResult()
    try:
        with comparer.limit:
            for place, row in enumerate(rows_of_chunk(chunk), start=chunk.first):
                mark(place)
                total += _compare_row(comparer, row, every=chunk.every)
                if total.ended:
                    break
    except OutOfReach as error:
        total = replace(total, problem=f"{chunk.space}: {error}")
    return replace(total, seconds=perf_counter() - started)


def _compare_row(comparer: Comparer, row: Row, *, every: bool) -> ChunkResult:
    result = comparer.row(row)
    first = result.finding
    if first is None:
        return ChunkResult(1, int(result.cases > 0), result.cases, result.nonzero, before=result.cases)
    if not every:
        return ChunkResult(failing_rows=1, failing=1, findings=(entry_of(first),), ended=True)
    found, whole = comparer.findings(row)
    found = found or [first]
    kept = tuple(entry_of(finding) for finding in found[:_MOST_KEPT])
    cases = nonzero = 0
    if first.status == "refuted" and whole:
        truth = comparer.truth(row)
        if comparer.conjecture.premise_by_rows:
            cases, nonzero = comparer.size(row), len(truth)
        else:
            inside = [key for key in comparer.outcomes(row) if comparer.admits(Case(row.X, row.u, row.v, *key))]
            cases, nonzero = len(inside), len(truth.keys() & {*inside})
    return ChunkResult(1, int(cases > 0), cases, nonzero, 1, len(found), findings=kept)


def entry_of(finding: Finding) -> dict[str, Any]:
    """A finding in JSON types."""
    return {
        "where": str(finding.where),
        "status": finding.status,
        "rule": plain_value(finding.rule),
        "oracle": None
        if finding.oracle is None
        else plain_value(finding.oracle)
        if isinstance(finding.oracle, int)
        else "another polynomial",
        "detail": finding.detail,
        "trace": finding.trace,
    }
