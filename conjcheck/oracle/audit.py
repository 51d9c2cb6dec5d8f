"""The audit: the oracle held against itself, against the laws, against closed formulas, published values and the mirror side, on one space.

A check goes through its units in order, smallest first, for half of its time; then it draws from the rest at random. Either way it goes on
after a difference and keeps the smallest one. What was compared is counted, and nothing compared is never called an agreement.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache, partial
from itertools import chain
from random import Random
from time import perf_counter
from typing import Any

from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import Row
from conjcheck.geometry.cartan import CartanType
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import engines_for
from conjcheck.oracle.check import Check, Difference, Reader, RowList, afford, compare
from conjcheck.oracle.comparison import RecursionEngine
from conjcheck.oracle.engine import Engine, RowTerms
from conjcheck.oracle.formulas import formulas
from conjcheck.oracle.laws import laws
from conjcheck.oracle.localisation import Localisation, LocalisationEngine, _Point
from conjcheck.oracle.mirror import CRITICAL_POINTS, critical_values, has_sympy, spectrum
from conjcheck.oracle.published import published

__all__ = ["Result", "audit", "checks_of", "spaces_of_rank"]


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


def checks_of(X: FlagVariety) -> list[Check]:
    """All checks that apply to X, in the order of the table.

    Raises:
        OutOfReach: no engine covers X.
    """
    if not engines_for(X):
        raise OutOfReach(f"expected a space in reach of some engine, got {X} with {X.number_of_classes:,} Schubert classes")
    read = Reader()
    return [*_engines(X, read), *laws(X, read), *formulas(X, read), *published(X, read), *_mirror(X, read)]


def audit(X: FlagVariety, *, seconds: float = 10.0, seed: int = 0, starting: Callable[[str], None] | None = None) -> Iterator[Result]:
    """Run all checks on X, one result each.

    Args:
        X: the space.
        seconds: the budget. Each check gets its share of what is left; one that ends early leaves its time to the others. A unit that
            has begun is finished, and so is the set-up of an engine.
        seed: chooses the random units.
        starting: called with the name of each check before it begins.

    Raises:
        OutOfReach: no engine covers X.
    """
    deadline = perf_counter() + seconds
    checks = checks_of(X)
    for k, check in enumerate(checks):
        if starting:
            starting(check.name)
        left = max(deadline - perf_counter(), 0.0)
        share = left * check.weight / sum(other.weight for other in checks[k:])
        yield _run(X, check, left, share, Random(f"{seed}/{X}/{check.name}"))  # noqa: S311  # a choice of rows, no secret


def _run(X: FlagVariety, check: Check, left: float, share: float, rng: Random) -> Result:
    size = len(check.units)
    if check.missing or check.needs > left:
        why = check.missing or f"takes about {check.needs:.0f} s, {left:.1f} s are left: give more --seconds"
        return Result(X, check.name, check.unit, size, why=why)
    begun = perf_counter()
    tally = _Tally(check)
    place = 0
    while place < size and (place == 0 or perf_counter() < begun + share / 2):
        tally.ask(place)
        place += 1
    in_order = place if not tally.left_out else tally.first_left_out
    for drawn in _shuffled(rng, place, size):
        if perf_counter() > begun + share:
            break
        tally.ask(drawn)
    return Result(
        X,
        check.name,
        check.unit,
        size,
        in_order,
        tally.compared,
        tally.differing,
        tally.smallest,
        perf_counter() - begun,
        f"{tally.left_out:,} left out: {tally.why}" if tally.left_out else "",
    )


class _Tally:
    """The count of one check."""

    def __init__(self, check: Check) -> None:
        self.check = check
        self.compared = self.differing = self.left_out = self.first_left_out = 0
        self.smallest: Difference | None = None
        self.why = ""

    def ask(self, place: int) -> None:
        """Compare one unit. An engine that stops at an inner contradiction differs, too."""
        unit = self.check.units[place]
        try:
            found = list(self.check.ask(unit))
        except OutOfReach as reason:
            if not self.left_out:
                self.first_left_out, self.why = place, str(reason)
            self.left_out += 1
            return
        except AssertionError as error:
            where = str(unit) if isinstance(unit, Row) else f"{self.check.name}, {self.check.unit} number {place + 1}"
            found = [Difference(where, ("an engine stopped", str(error)), ("it should give", "a product"))]
        self.compared += 1
        if found:
            self.differing += 1
            candidates = [*found, self.smallest] if self.smallest else found
            self.smallest = min(candidates, key=lambda difference: difference.sort_key)


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


def spaces_of_rank(most_rank: int, most_classes: int) -> list[FlagVariety]:
    """All G/P of types A to G of rank at most ``most_rank`` with at most ``most_classes`` Schubert classes, in the order of spaces.

    >>> [X.name for X in spaces_of_rank(2, 5)]
    ['Gr(1,2)', 'Gr(1,3)', 'Gr(2,3)', 'Q^3', 'OG(2,5)', 'IG(1,4)', 'LG(2,4)']
    """
    found = []
    for rank in range(1, most_rank + 1):
        for letter, low, high in zip("ABCDEFG", (1, 2, 2, 4, 6, 4, 2), (99, 99, 99, 99, 8, 4, 2), strict=True):
            if low <= rank <= high:
                kind = CartanType(letter, rank)
                for marks in range(1, 2**rank):
                    X = FlagVariety(f"{kind}/P{','.join(str(i + 1) for i in range(rank) if marks >> i & 1)}")
                    if X.number_of_classes <= most_classes:
                        found.append(X)
    return sorted(found)


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
        ask = partial(_same, read, "localisation", "localisation at other numbers", _elsewhere)
        yield Check("localisation at other numbers", "rows", RowList(X), ask, weight=4)


def _agree(read: Reader, first: Engine, other: Engine, row: Row) -> Iterator[Difference]:
    afford(other, row.X, row.u.length + row.v.length)
    yield from compare(row, (first.name, read(row.u, row.v)), (other.name, other.row(row.u, row.v)))


def _same(read: Reader, one: str, other: str, route: Callable[..., RowTerms], row: Row) -> Iterator[Difference]:
    yield from compare(row, (one, read(row.u, row.v)), (other, route(row.u, row.v)))


def _elsewhere(u: Any, v: Any) -> RowTerms:
    return _localisation_elsewhere(u.variety).row(u, v)


@lru_cache(maxsize=8)
def _localisation_elsewhere(X: FlagVariety) -> "_Elsewhere":
    return _Elsewhere(X)


class _Elsewhere(Localisation):
    """Localisation with other numbers for the simple roots, the divisor and the q's: the constants must not depend on them."""

    @lru_cache(maxsize=256)  # noqa: B019  # lives as long as the variety
    def _point(self, p: int, power: int, depth: int) -> _Point:
        base = [1] if len(self.X.marked) == 1 else [pow(x, power, p) for x in self._base(p)]
        return _Point(self.X, p, base, depth, self.step, seed=power + 1_000_003)

    def _base(self, p: int) -> list[int]:
        return [int(x) for x in np.random.default_rng([p, 1]).integers(2, p, size=len(self.X.marked))]


# -- the mirror side -----------------------------------------------------------------------------------------------------


def _mirror(X: FlagVariety, read: Reader) -> Iterator[Check]:
    if X.name in CRITICAL_POINTS:
        missing = "" if has_sympy() else "needs sympy"
        yield Check("mirror potential", "spectra", [X], partial(_spectra, read), needs=CRITICAL_POINTS[X.name][1], missing=missing)


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
