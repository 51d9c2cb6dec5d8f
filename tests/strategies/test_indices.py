"""Even indices into long sequences."""

import numpy as np
import pytest
from hypothesis import strategies as st

from conjcheck.strategies.indices import draw_below


@st.composite
def below(draw, count):
    """``draw_below`` as a strategy."""
    return draw_below(draw, count)


@pytest.mark.parametrize("count", [1, 2, 255, 256, 257, 600])
def test_every_index_is_reached(drawn, count):
    """All of 0..count-1 and nothing else: the blocks fit together."""
    assert sorted(drawn(below(count), 2 * count)) == list(range(count))


@pytest.mark.parametrize("count", [40_320, 1_000_000])
def test_long_ranges_are_drawn_from_evenly(drawn, count):
    """Every quarter of the range gets its share; plain integers of Hypothesis would hardly reach the upper ones."""
    quarters = np.bincount([4 * index // count for index in drawn(below(count), 400)], minlength=4)
    assert quarters.min() > 60


@pytest.mark.parametrize("least", [0, 1, 100, 255])
def test_it_shrinks_to_the_first(smallest, least):
    """Exactly, up to 256; of a longer range to 0, and to the right block."""
    assert smallest(below(256), lambda index: index >= least) == least
    assert smallest(below(256 * 256)) == 0
    assert smallest(below(256 * 256), lambda index: index >= 256 * least) == 256 * least
