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
from dataclasses import dataclass
from functools import lru_cache
from math import gcd, isqrt, prod

import numpy as np

from conjcheck.errors import OutOfReach
from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.case import degrees_of_total
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass, orbit_of
from conjcheck.geometry.weyl import Ints, roots, weight_drops, weight_images
from conjcheck.oracle.engine import Block, RowTerms, blocks_by_rows
from conjcheck.oracle.guard import note_question

__all__ = ["MOST_CLASSES", "MOST_WORK", "Localisation", "LocalisationEngine", "localisation", "primes"]

MOST_CLASSES = 1_000
"""The coordinates of all classes are square tables of this size, one for each power of z."""

MOST_WORK = 400_000_000
"""Above about so many modular multiplications a row is out of reach; about ten seconds."""

_MOST_POINTS = 256
"""So many points of a variety are kept, each up to the highest power of z that was asked for."""


@lru_cache
def primes(count: int) -> list[int]:
    """The largest primes below ``2^31``."""
    found: list[int] = []
    p = 2**31 - 1
    while len(found) < count:
        if all(p % t for t in range(3, isqrt(p) + 1, 2)):
            found.append(p)
        p -= 2
    return found


def _inverses(values: Ints, p: int) -> Ints:
    """``1 / x`` modulo p, entry by entry; 0 for 0."""
    result, power, exponent = np.ones_like(values), values % p, p - 2
    while exponent:
        if exponent & 1:
            result = result * power % p
        power = power * power % p
        exponent >>= 1
    return result


def _times(matrix: Ints, column: Ints, p: int) -> Ints:
    """``matrix @ column`` modulo p, exactly: the column is cut into 15 and 16 bits, so that up to ``2^16`` products fit into 63 bits."""
    high, low = column >> 16, column & 0xFFFF
    result: Ints = (((matrix @ high) % p << 16) + matrix @ low) % p
    return result


@dataclass(frozen=True, eq=False)
class _Terms:
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
def _terms(X: FlagVariety) -> _Terms:
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
    return _Terms(targets[take, order], coefficients[take, order], weights[take, order], valid[take, order])


class _Numbers:
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


class _Point:
    """The coordinates ``sigma_u|_w(z)`` at one choice of numbers, up to a power of z.

    Args:
        X: the variety.
        p: the prime.
        numbers: residues for the simple roots and the divisor.
        g: the residues ``g_i`` in ``q_i = g_i z^{deg q_i / step}``.
        depth: the highest power of z.
        step: the common divisor of the degrees of the q's: z has that degree.
    """

    def __init__(self, X: FlagVariety, p: int, numbers: _Numbers, g: list[int], depth: int, step: int) -> None:
        self.p, self.depth = p, depth
        whole, terms, divisor = orbit_of(X), _terms(X), numbers.divisor
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
        inverse = _inverses((values[None, :] - values[:, None]) % p, p)
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
        first = _inverses(unit[0], p)
        assert (unit[0] != 0).all(), "the unit has no zero"
        for e in range(self.depth + 1):
            for f in range(1, e + 1):
                found[e] = (found[e] - unit[f] * found[e - f]) % p
            found[e] = found[e] * first % p
        return found

    def _invert(self, matrix: Ints) -> Ints:
        """The inverse of the upper triangular matrix ``sigma_u|_w(0)``, modulo p."""
        p, size = self.p, len(matrix)
        diagonal = _inverses(np.diagonal(matrix).copy(), p)
        inverse = np.zeros_like(matrix)
        for w in range(size):
            column = _times(inverse[:w, :w], matrix[:w, w], p)
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
                    side = (side - _times(self._flipped[f], found[e - f], p)) % p
            found[e] = _times(self._back, side, p)
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
                    side = (side + _times(self.values[f], found[len(found) - f], self.p)) % self.p
            found.append(_times(self._back.T, (self.p - side) % self.p, self.p))
        return found


