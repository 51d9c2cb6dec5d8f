"""Engine "localisation": equivariant, straight on G/P, any Lie type. Shares only the geometry with the other engines.

Put numbers for the simple roots and for a divisor class ``D = sum c_i sigma_{s_i}`` (residues modulo a prime p), and ``q_i =
g_i z^{deg q_i}`` with residues ``g_i``. At z = 0 multiplication by D is triangular with the eigenvalues ``D|_w``. If those
differ, then over power series in z there is for each w exactly one ring homomorphism ``sigma_u -> sigma_u|_w(z)`` with
``sigma_e|_w = 1``, found from

    (lambda_w - D|_u) sigma_u|_w  =  sum of a sigma_{u'}|_w  +  sum of b q^{d(alpha)} sigma_{u''}|_w     (equivariant quantum Chevalley)

degree by degree in z and downwards in the length of u; the row u = w gives the next coefficient of ``lambda_w(z)``. Products
are pointwise in these coordinates. Coefficients of degree 0 in the simple roots do not depend on the numbers chosen: they are
the constants.

Exactness. Coinciding eigenvalues are detected and other numbers are chosen. Residues stay below ``2^31`` and their products
below ``2^62``; sums of products are reduced term by term, or one factor is cut in two so that the sum stays below ``2^63``. A
constant is at most the corresponding entry of ``D^{l(u)} * sigma_v`` for D the sum of all divisors, because ``sigma_u`` is a
summand of ``D^{l(u)}``; that bound is computed in integers, rounded upwards, and so many primes are used that their product
exceeds it. Which powers of several q's a coefficient of z collects is resolved by evaluating at the powers of one point g and
solving the Vandermonde system, whose nodes are checked to be distinct.

One constant is a number, not a solution: the coefficient of ``z^e sigma_w`` is a linear functional of the pointwise product, which
depends on w alone. It is computed when w is first asked about and kept; then a constant is e + 1 dot products.

Source: Mihalcea, On equivariant quantum cohomology of homogeneous spaces: Chevalley formulae and algorithms, Duke Math. J. 140
(2007), for the formula and for its determining the ring; the use of eigenvectors is common practice.
"""

from collections.abc import Iterator
from functools import lru_cache
from math import gcd, prod

import numpy as np

from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import degrees_of_total
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass, orbit_of
from conjcheck.oracle.coordinates import Numbers, Point, chevalley_terms
from conjcheck.oracle.engine import Block, RowTerms, blocks_by_rows
from conjcheck.oracle.guard import note_question
from conjcheck.oracle.residues import primes, put_together, separating_weights, vandermonde

__all__ = ["MOST_CLASSES", "MOST_WORK", "Localisation", "LocalisationEngine", "localisation"]

MOST_CLASSES = 1_000
"""The coordinates of all classes are square tables of this size, one for each power of z."""

MOST_WORK = 400_000_000
"""Above about so many modular multiplications a row is out of reach; about ten seconds."""

_MOST_POINTS = 256
"""So many points of a variety are kept, each up to the highest power of z that was asked for."""


