"""Premises: from any row to one that satisfies a premise, instead of drawing again and again."""

from collections.abc import Callable, Sequence
from typing import Any, TypeVar

from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass

__all__ = ["Ground"]

T = TypeVar("T")
Pair = tuple[SchubertClass, SchubertClass]

_TABLED = 1000


class Ground:
    """The rows that a premise allows.

    Args:
        premise: a predicate ``(X, u, v)``, or ``None`` for all rows.
        classical: allow only ``l(u) + l(v) <= dim X``.
    """

    def __init__(self, premise: Callable[..., Any] | None, *, classical: bool) -> None:
        self._premise = premise
        self.classical = classical
        self._tables: dict[FlagVariety, list[Pair]] = {}

    def allows(self, u: SchubertClass, v: SchubertClass) -> bool:
        """Whether the row of u and v is allowed."""
        X = u.variety
        if self.classical and u.length + v.length > X.dim:
            return False
        return self._premise is None or bool(self._premise(X, u, v))

    def settle(self, u: SchubertClass, v: SchubertClass) -> Pair | None:
        """The row of u and v if allowed, else one with another v, else one with another u, else any; spread over all of them.

        ``None`` if there is none, or none was found on a variety with more than 1,000 classes. Earlier classes settle on earlier
        ones, and what is answered never depends on what was asked before.

        Cost: the premise is asked once if it holds, up to ``2 N`` times if it does not, and ``N^2`` times, once for each variety
        with at most 1,000 classes, if it allows neither u nor v.
        """
        if self.allows(u, v):
            return u, v
        X = u.variety
        if partners := [b for b in X.classes if self.allows(u, b)]:
            return u, _spread(partners, v)
        if partners := [a for a in X.classes if self.allows(a, v)]:
            return _spread(partners, u), v
        table = self._table(X)
        return _spread(table, u, v) if table else None

    def _table(self, X: FlagVariety) -> list[Pair]:
        """All allowed rows of a variety that is small enough."""
        if X not in self._tables:
            small = X.classes if len(X.classes) <= _TABLED else ()
            self._tables[X] = [(u, v) for u in small for v in small if self.allows(u, v)]
        return self._tables[X]


def _spread(allowed: Sequence[T], *drawn: SchubertClass) -> T:
    """The element as far along in the allowed ones as the drawn classes are in all classes, or pairs of classes."""
    place, count = 0, 1
    for u in drawn:
        place, count = place * len(u.variety.classes) + u.index, count * len(u.variety.classes)
    return allowed[place * len(allowed) // count]
