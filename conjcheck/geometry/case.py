"""Cases and rows, and **the** order "smaller": one definition for surveys, shrinking, minimising and reports.

A case ``(X, u, v, w, d)`` asks: what is ``N_{u,v}^{w,d}``? A row ``(X, u, v)`` asks for one product. The order, simplest
first: rank; number of marked nodes; dimension; type and marked nodes; then the row: ``l(u) + l(v)``, ``l(u)``, ``u``, ``v`` in the
order of the classes; then ``sum d_i``, ``d``, ``w``. Rows come in order too: the first row that differs holds the minimum.
"""

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import lru_cache
from math import comb
from typing import Any

from conjcheck.errors import DifferentVarieties, NotationError
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.geometry.notation import read_integers

__all__ = [
    "Case",
    "Row",
    "count_below",
    "count_cases",
    "degrees_of_total",
    "outcomes",
    "parse_class",
    "place_in_row",
    "place_of_row",
    "read_degree",
    "rows",
]


@dataclass(frozen=True, slots=True)
class Row:
    """One product ``sigma_u * sigma_v`` on X. ``Row.parse(str(row)) == row``.

    >>> Row.parse("Gr(2,4): (2,1) * (1)")
    Row.parse('Gr(2,4): (2,1) * (1)')
    """

    X: FlagVariety
    u: SchubertClass
    v: SchubertClass

    def __post_init__(self) -> None:
        for name in ("u", "v"):
            _check_home(self.X, name, getattr(self, name))

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order "smaller" among rows."""
        u, v = self.u, self.v
        return (*self.X.sort_key, u.length + v.length, u.length, u.index, v.index)

    def __lt__(self, other: "Row") -> bool:
        return self.sort_key < other.sort_key

    def __str__(self) -> str:
        return f"{self.X}: {self.u} * {self.v}"

    def __repr__(self) -> str:
        return f"Row.parse({str(self)!r})"

    @classmethod
    def parse(cls, text: str) -> "Row":
        """The row written as ``Fl(1,3;4): [2143] * [3241]``."""
        found = re.fullmatch(r"\s*(\S.*?)\s*:\s*(.+?)\s*\*\s*(.+?)\s*", text) if isinstance(text, str) else None
        if not found:
            raise NotationError(f"expected a row such as 'Gr(2,4): (2,1) * (1)', got {text!r}")
        X = FlagVariety(found[1])
        return cls(X, parse_class(X, found[2]), parse_class(X, found[3]))


@dataclass(frozen=True, slots=True)
class Case:
    """One question: what is ``N_{u,v}^{w,d}`` on X? ``d`` has one entry per marked node. ``Case.parse(str(case)) == case``.

    >>> case = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")
    >>> case.d, case.obeys_degree_axiom
    ((1,), True)
    """

    X: FlagVariety
    u: SchubertClass
    v: SchubertClass
    w: SchubertClass
    d: Degree

    def __post_init__(self) -> None:
        for name in ("u", "v", "w"):
            _check_home(self.X, name, getattr(self, name))
        object.__setattr__(self, "d", read_degree(self.X, self.d))

    @property
    def row(self) -> Row:
        """The row this case belongs to."""
        return Row(self.X, self.u, self.v)

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order "smaller" among cases."""
        return (*self.row.sort_key, *place_in_row((self.w, self.d)))

    @property
    def obeys_degree_axiom(self) -> bool:
        """Whether ``l(u) + l(v) = l(w) + sum d_i deg q_i``; otherwise the constant is 0."""
        return self.u.length + self.v.length == self.w.length + _weight(self.X, self.d)

    def __lt__(self, other: "Case") -> bool:
        return self.sort_key < other.sort_key

    def __str__(self) -> str:
        return f"{self.row} -> {self.w}, q^({','.join(map(str, self.d))})"

    def __repr__(self) -> str:
        return f"Case.parse({str(self)!r})"

    @classmethod
    def parse(cls, text: str) -> "Case":
        """The case written as ``Fl(1,3;4): [2143] * [3241] -> [4123], q^(1,0)``; without ``q^`` the degree is 0."""
        shape = r"(.+?)->\s*(\S.*?)\s*(?:,\s*q\^\(\s*(\d+(?:\s*,\s*\d+)*)\s*\)\s*)?"
        found = re.fullmatch(shape, text.strip()) if isinstance(text, str) else None
        if not found:
            raise NotationError(f"expected a case such as 'Gr(2,4): (2,1) * (2,1) -> (2), q^(1)', got {text!r}")
        row = Row.parse(found[1])
        if found[3] is None:
            d: Degree = (0,) * len(row.X.marked)
        else:
            d = tuple(map(int, found[3].split(",")))
        return cls(row.X, row.u, row.v, parse_class(row.X, found[2]), d)


