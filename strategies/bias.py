"""Which Schubert classes are drawn more often: those far from being Seidel classes.

A Seidel class only relabels: its products have one term, with coefficient 1 (source: ``conjcheck.geometry.symmetries``). The
*depth* of a class is the least length in its Seidel orbit, 0 for the Seidel classes. Coefficients do not change along Seidel
orbits, and they grow with the depth: on ``Fl(6)`` every product with a class of depth 0 or 1 is free of coefficients above 1, and
80 % of the products of two classes of the greatest depth 6 have one (computed).
"""

from bisect import bisect_right
from functools import lru_cache

import numpy as np
from hypothesis import strategies as st

from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass, orbit_of
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import Ints
from conjcheck.strategies.indices import draw_below

__all__ = ["depths", "draw_class"]


@lru_cache(maxsize=64)
def depths(X: FlagVariety) -> Ints:
    """For each class the least length in its Seidel orbit, ``(N,)``."""
    least: Ints = orbit_of(X).lengths[seidel(X).images].min(axis=0)
    return least


@lru_cache(maxsize=64)
def _ranks(X: FlagVariety) -> list[int]:
    """Entry k is the number of ranks of the classes 0..k: one for a class of depth c, and ``2 * 3^c / (mean of 3^depth)`` more.

    At most 16 powers of 3 matter, so that the integers stay small. A trivial Seidel group says nothing: all classes alike.
    """
    if len(seidel(X).units) == 1:
        return list(range(1, len(X.classes) + 1))
    depth = depths(X)
    powers = 3 ** np.maximum(depth - depth.max() + 16, 0)
    ranks: list[int] = np.cumsum(1 + 2 * len(powers) * powers // powers.sum()).tolist()
    return ranks


def draw_class(draw: st.DrawFn, X: FlagVariety, *, longest: int | None = None) -> SchubertClass:
    """A Schubert class of length up to ``longest`` (all by default), each at least a third as often as without bias.

    Shrinks towards the first classes in the order of ``X.classes``: what is drawn is a rank in a table in which deep classes have
    many places, and higher ranks never belong to earlier classes.

    Cost: constant, after the Seidel orbits are known (``Fl(8)``: 0.6 s, once).
    """
    ranks, classes = _ranks(X), X.classes
    last = classes[-1] if longest is None or longest >= X.dim else X.of_length(longest)[-1]
    return classes[bisect_right(ranks, draw_below(draw, ranks[last.index]))]
