"""A survey at scale: named spaces compared completely, or by a seeded sample, in chunks, in many processes, resumed from a ledger."""

import json
from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, ThreadPoolExecutor, wait
from dataclasses import dataclass, field, replace
from pathlib import Path
from time import monotonic
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import LedgerError, NotationError, OutOfReach
from conjcheck.evidence.ledger import ChunkKey, Ledger, library_mark
from conjcheck.evidence.source import Version, version_of
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import ENGINES, engines_for
from conjcheck.testing.chunks import Chunk, ChunkResult, chunks, sample_chunks
from conjcheck.testing.isolation import close_all, isolated, isolated_afresh

__all__ = ["Campaign", "Progress", "SpaceResult", "Terms", "run_campaign"]

_AGAIN_SPACES, _AGAIN_ROWS = 3, 24
_AGAIN_SHARE, _AGAIN_SECONDS, _AGAIN_PATIENCE = 0.05, 2.0, 120.0
"""What is asked again: rows of the last spaces, for so large a share of the time of the survey, or so many seconds; not waited for
longer than that."""

_AHEAD = 3
"""Chunks per job that are given out at a time: few, so that a failure wastes little, and enough to keep all processes busy."""


@dataclass(frozen=True, slots=True)
class Terms:
    """How a survey is to be done.

    Attributes:
        every: go on after a failure, and collect all of them; otherwise stop at the smallest.
        draws: ``None`` to compare all rows; otherwise how many rows are drawn in each space.
        seed: of the draws.
        call_limit, memory: seconds, and bytes, that one call of the rule may take.
        cross_check: compute every product of the oracle in two ways.
    """

    every: bool = False
    draws: int | None = None
    seed: int = 0
    call_limit: float = 10.0
    memory: int = 2 << 30
    cross_check: bool = False

    @property
    def part(self) -> str:
        """The settings that make a result another one, as the ledger keeps them."""
        words = ["rows" if self.draws is None else f"sample seed {self.seed}"]
        words += ["every failure"] * self.every + ["cross-check"] * self.cross_check
        return ", ".join([*words, f"call limit {self.call_limit!r}", f"memory {self.memory}"])


@dataclass(frozen=True, slots=True)
class SpaceResult:
    """What was compared in one space.

    Attributes:
        X: the space.
        of: how many rows it has, or how many were to be drawn.
        engine: the engine that answers there.
        result: the sum of its chunks, up to the smallest failure if that ended it.
    """

    X: FlagVariety
    of: int
    engine: str
    result: ChunkResult = field(default_factory=ChunkResult)

    @property
    def complete(self) -> bool:
        """Whether every row was compared."""
        return self.result.seen == self.of and not self.result.problem