def place_in_row(outcome: tuple[SchubertClass, Degree]) -> tuple[int, Degree, int]:
    """The order "smaller" inside a row, on outcomes ``(w, d)``."""
    w, d = outcome
    return sum(d), d, w.index


def _check_home(X: FlagVariety, name: str, u: SchubertClass) -> None:
    if not isinstance(X, FlagVariety):
        raise NotationError(f"expected a flag variety for X, got X={X!r}; make one with FlagVariety('Gr(2,4)')")
    if not isinstance(u, SchubertClass):
        raise NotationError(f"expected a Schubert class of {X} for {name}, got {name}={u!r}; make one with X.schubert(...)")
    if u.variety is not X:
        raise DifferentVarieties(f"expected a Schubert class of {X} for {name}, got {u!r} of {u.variety}")


def _weight(X: FlagVariety, d: Iterable[int]) -> int:
    """The degree ``sum d_i deg q_i`` of ``q^d``."""
    return sum(a * b for a, b in zip(d, X.q_degrees, strict=True))


def read_degree(X: FlagVariety, d: Iterable[int]) -> Degree:
    """A degree on X: one integer of 0 or more per marked node."""
    degree = read_integers("d", d)
    if len(degree) != len(X.marked):
        raise NotationError(f"expected {len(X.marked)} entries in d on {X}, one per marked node, got d={degree}")
    for place, entry in enumerate(degree, start=1):
        if entry < 0:
            raise NotationError(f"expected entries of 0 or more in d, got entry {place} = {entry} in d={degree}")
    return degree


def parse_class(X: FlagVariety, text: str) -> SchubertClass:
    """The class of X written as ``str(u)``: ``(2,1)``, ``[2143]``, ``[10.2.1...]``, ``[1.-3.2]`` or ``<1.3.2>``; any that X has."""
    letter = X.kind.letter
    if not isinstance(text, str) or not (found := _CLASS.fullmatch(re.sub(r"\s", "", text))):
        samples = "(2,1), [2143] or <1.3.2>" if letter == "A" else "(3,1), [1.-3.2] or <1.3.2>" if letter in "BCD" else "<1.3.2>"
        raise NotationError(f"expected a class such as {samples}, got {text!r}")
    body = found["line"]
    if body is not None:
        if letter in "BCD" and "." not in body:
            raise NotationError(f"expected a signed permutation of 1..{X.rank} with dots, such as [1.-3.2], got {text!r}")
        entries = tuple(map(int, body.split(".") if "." in body else body))
        return X.schubert(permutation=entries) if letter == "A" else X.schubert(signed=entries)
    if found["word"] is not None:
        return X.schubert(word=_entries(found["word"], "."))
    return X.schubert(partition=_entries(found["partition"], ","))


_CLASS = re.compile(r"\((?P<partition>(\d+(,\d+)*)?)\)|\[(?P<line>\d+|-?\d+(\.-?\d+)+)\]|<(?P<word>(\d+(\.\d+)*)?)>")


def _entries(text: str, separator: str) -> tuple[int, ...]:
    return tuple(map(int, text.split(separator))) if text else ()


