"""Degrees: the exponents of q."""

from functools import cache, lru_cache
from typing import Any

from hypothesis import strategies as st
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.flag_variety import Degree, FlagVariety
from conjcheck.strategies.arguments import read_integer, read_variety

__all__ = ["degrees"]


def degrees(X: FlagVariety, *, total: int | None = None, max_total: int | None = None) -> st.SearchStrategy[Degree]:
    """Degrees d on a flag variety: tuples with one entry of 0 or more per marked node, in the order of ``X.marked``.

    Drawn as a list of nodes, one for each unit of q, so that degrees spread over several nodes are common.
    Shrinks towards the smallest ``sum d_i``, then lexicographically: ``max_total`` towards 0.

    Args:
        X: the flag variety.
        total: exactly this ``sum d_i deg q_i``.
        max_total: at most this ``sum d_i deg q_i``. Exactly one of the two is given.

    Cost: up to two choices for each unit of q.

    Raises:
        InvalidArgument: at once, also if no degree has that total (an odd one on a complete flag variety).

    >>> from conjcheck.geometry.flag_variety import Fl
    >>> from hypothesis import find
    >>> find(degrees(Fl(1, 3, n=4), max_total=9), lambda d: d[0] > 0)
    (1, 0)
    """
    read_variety(X)
    if (total is None) == (max_total is None):
        raise InvalidArgument(f"expected exactly one of total= and max_total=, got total={total!r} and max_total={max_total!r}")
    if max_total is not None:
        return _up_to(X.q_degrees, read_integer("max_total", max_total, least=0))
    exact = read_integer("total", total, least=0)
    if not _occurs(X.q_degrees, exact):
        raise InvalidArgument(f"expected a sum of the degrees {X.q_degrees} of the q_i on {X}, got total={exact}")
    return _exactly(X.q_degrees, exact)


@lru_cache(maxsize=256)
def _up_to(weights: tuple[int, ...], most: int) -> st.SearchStrategy[Degree]:
    """Units counted from the last node, the lexicographically first; a unit that does not fit any more is left out."""

    def add_up(places: list[int]) -> Degree:
        d, left = [0] * len(weights), most
        for place in places:
            if weights[-1 - place] <= left:
                d[-1 - place] += 1
                left -= weights[-1 - place]
        return tuple(d)

    return st.lists(st.integers(0, len(weights) - 1), max_size=most // min(weights)).map(add_up)


@st.composite
def _exactly(draw: st.DrawFn, weights: tuple[int, ...], total: int) -> Any:
    """Unit after unit, only where the rest can still be filled."""
    d, left = [0] * len(weights), total
    while left:
        open_places = [k for k in range(len(weights) - 1, -1, -1) if _occurs(weights, left - weights[k])]
        place = open_places[draw(st.integers(0, len(open_places) - 1))]
        d[place] += 1
        left -= weights[place]
    return tuple(d)


@cache
def _occurs(weights: tuple[int, ...], total: int) -> bool:
    """Whether total is a sum of weights, repetition allowed."""
    return total == 0 or (total > 0 and any(_occurs(weights, total - weight) for weight in sorted(set(weights))))