@dataclass(frozen=True, slots=True)
class Campaign:
    """What a survey at scale gave.

    Attributes:
        conjecture, rule: the conjecture, and the hash of its source.
        terms: how it was done.
        spaces: the spaces in order, up to the one that ended it.
        stale: words for each piece of older work in the ledger that counts no more.
        resumed: rows taken from the ledger.
        seconds: by the clock, this time.
        again: where everything agrees in order, what is wrong when rows are asked again, in another order, by a process that was asked
            nothing before: the rule is no function of its arguments. ``None`` if nothing is.
        unseen: the files of its repository that the rule reads, but that its hash does not see, as far as that was noticed there.
    """

    conjecture: Conjecture
    rule: str
    terms: Terms
    spaces: tuple[SpaceResult, ...]
    stale: tuple[str, ...] = ()
    resumed: int = 0
    seconds: float = 0.0
    again: dict[str, Any] | None = None
    unseen: tuple[str, ...] = ()

    @property
    def problems(self) -> list[str]:
        """Why something was not compared, if that is not the rule's doing."""
        return [space.result.problem for space in self.spaces if space.result.problem]


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a survey is, for a bar: rows ``done`` (``resumed`` of them from the ledger) out of ``of``; the space of the last one."""

    done: int
    of: int
    resumed: int
    cases: int
    space: str


@dataclass(slots=True)
class _Plan:
    """A chunk with its place among all."""

    space: int
    chunk: Chunk
    key: ChunkKey


def run_campaign(
    conjecture: Conjecture,
    spaces: Sequence[FlagVariety],
    *,
    terms: Terms | None = None,
    jobs: int = 1,
    executor: Executor | None = None,
    ledger: Path | None = None,
    watching: Callable[[Progress], None] = lambda _: None,
) -> Campaign:
    """Compare a conjecture with the oracle on all rows of the spaces named, smallest first.

    Every call of the rule is made in a process of its own (``isolation``). Results do not depend on jobs, executor or resumptions.

    Args:
        conjecture: a decorated function in a file.
        spaces: flag varieties of its family, in any order.
        terms: how.
        jobs: processes on this machine.
        executor: where chunks are compared instead: any ``concurrent.futures.Executor``, e.g. that of a cluster. The plug-in file must
            have the same path there.
        ledger: the file that keeps finished chunks; ``None`` to keep nothing.
        watching: told how far it is.

    Raises:
        NotationError: a space that is not in the family, or a conjecture without a file.
        OutOfReach: a space that no engine covers.
        LedgerError: a ledger that cannot be used.
    """
    terms = terms or Terms()
    started = monotonic()
    chosen = sorted(set(spaces))
    _check(conjecture, chosen)
    version = version_of(conjecture.file)
    rule = version.rule
    kept = Ledger(ledger) if ledger else None
    again: dict[str, Any] | None = None
    unseen: tuple[str, ...] = ()
    try:
        stale = _stale(kept, conjecture, rule)
        plans = _plans(conjecture, chosen, rule, terms)
        engines = ["localisation" if conjecture.is_equivariant else engines_for(X)[0].name for X in chosen]
        results = [SpaceResult(X, terms.draws or X.number_of_classes**2, name) for X, name in zip(chosen, engines, strict=True)]
        pool = executor or ThreadPoolExecutor(jobs, thread_name_prefix="conjcheck")
        walk = _Walk(results, kept, terms, watching, version)
        try:
            walk.through(plans, pool, ahead=_AHEAD * jobs)
            if terms.draws is None and all(space.complete and not space.result.failing for space in walk.results):
                again, unseen = _asked_again(conjecture, walk.results, rule, terms, pool)
        finally:
            walk.forget()
            if executor is None:
                pool.shutdown(wait=False, cancel_futures=True)
                close_all()  # what is still being compared is not wanted any more
                pool.shutdown()
    finally:
        if kept:
            kept.__exit__(None, None, None)
    return Campaign(conjecture, rule, terms, tuple(walk.reached()), stale, walk.resumed, monotonic() - started, again, unseen)


def _asked_again(
    conjecture: Conjecture, done: list[SpaceResult], rule: str, terms: Terms, executor: Executor
) -> tuple[dict[str, Any] | None, tuple[str, ...]]:
    """What is wrong when some rows are asked again, the last spaces first, in no order, by a process that was asked nothing before.

    And the files that it was seen to read there, but that are not in its hash.

    A call that takes too long there says nothing: what a rule keeps between calls, and may keep, has to be made first.
    """
    seconds = max(_AGAIN_SHARE * sum(space.result.seconds for space in done), _AGAIN_SECONDS) / _AGAIN_SPACES
    texts, library = [], library_mark()
    for space in sorted(done, key=lambda space: space.X, reverse=True)[:_AGAIN_SPACES]:
        affordable = int(seconds * space.of / max(space.result.seconds, 1e-9))
        draws = min(max(affordable, 1), _AGAIN_ROWS)
        chunk = _chunk(conjecture, space.X, rule, replace(terms, draws=draws, seed=space.of), library, (0, draws))
        texts.append(chunk.as_text())
    try:
        patience = _AGAIN_PATIENCE + _AGAIN_SPACES * terms.call_limit
        *found, unseen = [json.loads(text) for text in executor.submit(isolated_afresh, texts).result(patience)]
    except Exception:  # whatever an executor raises: the rows are compared already
        return None, ()
    entries = [entry for result in found if not result.get("problem") for entry in result["findings"]]
    return next((entry for entry in entries if entry["status"] != "too-slow"), None), tuple(unseen)


class _Walk:
    """Gives out chunks in order, takes results in any order, and adds them up in order."""

    def __init__(
        self,
        results: list[SpaceResult],
        kept: Ledger | None,
        terms: Terms,
        watching: Callable[[Progress], None],
        version: Version,
    ) -> None:
        self.results, self.kept, self.terms, self.watching, self.version = results, kept, terms, watching, version
        self.resumed = self.done = self.cases = 0
        self.of = sum(space.of for space in results)
        self.last: _Plan | None = None
        self.waiting: deque[tuple[_Plan, ChunkResult | Future[str]]] = deque()

    def through(self, plans: Iterator[_Plan], executor: Executor, *, ahead: int) -> None:
        """Compare all chunks; end at the first failure, in order, unless every one is wanted."""
        more = True
        while True:
            while (
                more
                and len([1 for _, found in self.waiting if isinstance(found, Future)]) < ahead
                and len(self.waiting) < 50 * ahead
            ):
                plan = next(plans, None)
                if plan is None:
                    more = False
                    break
                self.waiting.append((plan, self._from_ledger(plan) or executor.submit(isolated, plan.chunk.as_text())))
            if not self._take() and not self.waiting and not more:
                return
            if self._ended():
                return
            running = [found for _, found in self.waiting if isinstance(found, Future)]
            if running and isinstance(self.waiting[0][1], Future):
                wait(running, return_when=FIRST_COMPLETED)
                more = self._settle() and more

    def _settle(self) -> bool:
        """Keep what is finished, in the ledger at once; a failure makes all later chunks superfluous: then no more are wanted."""
        for k, (plan, found) in enumerate(self.waiting):
            if isinstance(found, Future) and found.done():
                result = _result(plan, found)
                if changed := self.version.changed:
                    result = ChunkResult(problem=f"{changed} was changed during the survey; start again")
                if self.kept and not result.problem:
                    self.kept.put(plan.key, result.as_json())
                self.waiting[k] = plan, result
                self._tell(plan, result)
        stop = next((k for k, (_, r) in enumerate(self.waiting) if isinstance(r, ChunkResult) and (r.ended or r.problem)), None)
        while stop is not None and len(self.waiting) > stop + 1:
            _, found = self.waiting.pop()
            if isinstance(found, Future):
                found.cancel()
        return stop is None

    def _take(self) -> bool:
        """Add up what is finished from the first chunk on without a gap."""
        took = False
        while self.waiting and isinstance(self.waiting[0][1], ChunkResult) and not self._ended():
            plan, result = self.waiting.popleft()
            assert isinstance(result, ChunkResult), "it is finished"
            space = self.results[plan.space]
            self.results[plan.space] = replace(space, result=space.result + result)
            self.last, took = plan, True
        return took

    def _ended(self) -> bool:
        if self.last is None:
            return False
        result = self.results[self.last.space].result
        return result.ended or bool(result.problem)

    def forget(self) -> None:
        """Take back what was given out and is not wanted any more."""
        for _, found in self.waiting:
            if isinstance(found, Future):
                found.cancel()

    def _from_ledger(self, plan: _Plan) -> ChunkResult | None:
        """The result of a chunk that was finished earlier."""
        found = self.kept.get(plan.key) if self.kept else None
        if found is None:
            return None
        try:
            result = _parsed(plan, found)
        except (TypeError, ValueError) as error:
            raise LedgerError(f"{self.kept and self.kept.path}: damaged: {error}; choose another with --ledger") from None
        self.resumed += result.seen
        self._tell(plan, result)
        return result

    def _tell(self, plan: _Plan, result: ChunkResult) -> None:
        self.done += plan.chunk.last - plan.chunk.first
        self.cases += result.cases
        self.watching(Progress(self.done, self.of, self.resumed, self.cases, plan.chunk.space))

    def reached(self) -> Iterator[SpaceResult]:
        """The spaces up to the one that ended it."""
        for place, space in enumerate(self.results):
            if self.last is None or place <= self.last.space:
                yield space


def _result(plan: _Plan, future: "Future[str]") -> ChunkResult:
    """The result of a future; what ended it otherwise is a problem."""
    try:
        found = json.loads(future.result())
        if isinstance(found, dict) and found.get("problem"):
            return ChunkResult(problem=str(found["problem"]))
        return _parsed(plan, found)
    except Exception as error:  # whatever an executor raises: a lost worker, a lost network
        return ChunkResult(
            problem=f"{plan.chunk.space}, rows {plan.chunk.first} to {plan.chunk.last}: {type(error).__name__}: {error}"
        )


def _parsed(plan: _Plan, found: dict[str, Any]) -> ChunkResult:
    """The result of a chunk in JSON, all of it.

    Raises:
        ValueError: it is no result, or not one of just these rows.
    """
    chunk = plan.chunk
    result = ChunkResult.parse(found)
    if not result.covers(chunk.first, chunk.last) or (result.ended and chunk.every):
        raise ValueError(
            f"expected the result of rows {chunk.first} to {chunk.last} of {chunk.space}, got one of {result.seen} rows"
        )
    return result


def _check(conjecture: Conjecture, spaces: list[FlagVariety]) -> None:
    if not Path(conjecture.file).is_file():
        raise NotationError(
            f"expected a conjecture in a file, got {conjecture.name} in {conjecture.file}; write it to conjectures/"
        )
    if any(value != conjecture.variants[name][0] for name, value in conjecture.choice.items()):
        raise NotationError(
            f"expected the rule {conjecture.name} as it stands, got {conjecture.choice_in_words}; make that the first choice in its file"
        )
    if not spaces:
        raise NotationError("expected at least one flag variety to survey, got none")
    for X in spaces:
        if X not in conjecture.on:
            raise NotationError(f"expected flag varieties of the family of {conjecture.name} ({conjecture.on}), got {X}")
        if not engines_for(X):
            reasons = "; ".join(f"{engine.name}: {engine.refuses(X)}" for engine in ENGINES.values())
            raise OutOfReach(
                f"expected spaces in reach of some engine, got {X} ({reasons}); leave it out, with --up-to for example by "
                f"--most-classes {min(1_000, X.number_of_classes - 1)}"
            )


def _plans(conjecture: Conjecture, spaces: list[FlagVariety], rule: str, terms: Terms) -> Iterator[_Plan]:
    """All chunks in order."""
    library = library_mark()
    for place, X in enumerate(spaces):
        for first, last in chunks(conjecture, X) if terms.draws is None else sample_chunks(terms.draws):
            chunk = _chunk(conjecture, X, rule, terms, library, (first, last))
            yield _Plan(place, chunk, ChunkKey(rule, conjecture.name, library, X.name, terms.part, first, last))


def _chunk(conjecture: Conjecture, X: FlagVariety, rule: str, terms: Terms, library: str, places: tuple[int, int]) -> Chunk:
    return Chunk(
        str(Path(conjecture.file).resolve()),
        conjecture.name,
        rule,
        conjecture.ring,
        X.name,
        None if terms.draws is None else terms.seed,
        *places,
        terms.every,
        terms.call_limit,
        terms.memory,
        terms.cross_check,
        library,
    )


def _stale(kept: Ledger | None, conjecture: Conjecture, rule: str) -> tuple[str, ...]:
    if kept is None:
        return ()
    found = kept.stale(conjecture.name, rule, library_mark())
    return tuple(
        f"{rows:,} rows of {space} were compared for {'another version of the rule' if other else 'another version of conjcheck'}"
        " and count no more"
        for space, rows, other in found
    )
