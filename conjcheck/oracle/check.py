"""What an audit is made of: checks, differences, rows by their place in the order, and a reader of products that remembers."""

from bisect import bisect_right
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from math import gcd
from typing import Any, Protocol, TypeVar

from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import Case, Row, place_in_row
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.oracle import engines_for, row_terms
from conjcheck.oracle.engine import Engine, RowTerms
from conjcheck.oracle.localisation import LocalisationEngine

__all__ = ["Check", "Difference", "Reader", "RowList", "TripleList", "at_row", "at_two_places", "compare", "sum_degrees", "times"]

Value = int | str
T_co = TypeVar("T_co", covariant=True)

_MOST_WORK = 100_000_000
_MOST_TERMS = 2_000_000


@dataclass(frozen=True, slots=True)
class Difference:
    """Two values that should be equal and are not.

    Attributes:
        where: the case; words where no single constant is meant, as in a degree, a relation or a product of three classes.
        one, other: pairs (how it was found, value).
        near: a case that gives words their place in the order.
    """

    where: Case | str
    one: tuple[str, Value]
    other: tuple[str, Value]
    near: Case | None = None

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order "smaller": cases in their own order, then the others in the order of what they are near to."""
        if isinstance(self.where, Case):
            return (0, *self.where.sort_key)
        return (1, *self.near.sort_key) if self.near else (2, self.where)


class Units(Protocol[T_co]):
    """Things that are compared one after the other, by their place in the order; they need not exist before they are asked for."""

    def __len__(self) -> int: ...

    def __getitem__(self, place: int, /) -> T_co: ...


@dataclass(frozen=True, slots=True)
class Check:
    """One thing that must hold on one space.

    Attributes:
        name: how tables call it.
        unit: what one unit is, in the plural.
        units: the units, in order.
        ask: compares one unit: nothing if it agrees. It may raise ``OutOfReach``: then this unit is left out.
        weight: its share of the time among the checks of its space.
        needs: about how many seconds one unit takes, where that matters.
        missing: why it cannot run at all.
    """

    name: str
    unit: str
    units: Units[Any]
    ask: Callable[[Any], Iterable[Difference]]
    weight: int = 1
    needs: float = 0.0
    missing: str = ""


class RowList:
    """All rows of X in the order of ``conjcheck.geometry.case.rows``, or those with ``l(u) + l(v) = total``, without listing them.

    >>> from conjcheck.geometry.flag_variety import Gr
    >>> len(RowList(Gr(2, 4))), RowList(Gr(2, 4))[35]
    (36, Row.parse('Gr(2,4): (2,2) * (2,2)'))
    """

    def __init__(self, X: FlagVariety, total: int | None = None) -> None:
        self.X = X
        self._starts: list[int] = []
        self._lengths: list[tuple[int, int]] = []
        self._size = 0
        for whole in range(2 * X.dim + 1) if total is None else [total]:
            for length in range(max(0, whole - X.dim), min(whole, X.dim) + 1):
                self._starts.append(self._size)
                self._lengths.append((length, whole - length))
                self._size += len(X.of_length(length)) * len(X.of_length(whole - length))

    def __len__(self) -> int:
        return self._size

    def __getitem__(self, place: int, /) -> Row:
        if not 0 <= place < self._size:
            raise IndexError(place)
        block = bisect_right(self._starts, place) - 1
        left, right = (self.X.of_length(length) for length in self._lengths[block])
        u, v = divmod(place - self._starts[block], len(right))
        return Row(self.X, left[u], right[v])


class TripleList:
    """All pairs (row, class) of X, in the order of rows, then of classes."""

    def __init__(self, X: FlagVariety) -> None:
        self.X, self._rows = X, RowList(X)

    def __len__(self) -> int:
        return len(self._rows) * len(self.X.classes)

    def __getitem__(self, place: int, /) -> tuple[Row, SchubertClass]:
        row, z = divmod(place, len(self.X.classes))
        return self._rows[row], self.X.classes[z]


class Reader:
    """Products as a user gets them, by the engine that the oracle chooses; remembered, as far as memory allows.

    Args:
        seconds: a product that needs more than about a tenth of it, but a second at least, is refused with ``OutOfReach``.
    """

    def __init__(self, seconds: float = 10.0) -> None:
        self._patience = max(seconds / 10, 1.0)
        self._known: dict[tuple[SchubertClass, SchubertClass], RowTerms] = {}
        self._terms = 0

    def __call__(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``."""
        found = self._known.get((u, v))
        if found is None:
            self.afford(engines_for(u.variety)[0], u, v)
            found = self._known[u, v] = row_terms(u, v)
            self._terms += len(found) + 1
            if self._terms > _MOST_TERMS:
                self._known, self._terms = {(u, v): found}, len(found)
        return found

    def afford(self, engine: Engine, u: SchubertClass, v: SchubertClass) -> None:
        """Refuse a product by localisation that takes too long: the time goes into the points at which it evaluates.

        Raises:
            OutOfReach: it does.
        """
        if not isinstance(engine, LocalisationEngine):
            return
        X, total = u.variety, u.length + v.length
        size, work, depth = X.number_of_classes, engine.work(X, total), total // gcd(*X.q_degrees)
        points = work // ((depth + 1) * (depth + 2) * size**2)
        seconds = points * (0.01 + size / 2_500)
        if seconds > self._patience or work > _MOST_WORK:
            raise OutOfReach(f"localisation of {Row(X, u, v)} takes about {seconds:.0f} s")


