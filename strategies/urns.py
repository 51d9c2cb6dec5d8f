"""Urns: elements that come in levels, some of them several times, drawn so that the first ones are the simplest."""

from bisect import bisect_right
from collections.abc import Callable, Sequence
from itertools import accumulate, groupby
from typing import Generic, TypeVar

from hypothesis import strategies as st

from conjcheck.strategies.indices import MOST_EVEN, draw_below

__all__ = ["Urn"]

T = TypeVar("T")


class Urn(Generic[T]):
    """Elements in order, each with a number of balls.

    With up to 256 balls in all, one choice, the ball: the order of choices is the order of elements. With more, or if ``level_first``,
    first the level and then a ball of that level: these are small numbers, which Hypothesis draws evenly, and shrinking brings
    the level down while the place in it stays. Each level has its share of at most 256 tickets, at least one.

    Args:
        elements: at least one, simplest first.
        level: the level of an element, rising along the elements: the length of a class, the n of a variety.
        balls: for each element its number of balls, 1 or more; by default 1.
        level_first: draw the level first in any case.
    """

    def __init__(
        self, elements: Sequence[T], *, level: Callable[[T], int], balls: Sequence[int] | None = None, level_first: bool = False
    ) -> None:
        counts = [1] * len(elements) if balls is None else balls
        self._elements = elements
        self._last = list(accumulate(counts))
        self._bounds: dict[int, tuple[int, int]] = {}
        self._tickets: list[int] = []
        self._strategies: dict[int | None, st.SearchStrategy[int]] = {}
        total = self._last[-1]
        self._flat = total <= MOST_EVEN and not level_first
        for key, group in groupby(range(len(elements)), key=lambda place: level(elements[place])):
            places = list(group)
            low, high = self._last[places[0]] - counts[places[0]], self._last[places[-1]]
            self._bounds[key] = low, high
            self._tickets += [key] * max(1, (high - low) * min(total, MOST_EVEN) // total)

    def draw(self, draw: st.DrawFn, *, highest: int | None = None) -> T:
        """One element, of a level up to ``highest``, which has to leave something. Shrinks towards the first element."""
        if not self._flat:
            low, high = self._bounds[draw(self._levels(highest))]
        elif highest is None:
            low, high = 0, self._last[-1]
        else:
            low, high = 0, max(end for key, (_, end) in self._bounds.items() if key <= highest)
        return self._elements[bisect_right(self._last, low + draw_below(draw, high - low))]

    def _levels(self, highest: int | None) -> st.SearchStrategy[int]:
        """The tickets of the levels up to a bound."""
        if highest not in self._strategies:
            end = len(self._tickets) if highest is None else bisect_right(self._tickets, highest)
            self._strategies[highest] = st.sampled_from(self._tickets[:end])
        return self._strategies[highest]
