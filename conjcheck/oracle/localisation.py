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

    def product(self, u: int, v: int) -> Ints:
        """``sigma_u * sigma_v`` in the Schubert basis: ``(depth + 1, N)``, powers of z by classes."""
        p, values = self.p, self.values
        found = np.zeros((self.depth + 1, len(self._back)), dtype=np.int64)
        live = [f for f in range(1, self.depth + 1) if values[f].any()]
        for e in range(self.depth + 1):
            side = np.zeros(len(self._back), dtype=np.int64)
            for f in range(e + 1):
                side = (side + values[f, u] * values[e - f, v]) % p
            for f in live:
                if f <= e and found[e - f].any():
                    side = (side - _times(self._flipped[f], found[e - f], p)) % p
            found[e] = _times(self._back, side, p)
        return found


class Localisation:
    """Products on one G/P by localisation."""

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.step = gcd(*X.q_degrees)
        self.seed = 0
        self._bounds: dict[tuple[int, int], int] = {}

    @lru_cache(maxsize=64)  # noqa: B019  # lives as long as the variety
    def numbers(self, p: int, seed: int) -> _Numbers:
        """Residues for the simple roots and the divisor."""
        return _Numbers(self.X, p, seed)

    @lru_cache(maxsize=256)  # noqa: B019
    def _point(self, p: int, seed: int, power: int, depth: int) -> _Point:
        """The coordinates at the power-th power of the base point; one q needs no point but 1."""
        base = [1] if len(self.X.marked) == 1 else [pow(x, power, p) for x in self._base(p)]
        return _Point(self.X, p, self.numbers(p, seed), base, depth, self.step)

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

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``."""
        return self._extract(u, v, u.length + v.length)

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant, without the powers of q beyond it."""
        weight = sum(a * b for a, b in zip(d, self.X.q_degrees, strict=True))
        if u.length + v.length != w.length + weight:
            return 0
        return self._extract(u, v, weight).get((w, d), 0)

    def _extract(self, u: SchubertClass, v: SchubertClass, most: int) -> RowTerms:
        """The nonzero terms whose power of q has degree at most ``most``."""
        note_question()
        X, total, depth = self.X, u.length + v.length, most // self.step
        candidates = [degrees_of_total(X, e * self.step) if total - e * self.step >= 0 else () for e in range(depth + 1)]
        bound = self.bound(u.index, v.index)
        chosen = primes(1)
        while prod(chosen) <= bound:
            chosen = primes(len(chosen) + 1)
        residues = [self._residues(p, self.seed, u.index, v.index, candidates, total, equivariant=False) for p in chosen]
        result: RowTerms = {}
        for key in residues[0]:
            value, modulus = 0, 1
            for p, found in zip(chosen, residues, strict=True):
                value += modulus * ((found[key] - value) * pow(modulus, -1, p) % p)
                modulus *= p
            assert value <= bound, "a residue exceeds the bound: not a structure constant"
            if value:
                result[key] = value
        return result

    def _residues(
        self, p: int, seed: int, u: int, v: int, candidates: list[tuple[Degree, ...]], total: int, *, equivariant: bool
    ) -> dict[tuple[SchubertClass, Degree], int]:
        """Residues of the constants, from the coefficients of z at all powers of the base point."""
        X, found, depth = self.X, {}, len(candidates) - 1
        count = 1 if len(X.marked) == 1 else max(map(len, candidates))
        products = [self._point(p, seed, k, depth).product(u, v) for k in range(count)]
        for e, degrees in enumerate(candidates):
            left = total - e * self.step
            level = tuple(w for w in X.classes if w.length <= left) if equivariant else X.of_length(left)
            if not level or not degrees:
                continue
            values = np.stack([product[e, [w.index for w in level]] for product in products[: len(degrees)]])
            if len(X.marked) > 1:
                nodes = [prod(pow(g, x, p) for g, x in zip(self._base(p), d, strict=True)) % p for d in degrees]
                values = _vandermonde(nodes, values, p)
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


def _vandermonde(nodes: list[int], values: Ints, p: int) -> Ints:
    """Solve ``sum_j x_j nodes_j^k = values_k`` for k = 0, 1, ... modulo p; ``(K, M) -> (K, M)``."""
    assert len(set(nodes)) == len(nodes), "the nodes must be distinct; another base point is needed"
    size = len(nodes)
    master = [1]
    for node in nodes:  # the polynomial with these roots, lowest coefficient first
        master = [(a - node * b) % p for a, b in zip([0, *master], [*master, 0], strict=True)]
    solution = np.zeros_like(values)
    for j, node in enumerate(nodes):
        quotient = [0] * size
        carry = 0
        for k in range(size, 0, -1):
            carry = (master[k] + node * carry) % p
            quotient[k - 1] = carry
        scale = pow(sum(c * pow(node, k, p) for k, c in enumerate(quotient)) % p, -1, p)
        weights = np.array([c * scale % p for c in quotient], dtype=np.int64)
        for k in range(size):
            solution[j] = (solution[j] + weights[k] * values[k]) % p
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
        """One constant; cheaper than its row if d is small."""
        self.check(u.variety, max(u.length + v.length - w.length, 0))
        return localisation(u.variety).constant(u, v, w, d)

    def blocks(self, X: FlagVariety) -> Iterator[Block]:
        """The whole table, row by row."""
        return blocks_by_rows(self, X)