def sum_degrees(*degrees: Degree) -> Degree:
    """The entrywise sum."""
    return tuple(map(sum, zip(*degrees, strict=True)))


def times(read: Reader, x: RowTerms, y: RowTerms) -> RowTerms:
    """The product of two elements ``{(w, d): coefficient}`` of QH*(X), by bilinearity; zeros dropped."""
    total: RowTerms = {}
    for (u, d), a in x.items():
        for (v, e), b in y.items():
            for (w, f), count in read(u, v).items():
                key = w, sum_degrees(d, e, f)
                total[key] = total.get(key, 0) + a * b * count
    return {key: count for key, count in total.items() if count}


def compare(
    row: Row, one: tuple[str, RowTerms], other: tuple[str, RowTerms], *, third: SchubertClass | None = None
) -> Iterator[Difference]:
    """The smallest case of a row where two products differ, if there is one; with a third class they are products of three."""
    a, b = one[1], other[1]
    keys = [key for key in {*a, *b} if a.get(key, 0) != b.get(key, 0)]
    if not keys:
        return
    w, d = min(keys, key=place_in_row)
    case = Case(row.X, row.u, row.v, w, d)
    values = (one[0], a.get((w, d), 0)), (other[0], b.get((w, d), 0))
    if third is None:
        yield Difference(case, *values)
    else:
        words = f"{row.X}: ({row.u} * {row.v}) * {third} -> {w}, q^({','.join(map(str, d))})"
        yield Difference(words, *values, near=case)


def at_row(row: Row, one: tuple[str, Value], other: tuple[str, Value]) -> Difference:
    """A difference of a row as a whole."""
    return Difference(str(row), one, other, near=Case(row.X, row.u, row.v, row.X.identity, (0,) * len(row.X.marked)))


def at_two_places(law: str, pairs: Iterable[tuple[Case, int, Case, int]]) -> Iterator[Difference]:
    """The smallest difference among constants at two cases each that a law says are equal; the smaller case is the one named."""
    found = []
    for first, n, second, m in pairs:
        if n != m:
            (here, a), (there, b) = sorted([(first, n), (second, m)], key=lambda pair: pair[0].sort_key)
            found.append(Difference(here, ("product", a), (f"{law}, from {there}", b)))
    if found:
        yield min(found, key=lambda difference: difference.sort_key)
