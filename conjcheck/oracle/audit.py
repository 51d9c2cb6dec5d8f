"""The audit of one space: the oracle against itself, laws, closed formulas, published values and the mirror side, within a budget.

Every check goes through its units in order, smallest first; what is not through when half of the budget is spent goes on at
random. It does not stop at a difference, and keeps the smallest one. What was compared is counted, and nothing compared is never called
an agreement.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache, partial
from random import Random
from time import perf_counter

from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import Row
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.oracle import engines_for
from conjcheck.oracle.check import Check, Difference, Reader, RowList, at_row, compare
from conjcheck.oracle.comparison import RecursionEngine
from conjcheck.oracle.engine import Engine, RowTerms
from conjcheck.oracle.formulas import formulas
from conjcheck.oracle.laws import laws
from conjcheck.oracle.localisation import Localisation, LocalisationEngine
from conjcheck.oracle.mirror import CRITICAL_POINTS, critical_values, has_sympy, spectrum
from conjcheck.oracle.published import published

__all__ = ["Result", "audit", "checks_of"]


@dataclass(frozen=True, slots=True)
class Result:
    """What one check found on one space.

    Attributes:
        X, name, unit: the space, the check, what it compares (plural).
        of: how many units there are.
        in_order: how many of them, from the smallest on, were compared without a gap.
        compared: how many were compared in all.
        differing: how many of these differ.
        smallest: the smallest difference found.
        seconds: how long it took.
        why: why nothing was compared, or why some units were left out.
    """

    X: FlagVariety
    name: str
    unit: str
    of: int
    in_order: int = 0
    compared: int = 0
    differing: int = 0
    smallest: Difference | None = None
    seconds: float = 0.0
    why: str = ""

    @property
    def verdict(self) -> str:
        """``agree``, ``differ`` or ``not run``."""
        return "differ" if self.smallest else "agree" if self.compared else "not run"


def checks_of(X: FlagVariety, seconds: float = 10.0) -> list[Check]:
    """All checks that apply to X, in the order of the table; ``seconds`` is the budget they will have.

    Raises:
        OutOfReach: no engine covers X.
    """
    if not engines_for(X):
        raise OutOfReach(f"expected a space in reach of some engine, got {X} with {X.number_of_classes:,} Schubert classes")
    read = Reader(seconds)
    return [*_engines(X, read), *laws(X, read), *formulas(X, read), *published(X, read), *_mirror(X, read)]


def audit(
    X: FlagVariety, *, seconds: float = 10.0, seed: int = 0, watching: Callable[[str, float], None] | None = None
) -> list[Result]:
    """Run all checks on X, one result each, in the order of the table.

    Args:
        X: the space.
        seconds: the budget. A unit that has begun is finished, and so is the set-up of an engine.
        seed: chooses the random units.
        watching: called now and then with the name of a check and the share of the budget that is spent.

    Raises:
        OutOfReach: no engine covers X.
    """
    begun = perf_counter()
    runs = [_Run(X, check, Random(f"{seed}/{X}/{check.name}")) for check in checks_of(X, seconds)]  # noqa: S311  # a choice of rows, no secret
    for end, at_random in ((0.5, False), (1.0, True)):
        first, until = True, begun + end * seconds
        while (open_ := [run for run in runs if run.is_open]) and (first or perf_counter() < until):
            if at_random:  # a single unit may take long where engines are compared: these come last now
                open_.reverse()
            for k, run in enumerate(open_):
                now = perf_counter()
                if watching:
                    watching(run.check.name, min((now - begun) / seconds, 1.0))
                share = max(until - now, 0.0) * run.check.weight / sum(other.check.weight for other in open_[k:])
                run.go_on(now + share, begun + seconds, at_random=at_random)
            first = False
    return [run.result() for run in runs]


class _Run:
    """One check in progress.

    Attributes:
        place: the units below it have been asked in order; those that are drawn at random lie at or above it.
        first_gap: the first unit that was left out because it takes too much work.
    """

    def __init__(self, X: FlagVariety, check: Check, rng: Random) -> None:
        self.X, self.check, self.rng = X, check, rng
        self.size = len(check.units)
        self.place = self.compared = self.differing = self.left_out = 0
        self.first_gap: int | None = None
        self.smallest: Difference | None = None
        self.seconds = 0.0
        self.why = check.missing
        self.is_open = not check.missing and self.size > 0
        self._drawn: Iterator[int] | None = None

    def go_on(self, until: float, deadline: float, *, at_random: bool) -> None:
        """Compare units until a time: at least one if none has been."""
        begun = perf_counter()
        if self.check.needs and self.check.needs > deadline - begun:
            self.why = f"takes about {self.check.needs:.0f} s: give more --seconds"
            self.is_open = False
            return
        if at_random and self._drawn is None:
            self._drawn = _shuffled(self.rng, self.place, self.size)
        while self.place == 0 or perf_counter() < until:
            unit = next(self._drawn, None) if self._drawn else self.place if self.place < self.size else None
            if unit is None:
                self.is_open = False
                break
            self._ask(unit)
            self.place += self._drawn is None
        self.seconds += perf_counter() - begun

    def _ask(self, place: int) -> None:
        """Compare one unit. An engine that stops, by an inner contradiction or another error, differs, too."""
        unit = self.check.units[place]
        try:
            found = list(self.check.ask(unit))
        except OutOfReach as reason:
            if self.first_gap is None:
                self.first_gap, self.why = place, str(reason)
            self.left_out += 1
            return
        except Exception as error:
            values = (
                ("it stopped", f"{type(error).__name__}: {str(error).splitlines()[0] if str(error) else ''}"),
                ("expected", "a value"),
            )
            parts = unit if isinstance(unit, tuple) else (unit,)
            row = next((part for part in parts if isinstance(part, Row)), None)
            place_in_words = f"{self.X}: {self.check.name}, number {place + 1} of the {self.check.unit}"
            found = [at_row(row, *values) if row else Difference(place_in_words, *values)]
        self.compared += 1
        if found:
            self.differing += 1
            candidates = [*found, self.smallest] if self.smallest else found
            self.smallest = min(candidates, key=lambda difference: difference.sort_key)

    def result(self) -> Result:
        """What was found so far."""
        in_order = self.place if self.first_gap is None else min(self.place, self.first_gap)
        if self.compared == self.size:
            in_order = self.size
        why = f"{self.left_out:,} left out: {self.why}" if self.left_out else self.why
        found = self.compared, self.differing, self.smallest, self.seconds, why
        return Result(self.X, self.check.name, self.check.unit, self.size, in_order, *found)


def _shuffled(rng: Random, low: int, high: int) -> Iterator[int]:
    """The integers from low to below high, each once, in random order, without listing them while most are still to come."""
    seen: set[int] = set()
    while 2 * len(seen) < high - low:
        place = rng.randrange(low, high)
        if place not in seen:
            seen.add(place)
            yield place
    rest = [place for place in range(low, high) if place not in seen]
    rng.shuffle(rest)
    yield from rest


# -- engines -------------------------------------------------------------------------------------------------------------


def _engines(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The engine that the oracle chooses against each other one, and against itself on another route."""
    first, *others = engines_for(X)
    for other in others:
        yield Check(f"{first.name} = {other.name}", "rows", RowList(X), partial(_agree, read, first, other), weight=4)
    if isinstance(first, RecursionEngine):
        ask = partial(_same, read, "recursion", "recursion, direct route", first.direct_row)
        yield Check("recursion = its direct route", "rows", RowList(X), ask, weight=2)
    if isinstance(first, LocalisationEngine):
        ask = partial(_same, read, "localisation", "localisation at other numbers", lambda u, v: _elsewhere(X).row(u, v))
        yield Check("localisation at other numbers", "rows", RowList(X), ask, weight=4)


