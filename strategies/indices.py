"""Indices into long sequences, drawn evenly.

Hypothesis draws integers evenly only up to 256 and then prefers the small ones, so that the long classes of a large variety would
hardly be seen. Here a long range is cut into at most 256 blocks: first the block is drawn, then the place in it.
"""

from collections.abc import Sequence
from functools import lru_cache
from typing import TypeVar

from hypothesis import strategies as st

__all__ = ["draw_below", "sampled_evenly"]

T = TypeVar("T")

_BASE = 256


def draw_below(draw: st.DrawFn, count: int) -> int:
    """An integer from 0 to ``count - 1``, shrinking towards 0: one choice up to 256, two up to 65,536, three up to 2^24."""
    low, high = 0, count
    while high - low > _BASE:
        blocks = min(_BASE, -(-(high - low) // _BASE))
        block = draw(_places(blocks))
        low, high = low + block * (high - low) // blocks, low + (block + 1) * (high - low) // blocks
    return low + draw(_places(high - low))


@lru_cache(maxsize=512)
def _places(count: int) -> st.SearchStrategy[int]:
    """A range as ``sampled_from``, which unlike ``integers`` does not favour the two ends."""
    return st.sampled_from(range(count))


def sampled_evenly(elements: Sequence[T]) -> st.SearchStrategy[T]:
    """One of the elements, shrinking towards the first."""
    return st.sampled_from(elements) if len(elements) <= _BASE else _sampled(elements)


@st.composite
def _sampled(draw: st.DrawFn, elements: Sequence[T]) -> T:
    return elements[draw_below(draw, len(elements))]
