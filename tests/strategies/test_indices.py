"""Even indices into long sequences."""

import numpy as np
import pytest
from hypothesis import strategies as st

from conjcheck.strategies.indices import draw_below, sampled_evenly


@st.composite
def below(draw, count):
    """``draw_below`` as a strategy."""
    return draw_below(draw, count)


@pytest.mark.parametrize("count", [1, 2, 255, 256, 257, 1000])
def test_every_index_is_reached(drawn, count):
    """All of 0..count-1 and nothing else: the blocks fit together."""
    assert sorted(drawn(below(count), 5 * count)) == list(range(count))


@pytest.mark.parametrize("count", [40_320, 1_000_000])
def test_long_ranges_are_drawn_from_evenly(drawn, count):
    """Every quarter of the range gets its share; plain integers of Hypothesis would hardly reach the upper ones."""
    quarters = np.bincount([4 * index // count for index in drawn(below(count), 1000)], minlength=4)
    assert quarters.min() > 150


@pytest.mark.parametrize("least", [0, 1, 255, 256, 4711, 40_319])
def test_it_shrinks_to_the_first(smallest, least):
    """Towards 0, and to a lower bound exactly."""
    assert smallest(below(40_320), lambda index: index >= least) == least
    assert smallest(sampled_evenly(range(40_320)), lambda index: index >= least) == least
