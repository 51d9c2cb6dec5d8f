"""Steps: where multiplication by divisors leads from a Schubert class. Supports of products, not their coefficients.

The quantum Chevalley formula (Fulton, Woodward, On the quantum product of Schubert classes, J. Algebraic Geom. 13 (2004), Theorem
10.1) has for each positive root alpha outside the Levi at most one term: ``u s_alpha`` if it is longer by 1, or
``q^{d(alpha)} u s_alpha W_P`` if that is shorter by ``n_alpha - 1``; it occurs in ``sigma_{s_i} * sigma_u`` for those marked nodes
i at which ``d(alpha)``, the coroot on the marked nodes, is positive.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass, orbit_of
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import Ints, roots, weight_images

__all__ = ["Step", "home", "ladder", "steps"]


@dataclass(frozen=True, slots=True)
class Step:
    """One Chevalley term.

    Attributes:
        w: the class it leads to.
        d: the degree it adds, one entry per marked node; 0 for a classical term.
        divisors: 0-based places in ``X.marked`` of the divisors that have this term.
    """

    w: SchubertClass
    d: Degree
    divisors: tuple[int, ...]


@lru_cache(maxsize=64)
def _outer_roots(X: FlagVariety) -> tuple[Ints, Ints, Ints]:
    """The positive roots outside the Levi: in fundamental weights, their coroots on the marked nodes, and ``n_alpha``."""
    simple, coroots = roots(X.kind)
    marked = np.array(X.marked) - 1
    outside = simple[:, marked].any(axis=1)
    on_marked = coroots[outside][:, marked]
    return simple[outside] @ np.array(cartan_matrix(X.kind)), on_marked, on_marked @ np.array(X.q_degrees)


@lru_cache(maxsize=100_000)
def steps(u: SchubertClass) -> tuple[Step, ...]:
    """All steps from u: the classical ones by target, then the others by degree and target. Cost: ``O(R rank^2)`` for R roots."""
    X = u.variety
    outer, coroots, drops = _outer_roots(X)
    whole = orbit_of(X)
    moved = whole.weights[u.index] - coroots.sum(axis=1)[:, None] * (outer @ weight_images(X.kind, X.marked)[u.index])
    targets = whole.locate(moved)
    rises = whole.lengths[targets] - u.length
    zero = (0,) * len(X.marked)
    found = [
        Step(X.classes[target], zero if rise == 1 else tuple(coroot), tuple(k for k, c in enumerate(coroot) if c))
        for target, rise, drop, coroot in zip(targets.tolist(), rises.tolist(), drops.tolist(), coroots.tolist(), strict=True)
        if rise in (1, 1 - drop)
    ]
    return tuple(sorted(found, key=lambda step: (sum(step.d), step.d, step.w.index)))


@lru_cache(maxsize=100_000)
def ladder(v: SchubertClass) -> tuple[int, ...]:
    """Divisors whose product contains ``sigma_v``, as 0-based places in ``X.marked``: one for each letter of its word."""
    X, word = v.variety, v.word
    rungs, below = [], X.identity
    for start in range(len(word) - 1, -1, -1):
        above = X.schubert(word=word[start:])
        rungs.append(next(step.divisors[0] for step in steps(below) if step.w is above and not any(step.d)))
        below = above
    return tuple(rungs)


@lru_cache(maxsize=100_000)
def home(v: SchubertClass) -> tuple[int, SchubertClass]:
    """``(g, a)`` with v = g a for a Seidel element g (its number) and the first class a of the Seidel orbit of v."""
    group = seidel(v.variety)
    images = group.images[:, v.index]
    nearest = int(images.argmin())
    return group.inverse(nearest), v.variety.classes[int(images[nearest])]
