"""Urns: Schubert classes of one variety, some of them several times, drawn so that the first ones are the simplest."""

from bisect import bisect_right
from collections.abc import Sequence
from itertools import accumulate, groupby

from hypothesis import strategies as st

from conjcheck.geometry.flag_variety import SchubertClass
from conjcheck.strategies.indices import MOST_EVEN, draw_below

__all__ = ["Urn"]


class Urn:
    """Classes in the order of ``X.classes``, each with a number of balls.

    With up to 256 balls, one choice, the ball. With more, first the length, then a ball of that length: small numbers, which
    Hypothesis draws evenly, and the length is what shrinking should bring down first. Each length has its share of 256 tickets,
    at least one, so that the identity and the point are seen on every variety.

    Args:
        classes: at least one class, rising.
        balls: for each class its number of balls, 1 or more.
    """

    def __init__(self, classes: Sequence[SchubertClass], balls: Sequence[int]) -> None:
        self.classes = classes
        self._last = list(accumulate(balls))
        self._lengths = [u.length for u in classes]
        total = self._last[-1]
        tickets = []
        self._bounds: dict[int, tuple[int, int]] = {}
        for length, group in groupby(range(len(classes)), key=self._lengths.__getitem__):
            places = list(group)
            low, high = self._last[places[0]] - balls[places[0]], self._last[places[-1]]
            self._bounds[length] = low, high
            tickets += [length] * max(1, (high - low) * MOST_EVEN // total)
        self._tickets = tickets
        self._strategies: dict[int, st.SearchStrategy[int]] = {}

    def draw(self, draw: st.DrawFn, *, longest: int | None = None) -> SchubertClass:
        """One class, of length up to ``longest``; which has to leave something. Shrinks towards the first class."""
        most = self._lengths[-1] if longest is None else min(longest, self._lengths[-1])
        low, high = 0, self._last[bisect_right(self._lengths, most) - 1]
        if high > MOST_EVEN:
            low, high = self._bounds[draw(self._length_strategy(most))]
        return self.classes[bisect_right(self._last, low + draw_below(draw, high - low))]

    def _length_strategy(self, most: int) -> st.SearchStrategy[int]:
        """The tickets of the lengths up to a bound."""
        if most not in self._strategies:
            self._strategies[most] = st.sampled_from(self._tickets[: bisect_right(self._tickets, most)])
        return self._strategies[most]
