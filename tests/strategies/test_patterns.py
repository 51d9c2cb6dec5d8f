"""Pattern containment."""

from itertools import permutations
from math import comb

import numpy as np
import pytest

from conjcheck.strategies.patterns import contains


@pytest.mark.parametrize("pattern", list(permutations((1, 2, 3))))
def test_each_pattern_of_length_three_is_avoided_by_catalan_many(pattern):
    """Knuth, The Art of Computer Programming 1 (1968), 2.2.1 (from memory): binomial(2n, n)/(n + 1) permutations avoid it."""
    for n in range(1, 7):
        lines = np.array(list(permutations(range(1, n + 1))), dtype=np.int64)
        assert int((~contains(lines, pattern)).sum()) == comb(2 * n, n) // (n + 1)


def test_vexillary_and_smooth_permutations_are_counted_right():
    """2143-avoiding: 1, 2, 6, 23, 103, 513 (as for 1234); 3412- and 4231-avoiding: 1, 2, 6, 22, 88, 366 (both from memory)."""
    for n, vexillary, smooth in [(3, 6, 6), (4, 23, 22), (5, 103, 88), (6, 513, 366)]:
        lines = np.array(list(permutations(range(1, n + 1))), dtype=np.int64)
        assert int((~contains(lines, (2, 1, 4, 3))).sum()) == vexillary
        assert int((~(contains(lines, (3, 4, 1, 2)) | contains(lines, (4, 2, 3, 1)))).sum()) == smooth
