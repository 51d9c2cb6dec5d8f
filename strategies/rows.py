"""Rows: products of two Schubert classes, those with many and large constants more often."""

from collections.abc import Callable, Iterator
from typing import Any

from hypothesis import reject
from hypothesis import strategies as st
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.case import Row
from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import MOST_CLASSES, FlagVariety, SchubertClass
from conjcheck.strategies.arguments import read_premise
from conjcheck.strategies.bias import biased_classes
from conjcheck.strategies.varieties import members

__all__ = ["rows"]

Fits = Callable[[SchubertClass, SchubertClass], bool]

_ATTEMPTS = 5
_REACH = 1000


def rows(
    on: Family,
    *,
    min_n: int = 2,
    max_n: int | None = None,
    max_classes: int = MOST_CLASSES,
    premise: Callable[..., Any] | None = None,
    classical: bool = False,
) -> st.SearchStrategy[Row]:
    """Rows ``(X, u, v)`` of the flag varieties of a family.

    Shrinks towards the smallest variety, then the first u, then the first v in the order of ``X.classes``: to ``1 * 1`` if nothing
    stands against it. Three choices.

    Args:
        on: the family.
        min_n: the least ``X.n``.
        max_n: the greatest ``X.n``; by default as for :func:`flag_varieties`.
        max_classes: the greatest number of Schubert classes.
        premise: a predicate ``(X, u, v)``; only rows that satisfy it. From a row that does not, the search goes to the nearest one
            that does, changing u alone or v alone, so a thin premise costs calls of the premise, and few rejected examples.
        classical: only rows with ``l(u) + l(v) <= dim X``, the ones that have terms with ``d = 0``.

    Cost: constant without a premise, after the first draw on a variety.

    Raises:
        InvalidArgument: at once.
    """
    varieties = members(on, min_n=min_n, max_n=max_n, max_classes=max_classes)
    holds = read_premise(premise)
    if not isinstance(classical, bool):
        raise InvalidArgument(f"expected True or False for classical, got classical={classical!r}")
    return _rows(varieties, holds, classical)


@st.composite
def _rows(draw: st.DrawFn, varieties: tuple[FlagVariety, ...], premise: Callable[..., Any] | None, classical: bool) -> Row:
    """Variety first, then u, then v."""
    X = varieties[draw(st.integers(0, len(varieties) - 1))]

    def fits(u: SchubertClass, v: SchubertClass) -> bool:
        return (not classical or u.length + v.length <= X.dim) and (premise is None or bool(premise(X, u, v)))

    for _ in range(_ATTEMPTS):
        u = draw(biased_classes(X))
        v = draw(biased_classes(X, longest=X.dim - u.length if classical else None))
        found = next((Row(X, a, b) for a, b in _nearby(u, v) if fits(a, b)), None)
        if found:
            return found
    return reject()


def _nearby(u: SchubertClass, v: SchubertClass) -> Iterator[tuple[SchubertClass, SchubertClass]]:
    """The row itself, then those that differ in one class, nearest first, in both directions but the smaller one first."""
    yield u, v
    classes = u.variety.classes
    for step in range(1, min(_REACH, len(classes))):
        for sign in (-step, step):
            if 0 <= v.index + sign < len(classes):
                yield u, classes[v.index + sign]
            if 0 <= u.index + sign < len(classes):
                yield classes[u.index + sign], v
