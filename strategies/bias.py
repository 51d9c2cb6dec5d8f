"""Which Schubert classes are drawn more often: those far from being Seidel classes.

A Seidel class only relabels: its products have one term, with coefficient 1 (source: ``conjcheck.geometry.symmetries``). The
*depth* of a class is the least length in its Seidel orbit, 0 for the Seidel classes. Coefficients do not change along Seidel
orbits, and they grow with the depth: on ``Fl(6)`` every product with a class of depth 0 or 1 is free of coefficients above 1, and
80 % of the products of two classes of the greatest depth 6 have one (computed).
"""

from functools import lru_cache

import numpy as np

from conjcheck.geometry.flag_variety import FlagVariety, orbit_of
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import Ints
from conjcheck.strategies.urns import Urn

__all__ = ["biased_urn", "depths"]


@lru_cache(maxsize=64)
def depths(X: FlagVariety) -> Ints:
    """For each class the least length in its Seidel orbit, ``(N,)``."""
    least: Ints = orbit_of(X).lengths[seidel(X).images].min(axis=0)
    return least


@lru_cache(maxsize=64)
def biased_urn(X: FlagVariety) -> Urn:
    """All classes: one ball for a class of depth c, and ``2 * 3^c / (mean of 3^depth)`` more, rounded down.

    So none has less than a third of its fair share. At most 16 powers of 3 matter, so that the integers stay small. A trivial Seidel group says nothing: all classes alike.

    Cost: the Seidel orbits, once (``Fl(8)``: 0.6 s).
    """
    depth = depths(X) if len(seidel(X).units) > 1 else np.zeros(len(X.classes), dtype=np.int64)
    powers = 3 ** np.maximum(depth - depth.max() + 16, 0)
    return Urn(X.classes, (1 + 2 * len(powers) * powers // powers.sum()).tolist())