@lru_cache(maxsize=4096)
def degrees_of_total(X: FlagVariety, total: int) -> tuple[Degree, ...]:
    """All degrees d with ``sum d_i deg q_i = total``, by ``sum d_i``, then lexicographically."""

    def fill(left: int, weights: tuple[int, ...]) -> Iterator[Degree]:
        if len(weights) == 1:
            if left % weights[0] == 0:
                yield (left // weights[0],)
            return
        for first in range(left // weights[0] + 1):
            for rest in fill(left - first * weights[0], weights[1:]):
                yield (first, *rest)

    return tuple(sorted(fill(total, X.q_degrees), key=lambda d: (sum(d), d))) if total >= 0 else ()


@lru_cache(maxsize=64)
def outcomes(
    X: FlagVariety, total: int, *, classical: bool = False, equivariant: bool = False
) -> tuple[tuple[SchubertClass, Degree], ...]:
    """All ``(w, d)`` with ``l(w) + sum d_i deg q_i = total``, in order; only ``d = 0`` if classical; ``<= total`` if equivariant.

    Cost: their number, ``count_cases``, which grows fast: 22,000 for the point squared on ``Fl(5)``.
    """
    if equivariant:
        levels = [outcomes(X, smaller, classical=classical) for smaller in range(total + 1)]
        return tuple(sorted((outcome for level in levels for outcome in level), key=place_in_row))
    none = (0,) * len(X.marked)
    found = [
        (w, d)
        for weight in ([0] if classical else range(total + 1))
        for d in ([none] if classical else degrees_of_total(X, weight))
        for w in X.of_length(total - weight)
    ]
    return tuple(sorted(found, key=place_in_row))


@lru_cache(maxsize=65536)
def count_cases(X: FlagVariety, total: int, *, classical: bool = False, equivariant: bool = False) -> int:
    """The number of outcomes, without making them."""
    if equivariant:
        return sum(count_cases(X, smaller, classical=classical) for smaller in range(total + 1))
    if classical:
        return len(X.of_length(total))
    return sum(_count_degrees(X.q_degrees, total - length) * len(X.of_length(length)) for length in range(min(total, X.dim) + 1))


@lru_cache(maxsize=65536)
def _count_degrees(weights: tuple[int, ...], total: int) -> int:
    if len(set(weights)) == 1:
        parts, rest = divmod(total, weights[0])
        return 0 if rest else comb(parts + len(weights) - 1, len(weights) - 1)
    return sum(_count_degrees(weights[1:], total - x) for x in range(0, total + 1, weights[0]))


def count_below(
    X: FlagVariety, total: int, outcome: tuple[SchubertClass, Degree], *, classical: bool = False, equivariant: bool = False
) -> int:
    """The number of outcomes of ``count_cases`` that are smaller than a given outcome, without making them."""
    if equivariant:
        return sum(count_below(X, smaller, outcome, classical=classical) for smaller in range(total + 1))
    w, d = outcome
    smaller = 0
    for length in [total] if classical else range(min(total, X.dim) + 1):
        level = X.of_length(length)
        for e in degrees_of_total(X, total - length) if level else ():
            if e == d:
                smaller += sum(x.index < w.index for x in level)
            elif (sum(e), e) < (sum(d), d):
                smaller += len(level)
    return smaller


def place_of_row(row: Row) -> int:
    """The 0-based place of a row among all rows of its variety, in order.

    >>> place_of_row(Row.parse("Gr(1,3): () * (2)"))
    3
    """
    X, a, b = row.X, row.u.length, row.v.length
    sizes = [len(X.of_length(length)) for length in range(X.dim + 1)]
    before = sum(x * y for i, x in enumerate(sizes) for j, y in enumerate(sizes) if (i + j, i) < (a + b, a))
    return before + X.of_length(a).index(row.u) * sizes[b] + X.of_length(b).index(row.v)


def rows(X: FlagVariety, first: int = 0, last: int | None = None) -> Iterator[Row]:
    """The rows of a variety in order, all of them or those at the 0-based places ``first <= k < last``.

    Places before ``first`` are skipped block by block, not one by one.

    >>> [str(row) for row in rows(FlagVariety("Gr(1,3)"), 2, 4)]
    ['Gr(1,3): (1) * ()', 'Gr(1,3): () * (2)']
    """
    end = X.number_of_classes**2 if last is None else last
    place = 0
    for total in range(2 * X.dim + 1):
        for length in range(max(0, total - X.dim), min(total, X.dim) + 1):
            left, right = X.of_length(length), X.of_length(total - length)
            size = len(left) * len(right)
            for k in range(max(first - place, 0), min(end - place, size)):
                yield Row(X, left[k // len(right)], right[k % len(right)])
            place += size
            if place >= end:
                return
