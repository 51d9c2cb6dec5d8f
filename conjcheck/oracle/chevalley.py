"""The quantum Chevalley formula on any G/P: how a divisor class multiplies a Schubert class.

For a marked node i, over the positive roots alpha outside the Levi of P::

    sigma_{s_i} * sigma_u =   sum over l(u s_alpha) = l(u) + 1              of <omega_i, alpha^vee> sigma_{u s_alpha}
                            + sum over l(u s_alpha W_P) = l(u) + 1 - n_alpha of q^{d(alpha)} <omega_i, alpha^vee> sigma_{u s_alpha W_P}

with ``n_alpha = <2 rho - 2 rho_P, alpha^vee>`` and ``d(alpha)`` the coordinates of ``alpha^vee`` on the marked nodes.

Source: Fulton, Woodward, On the quantum product of Schubert classes, J. Algebraic Geom. 13 (2004), Theorem 10.1; complete flags of
type A: Fomin, Gelfand, Postnikov, Quantum Schubert polynomials, J. Amer. Math. Soc. 10 (1997), Theorem 1.3.
"""

from functools import lru_cache

import numpy as np

from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.flag_variety import Degree, FlagVariety, orbit_of
from conjcheck.geometry.weyl import Ints, roots, weight_images
from conjcheck.oracle.guard import note_question

__all__ = ["Chevalley", "chevalley"]


class Chevalley:
    """The Chevalley terms of one variety.

    A term of ``u`` is ``(w, d, c)``: ``sigma_{s_i} * sigma_u`` contains ``c[k] q^d sigma_w`` for the marked node i in place k;
    classes by their 0-based index, ``d`` and ``c`` tuples with one entry per marked node, ``d = 0`` for the classical terms.

    Cost: set-up ``O(N R rank)`` in numpy for N classes and R roots; ``terms`` is then constant.
    """

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        whole, images = orbit_of(X), weight_images(X.kind, X.marked)
        simple, coroots = roots(X.kind)
        marked = [i - 1 for i in X.marked]
        outside = simple[:, marked].any(axis=1)
        simple, coroots = simple[outside], coroots[outside]
        in_weights = simple @ np.array(cartan_matrix(X.kind), dtype=np.int64)
        self._steps = coroots[:, marked]
        drops = self._steps @ np.array(X.q_degrees, dtype=np.int64)
        self._targets: Ints = np.full((len(whole.lengths), len(simple)), -1, dtype=np.int64)
        self._classical = np.zeros(self._targets.shape, dtype=bool)
        for a, root in enumerate(in_weights):
            moved = whole.weights - self._steps[a].sum() * np.einsum("k,nkj->nj", root, images)
            target = whole.locate(moved)
            rise = whole.lengths[target] - whole.lengths
            self._classical[:, a] = rise == 1
            self._targets[:, a] = np.where((rise == 1) | (rise == 1 - drops[a]), target, -1)
        self._known: dict[int, list[tuple[int, Degree, Degree]]] = {}

    def terms(self, u: int) -> list[tuple[int, Degree, Degree]]:
        """The terms of the class with index u."""
        note_question()
        known = self._known.get(u)
        if known is None:
            zero = (0,) * self._steps.shape[1]
            known = self._known[u] = [
                (int(self._targets[u, a]), zero if self._classical[u, a] else step, step)
                for a in np.flatnonzero(self._targets[u] >= 0)
                for step in [tuple(self._steps[a].tolist())]
            ]
        return known


@lru_cache(maxsize=32)
def chevalley(X: FlagVariety) -> Chevalley:
    """The Chevalley terms of X, made once."""
    return Chevalley(X)