class Localisation:
    """Products on one G/P by localisation."""

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.step = gcd(*X.q_degrees)
        self.seed = 0
        self._bounds: dict[tuple[int, int], int] = {}
        self._points: dict[tuple[int, int, int], _Point] = {}

    @lru_cache(maxsize=64)  # noqa: B019  # lives as long as the variety
    def numbers(self, p: int, seed: int) -> _Numbers:
        """Residues for the simple roots and the divisor."""
        return _Numbers(self.X, p, seed)

    def _point(self, p: int, seed: int, power: int, depth: int) -> _Point:
        """The coordinates at the power-th power of the base point, up to ``z^depth`` or beyond; one q needs no point but 1."""
        key = p, seed, power
        found = self._points.get(key)
        if found is None or found.depth < depth:
            base = [1] if len(self.X.marked) == 1 else [pow(x, power, p) for x in self._base(p)]
            self._points.pop(key, None)
            if len(self._points) >= _MOST_POINTS:
                del self._points[next(iter(self._points))]
            found = self._points[key] = _Point(self.X, p, self.numbers(p, seed), base, depth, self.step)
        return found

    def _base(self, p: int) -> list[int]:
        return [int(x) for x in np.random.default_rng(p).integers(2, p, size=len(self.X.marked))]

    def bound(self, u: int, v: int) -> int:
        """A rigorous bound of all constants ``N_{u,v}^{w,d}``: the entries of ``D^{l(u)} sigma_v`` at q = 1, rounded upwards."""
        lengths = orbit_of(self.X).lengths
        short, other = (u, v) if lengths[u] <= lengths[v] else (v, u)
        key = int(lengths[short]), other
        if key not in self._bounds:
            terms = _terms(self.X)
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
        return _put_together(chosen, residues, bound)

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``."""
        note_question()
        total = u.length + v.length
        candidates = [degrees_of_total(self.X, e * self.step) for e in range(total // self.step + 1)]
        bound = self.bound(u.index, v.index)
        chosen = self._primes_beyond(bound)
        residues = [self._residues(p, self.seed, u.index, v.index, candidates, total, equivariant=False) for p in chosen]
        values = {key: _put_together(chosen, [found[key] for found in residues], bound) for key in residues[0]}
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
        return _weights(self._nodes(p, degrees), degrees.index(d), p)

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
                values = _vandermonde(self._nodes(p, degrees), values, p)
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


def _put_together(chosen: list[int], residues: list[int], bound: int) -> int:
    """The number with these residues modulo these primes; it must not exceed the bound of the constant."""
    value, modulus = 0, 1
    for p, residue in zip(chosen, residues, strict=True):
        value += modulus * ((residue - value) * pow(modulus, -1, p) % p)
        modulus *= p
    assert value <= bound, "a residue exceeds the bound: not a structure constant"
    return value


def _master(nodes: list[int], p: int) -> list[int]:
    """The polynomial with these roots modulo p, lowest coefficient first."""
    assert len(set(nodes)) == len(nodes), "the nodes must be distinct; another base point is needed"
    master = [1]
    for node in nodes:
        master = [(a - node * b) % p for a, b in zip([0, *master], [*master, 0], strict=True)]
    return master


def _weights(nodes: list[int], j: int, p: int, master: list[int] | None = None) -> list[int]:
    """The ``c_k`` with ``x_j = sum_k c_k values_k`` for the solution x of the Vandermonde system ``sum_j x_j nodes_j^k = values_k``."""
    master, node = master or _master(nodes, p), nodes[j]
    quotient, carry = [0] * len(nodes), 0
    for k in range(len(nodes), 0, -1):
        carry = (master[k] + node * carry) % p
        quotient[k - 1] = carry
    scale = pow(sum(c * pow(node, k, p) for k, c in enumerate(quotient)) % p, -1, p)
    return [c * scale % p for c in quotient]


def _vandermonde(nodes: list[int], values: Ints, p: int) -> Ints:
    """Solve ``sum_j x_j nodes_j^k = values_k`` for k = 0, 1, ... modulo p; ``(K, M) -> (K, M)``."""
    master, solution = _master(nodes, p), np.zeros_like(values)
    for j in range(len(nodes)):
        for weight, line in zip(_weights(nodes, j, p, master), values, strict=True):
            solution[j] = (solution[j] + weight * line) % p
    return solution


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
