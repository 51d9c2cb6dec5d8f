"""The coordinates ``sigma_u|_w(z)`` of Schubert classes at the fixed points of G/P, at given numbers modulo a prime.

They are solved from the equivariant quantum Chevalley formula, here in its own words: nothing is shared with the engine
"recursion" but the geometry. The idea, and why this is exact, is told in ``oracle/localisation.py``.

Source: Mihalcea, On equivariant quantum cohomology of homogeneous spaces: Chevalley formulae and algorithms, Duke Math. J. 140 (2007).
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.flag_variety import FlagVariety, orbit_of
from conjcheck.geometry.weyl import Ints, roots, weight_drops, weight_images
from conjcheck.oracle.residues import inverses, times

__all__ = ["Numbers", "Point", "Terms", "chevalley_terms"]


@dataclass(frozen=True, eq=False)
class Terms:
    """The equivariant quantum Chevalley terms of X, from left reflections: ``u s_alpha = s_beta u`` with ``beta = u(alpha)``.

    Row u of ``targets`` holds the classes of the terms (N, T), of ``coefficients`` the numbers ``<omega_i, alpha^vee>`` (N, T, m) for
    the marked nodes, which are also the exponents of the q's; ``weights`` is the degree of q of a term, 0 if it is classical; ``valid``
    marks entries in use.
    """

    targets: Ints
    coefficients: Ints
    weights: Ints
    valid: Ints


@lru_cache(maxsize=32)
def chevalley_terms(X: FlagVariety) -> Terms:
    """The terms of every class of X times a divisor, made once."""
    whole, images = orbit_of(X), weight_images(X.kind, X.marked)
    simple, coroots = roots(X.kind)
    in_weights = simple @ np.array(cartan_matrix(X.kind), dtype=np.int64)
    q_degrees = np.array(X.q_degrees, dtype=np.int64)
    marked = [i - 1 for i in X.marked]
    columns = []
    for root, coroot in zip(in_weights, coroots, strict=True):
        height = whole.weights @ coroot
        sign = np.sign(height)
        coefficients = (images[:, marked, :] @ coroot) * sign[:, None]
        target = whole.locate(whole.weights - height[:, None] * root)
        rise = whole.lengths[target] - whole.lengths
        weight = coefficients @ q_degrees
        classical = (rise == 1) & (height != 0)
        quantum = (rise == 1 - weight) & (height != 0)
        columns.append((target, coefficients, np.where(classical, 0, weight), classical | quantum))
    targets, coefficients, weights, valid = (np.stack(part, axis=1) for part in zip(*columns, strict=True))
    most = int(valid.sum(axis=1).max())
    order = np.argsort(~valid, axis=1, kind="stable")[:, :most]
    take = np.arange(len(order))[:, None]
    return Terms(targets[take, order], coefficients[take, order], weights[take, order], valid[take, order])


class Numbers:
    """Residues for the simple roots and for a divisor that separate the eigenvalues of X.

    Args:
        X: the variety.
        p: the prime.
        seed: chooses the residues; the same seed, the same residues.
    """

    def __init__(self, X: FlagVariety, p: int, seed: int) -> None:
        marked = [i - 1 for i in X.marked]
        drops = weight_drops(X.kind, X.marked)[:, marked, :]
        size = len(drops)
        for attempt in range(100):
            chooser = np.random.default_rng([p, seed, attempt])
            self.divisor = chooser.integers(1, p, size=len(marked), dtype=np.int64)
            self.simple = chooser.integers(1, p, size=X.rank, dtype=np.int64)
            self.values: Ints = np.zeros(size, dtype=np.int64)
            for k in range(len(marked)):
                mine = np.zeros(size, dtype=np.int64)
                for i in range(X.rank):
                    mine = (mine + drops[:, k, i] % p * self.simple[i]) % p
                self.values = (self.values + mine * self.divisor[k]) % p
            if len(np.unique(self.values)) == size:
                return
        raise AssertionError("no numbers that separate the eigenvalues among 100 choices")


class Point:
    """The coordinates ``sigma_u|_w(z)`` at one choice of numbers, up to a power of z.

    Args:
        X: the variety.
        p: the prime.
        numbers: residues for the simple roots and the divisor.
        g: the residues ``g_i`` in ``q_i = g_i z^{deg q_i / step}``.
        depth: the highest power of z.
        step: the common divisor of the degrees of the q's: z has that degree.
    """

    def __init__(self, X: FlagVariety, p: int, numbers: Numbers, g: list[int], depth: int, step: int) -> None:
        self.p, self.depth = p, depth
        whole, terms, divisor = orbit_of(X), chevalley_terms(X), numbers.divisor
        scale = np.ones(terms.targets.shape, dtype=np.int64)
        total = np.zeros(terms.targets.shape, dtype=np.int64)
        for k, residue in enumerate(g):
            powers = np.array([pow(residue, e, p) for e in range(int(terms.coefficients[:, :, k].max()) + 1)], dtype=np.int64)
            used = np.where(terms.valid & (terms.weights > 0), terms.coefficients[:, :, k], 0)
            scale = scale * powers[used] % p
            total = (total + np.where(terms.valid, terms.coefficients[:, :, k], 0) * divisor[k]) % p
        coefficients = np.where(terms.valid, total * scale % p, 0)
        self.values = self._solve(whole.lengths, terms.targets, coefficients, terms.weights // step, numbers.values)
        self._back = np.ascontiguousarray(self._invert(self.values[0]).T)
        self._flipped = np.ascontiguousarray(self.values.transpose(0, 2, 1))
        self._live = [f for f in range(1, depth + 1) if self.values[f].any()]
        self._weights: dict[int, list[Ints]] = {}

    def _solve(self, lengths: Ints, targets: Ints, coefficients: Ints, shifts: Ints, values: Ints) -> Ints:
        """All coordinates, ``(depth + 1, N, N)``: entry ``[e, u, w]`` is the coefficient of ``z^e`` in ``sigma_u|_w``."""
        p, size = self.p, len(values)
        inverse = inverses((values[None, :] - values[:, None]) % p, p)
        found = np.zeros((self.depth + 1, size, size), dtype=np.int64)
        eigenvalue = np.zeros((self.depth + 1, size), dtype=np.int64)
        levels = [np.flatnonzero(lengths == length) for length in range(int(lengths[-1]), -1, -1)]
        for e in range(self.depth + 1):
            for level in levels:
                side = np.zeros((len(level), size), dtype=np.int64)
                for t in range(targets.shape[1]):
                    lag = e - shifts[level, t]
                    live = (lag >= 0) & (coefficients[level, t] != 0)
                    if live.any():
                        rows = level[live]
                        side[live] = (side[live] + coefficients[rows, t, None] * found[lag[live], targets[rows, t]]) % p
                for f in range(1, e):
                    side = (side - eigenvalue[f] * found[e - f, level]) % p
                if e:
                    eigenvalue[e, level] = side[np.arange(len(level)), level]
                    side = (side - eigenvalue[e] * found[0, level]) % p
                found[e, level] = side * inverse[level] % p
                if not e:
                    found[0, level, level] = 1
        # So far sigma_w|_w = 1; divide by the series sigma_e|_w, so that it becomes 1 instead.
        unit = found[:, 0, :].copy()
        first = inverses(unit[0], p)
        assert (unit[0] != 0).all(), "the unit has no zero"
        for e in range(self.depth + 1):
            for f in range(1, e + 1):
                found[e] = (found[e] - unit[f] * found[e - f]) % p
            found[e] = found[e] * first % p
        return found

    def _invert(self, matrix: Ints) -> Ints:
        """The inverse of the upper triangular matrix ``sigma_u|_w(0)``, modulo p."""
        p, size = self.p, len(matrix)
        diagonal = inverses(np.diagonal(matrix).copy(), p)
        inverse = np.zeros_like(matrix)
        for w in range(size):
            column = times(inverse[:w, :w], matrix[:w, w], p)
            inverse[:w, w] = -column * diagonal[w] % p
            inverse[w, w] = diagonal[w]
        return inverse

    def product(self, u: int, v: int, depth: int) -> Ints:
        """``sigma_u * sigma_v`` in the Schubert basis: ``(depth + 1, N)``, powers of z by classes, up to the one named."""
        p = self.p
        found = np.zeros((depth + 1, len(self._back)), dtype=np.int64)
        for e in range(depth + 1):
            side = self._pointwise(u, v, e)
            for f in self._live:
                if f <= e and found[e - f].any():
                    side = (side - times(self._flipped[f], found[e - f], p)) % p
            found[e] = times(self._back, side, p)
        return found

    def coefficient(self, u: int, v: int, w: int, e: int) -> int:
        """The coefficient of ``z^e sigma_w`` in ``sigma_u * sigma_v``, without the others."""
        weights = self._functional(w, e)
        return sum(int((self._pointwise(u, v, f) * weights[e - f] % self.p).sum()) for f in range(e + 1)) % self.p

    def _pointwise(self, u: int, v: int, e: int) -> Ints:
        """The coefficient of ``z^e`` in the product of coordinates, ``(N,)``."""
        side: Ints = self.values[0, u] * self.values[e, v] % self.p
        for f in range(1, e + 1):
            side = (side + self.values[f, u] * self.values[e - f, v]) % self.p
        return side

    def _functional(self, w: int, depth: int) -> list[Ints]:
        """What weighs coordinates to give the coefficient of ``sigma_w``: row w of the inverse change of basis, a series in z.

        With F(z) the change of basis, row w of ``F^-1`` solves ``y F = row w of 1``, one power after the other; kept for the next
        constant at w, and continued when a higher power is wanted.
        """
        found = self._weights.setdefault(w, [self._back[w]])
        while len(found) <= depth:
            side = np.zeros(len(self._back), dtype=np.int64)
            for f in self._live:
                if f <= len(found):
                    side = (side + times(self.values[f], found[len(found) - f], self.p)) % self.p
            found.append(times(self._back.T, (self.p - side) % self.p, self.p))
        return found
