"""Indices into long sequences, drawn evenly."""

from functools import lru_cache

from hypothesis import strategies as st

__all__ = ["MOST_EVEN", "draw_below"]

MOST_EVEN = 256
"""Hypothesis draws integers evenly from ranges up to this length; from longer ones it prefers the small integers."""


def draw_below(draw: st.DrawFn, count: int) -> int:
    """An integer from 0 to ``count - 1``, shrinking towards 0: one choice up to 256, two up to 65,536.

    A long range is cut into at most 256 blocks: first the block is drawn, then the place in it. Shrinking does not get from the
    first place of a block to the last one of the block before: good enough among classes of one length, not among all.
    """
    low, high = 0, count
    while high - low > MOST_EVEN:
        blocks = min(MOST_EVEN, -(-(high - low) // MOST_EVEN))
        block = draw(_places(blocks))
        low, high = low + block * (high - low) // blocks, low + (block + 1) * (high - low) // blocks
    return low + draw(_places(high - low))


@lru_cache(maxsize=512)
def _places(count: int) -> st.SearchStrategy[int]:
    """A range as ``sampled_from``, which unlike ``integers`` does not favour the two ends."""
    return st.sampled_from(range(count))