class Localisation:
    """Products on one G/P by localisation."""

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.step = gcd(*X.q_degrees)
        self.seed = 0
        self._bounds: dict[tuple[int, int], int] = {}
        self._points: dict[tuple[int, int, int], Point] = {}

    @lru_cache(maxsize=64)  # noqa: B019  # lives as long as the variety
    def numbers(self, p: int, seed: int) -> Numbers:
        """Residues for the simple roots and the divisor."""
        return Numbers(self.X, p, seed)

    def _point(self, p: int, seed: int, power: int, depth: int) -> Point:
        """The coordinates at the power-th power of the base point, up to ``z^depth`` or beyond; one q needs no point but 1."""
        key = p, seed, power
        found = self._points.get(key)
        if found is None or found.depth < depth:
            base = [1] if len(self.X.marked) == 1 else [pow(x, power, p) for x in self._base(p)]
            self._points.pop(key, None)
            if len(self._points) >= _MOST_POINTS:
                del self._points[next(iter(self._points))]
            found = self._points[key] = Point(self.X, p, self.numbers(p, seed), base, depth, self.step)
        return found

    def _base(self, p: int) -> list[int]:
        return [int(x) for x in np.random.default_rng(p).integers(2, p, size=len(self.X.marked))]

    def bound(self, u: int, v: int) -> int:
        """A rigorous bound of all constants ``N_{u,v}^{w,d}``: the entries of ``D^{l(u)} sigma_v`` at q = 1, rounded upwards."""
        lengths = orbit_of(self.X).lengths
        short, other = (u, v) if lengths[u] <= lengths[v] else (v, u)
        key = int(lengths[short]), other
        if key not in self._bounds:
            terms = chevalley_terms(self.X)
            weights = np.where(terms.valid, terms.coefficients.sum(axis=2), 0)
            vector, shift = np.zeros(len(lengths), dtype=np.int64), 0
            vector[other] = 1
            growth = int(weights.sum(axis=0).max() * len(lengths)).bit_length()
            for _ in range(key[0]):
                while int(vector.max()).bit_length() + growth > 62:
                    vector, shift = -(-vector // 2), shift + 1
                total = np.zeros_like(vector)
                np.add.at(total, terms.targets, weights * vector[:, None])
                vector = total
            self._bounds[key] = int(vector.max()) << shift
        return self._bounds[key]

    def work(self, total: int) -> int:
        """About how many modular multiplications a row up to the degree ``total`` takes."""
        if total < 0:
            return 0
        depth = total // self.step
        points = 1 if len(self.X.marked) == 1 else max(len(degrees_of_total(self.X, e * self.step)) for e in range(depth + 1))
        return points * (depth + 1) * (depth + 2) * self.X.number_of_classes**2

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant, without the other classes and without the powers of q beyond it; see the engine's for the cost."""
        note_question()
        weight = sum(a * b for a, b in zip(d, self.X.q_degrees, strict=True))
        if u.length + v.length != w.length + weight or min(d) < 0:
            return 0
        e, points = weight // self.step, 1 if len(d) == 1 else len(degrees_of_total(self.X, weight))
        bound = self.bound(u.index, v.index)
        chosen, residues = self._primes_beyond(bound), []
        for p in chosen:
            found = [self._point(p, self.seed, k, e).coefficient(u.index, v.index, w.index, e) for k in range(points)]
            residues.append(sum(a * b for a, b in zip(found, self._separating(p, d), strict=True)) % p)
        return put_together(chosen, residues, bound)

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``."""
        note_question()
        total = u.length + v.length
        candidates = [degrees_of_total(self.X, e * self.step) for e in range(total // self.step + 1)]
        bound = self.bound(u.index, v.index)
        chosen = self._primes_beyond(bound)
        residues = [self._residues(p, self.seed, u.index, v.index, candidates, total, equivariant=False) for p in chosen]
        values = {key: put_together(chosen, [found[key] for found in residues], bound) for key in residues[0]}
        return {key: value for key, value in values.items() if value}

    @staticmethod
    def _primes_beyond(bound: int) -> list[int]:
        """So many primes that their product exceeds the bound."""
        chosen = primes(1)
        while prod(chosen) <= bound:
            chosen = primes(len(chosen) + 1)
        return chosen

    @lru_cache(maxsize=4096)  # noqa: B019
    def _separating(self, p: int, d: Degree) -> list[int]:
        """The weights that take the coefficients of one power of z, at the powers of the base point, to that of ``q^d``."""
        if len(d) == 1:
            return [1]
        degrees = degrees_of_total(self.X, sum(a * b for a, b in zip(d, self.X.q_degrees, strict=True)))
        return separating_weights(self._nodes(p, degrees), degrees.index(d), p)

    def _nodes(self, p: int, degrees: tuple[Degree, ...]) -> list[int]:
        """The values of the monomials ``q^d`` at the base point."""
        return [prod(pow(g, x, p) for g, x in zip(self._base(p), d, strict=True)) % p for d in degrees]

    def _residues(
        self, p: int, seed: int, u: int, v: int, candidates: list[tuple[Degree, ...]], total: int, *, equivariant: bool
    ) -> dict[tuple[SchubertClass, Degree], int]:
        """Residues of the constants, from the coefficients of z at all powers of the base point."""
        X, found, depth = self.X, {}, len(candidates) - 1
        count = 1 if len(X.marked) == 1 else max(map(len, candidates))
        products = [self._point(p, seed, k, depth).product(u, v, depth) for k in range(count)]
        for e, degrees in enumerate(candidates):
            left = total - e * self.step
            level = tuple(w for w in X.classes if w.length <= left) if equivariant else X.of_length(left)
            if not level or not degrees:
                continue
            values = np.stack([product[e, [w.index for w in level]] for product in products[: len(degrees)]])
            if len(X.marked) > 1:
                values = vandermonde(self._nodes(p, degrees), values, p)
            for d, line in zip(degrees, values.tolist(), strict=True):
                found.update({(w, d): value for w, value in zip(level, line, strict=True)})
        return found

    def equivariant_residues(
        self, u: SchubertClass, v: SchubertClass, most: int, prime: int, seed: int
    ) -> dict[tuple[SchubertClass, Degree], int]:
        """All equivariant constants ``c_{u,v}^{w,d}`` with q-degree up to ``most``, modulo the prime-th prime, at ``numbers(p, seed)``."""
        note_question()
        total = u.length + v.length
        candidates = [degrees_of_total(self.X, e * self.step) for e in range(min(most, total) // self.step + 1)]
        return self._residues(primes(prime + 1)[prime], seed, u.index, v.index, candidates, total, equivariant=True)


@lru_cache(maxsize=32)
def localisation(X: FlagVariety) -> Localisation:
    """The engine for X, made once."""
    return Localisation(X)


class LocalisationEngine:
    """Engine "localisation"; see the module."""

    name = "localisation"

    def refuses(self, X: FlagVariety) -> str | None:
        """Any variety with at most ``MOST_CLASSES`` classes."""
        if X.number_of_classes > MOST_CLASSES:
            return f"{X} has {X.number_of_classes:,} classes, localisation stops at {MOST_CLASSES:,}"
        return None

    def work(self, X: FlagVariety, total: int) -> int:
        """About how many modular multiplications the powers of q up to a degree take."""
        return localisation(X).work(total)

    def check(self, X: FlagVariety, total: int) -> None:
        """Raise ``OutOfReach`` if the powers of q up to a degree take too much work."""
        if (work := self.work(X, total)) > MOST_WORK:
            raise OutOfReach(f"expected a product of at most {MOST_WORK:,} modular multiplications, got about {work:,} on {X}")

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of a product.

        Raises:
            OutOfReach: there are too many q's and too high powers of them.
        """
        self.check(u.variety, u.length + v.length)
        return localisation(u.variety).row(u, v)

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant.

        Cost: the first one at w and this power of q costs about as much as a row cut off at that power (for d = 0 nothing: a row
        of the inverse change of basis is there); every further one at the same w, any u and v, only dot products, some
        ``(e + 1)^2 / 2`` multiplications per class where a row takes ``e^2 / 2`` per pair of classes, for the e-th power. With
        several q's, times the number of degrees of that power. Set-up as for a row, but up to this power only.

        Raises:
            OutOfReach: there are too many q's and d is too high.
        """
        self.check(u.variety, max(u.length + v.length - w.length, 0))
        return localisation(u.variety).constant(u, v, w, d)

    def blocks(self, X: FlagVariety) -> Iterator[Block]:
        """The whole table, row by row."""
        return blocks_by_rows(self, X)
