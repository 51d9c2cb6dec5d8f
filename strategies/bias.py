"""Which Schubert classes are drawn more often: those far from being Seidel classes.

A Seidel class only relabels: its products have one term, with coefficient 1 (source: ``conjcheck.geometry.symmetries``). The
*depth* of a class is the least length in its Seidel orbit, 0 for the Seidel classes. Coefficients do not change along Seidel
orbits, and they grow with the depth: on ``Fl(6)`` every product with a class of depth 0 or 1 is free of coefficients above 1, and
80 % of the products of two classes of the greatest depth 6 have one (computed).
"""

from functools import lru_cache
from operator import attrgetter

import numpy as np

from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass, orbit_of
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import Ints
from conjcheck.strategies.urns import Urn

__all__ = ["biased_urn", "depths"]

_FEW = 20
_length = attrgetter("length")


@lru_cache(maxsize=64)
def depths(X: FlagVariety) -> Ints:
    """For each class the least length in its Seidel orbit, ``(N,)``."""
    least: Ints = orbit_of(X).lengths[seidel(X).images].min(axis=0)
    return least


@lru_cache(maxsize=64)
def biased_urn(X: FlagVariety) -> Urn[SchubertClass]:
    """All classes; one of depth c has ``1 + 2 (3^c - 1) / (mean of 3^depth)`` balls, rounded down.

    All classes have one ball where bias does not help, and where equal places on different varieties help shrinking instead: on
    fewer than 20 classes (``Gr(3,6)`` is the smallest of type A with a coefficient above 1), and with a trivial Seidel group. At most
    16 powers of 3 are told apart, so that the integers stay small.

    Cost: the Seidel orbits, once (``Fl(8)``: 0.6 s).
    """
    count = len(X.classes)
    if count < _FEW or len(seidel(X).units) == 1:
        return Urn(X.classes, level=_length)
    depth = depths(X)
    powers = 3 ** np.maximum(depth - max(int(depth.max()) - 16, 0), 0)
    return Urn(X.classes, level=_length, balls=(1 + 2 * count * (powers - 1) // powers.sum()).tolist())