def _agree(read: Reader, first: Engine, other: Engine, row: Row) -> Iterator[Difference]:
    read.afford(other, row.u, row.v)
    yield from compare(row, (first.name, read(row.u, row.v)), (other.name, other.row(row.u, row.v)))


def _same(
    read: Reader, one: str, other: str, route: Callable[[SchubertClass, SchubertClass], RowTerms], row: Row
) -> Iterator[Difference]:
    yield from compare(row, (one, read(row.u, row.v)), (other, route(row.u, row.v)))


@lru_cache(maxsize=8)
def _elsewhere(X: FlagVariety) -> Localisation:
    """Localisation with other numbers for the simple roots and the divisor: the constants must not depend on them."""
    engine = Localisation(X)
    engine.seed = 1_000_003
    return engine


# -- the mirror side -----------------------------------------------------------------------------------------------------


def _mirror(X: FlagVariety, read: Reader) -> Iterator[Check]:
    if X.name in CRITICAL_POINTS:
        missing = "" if has_sympy() else "needs sympy"
        yield Check(
            "mirror potential", "polynomials", [X], partial(_spectra, read), needs=CRITICAL_POINTS[X.name][1], missing=missing
        )


def _spectra(read: Reader, X: FlagVariety) -> Iterator[Difference]:
    """Every critical value is an eigenvalue of ``c_1 *``, and there are as many critical points as ever."""
    import sympy

    values, points = critical_values(X)
    characteristic = spectrum(X, read)
    if not sympy.rem(characteristic, values).is_zero:
        hows = ("characteristic polynomial of c_1", "should be a multiple of that of the critical values")
        yield Difference(f"{X}: spectrum of c_1", (hows[0], str(characteristic.as_expr())), (hows[1], str(values.as_expr())))
    if points != CRITICAL_POINTS[X.name][0]:
        yield Difference(f"{X}: critical points", ("mirror potential", points), ("computed before", CRITICAL_POINTS[X.name][0]))
