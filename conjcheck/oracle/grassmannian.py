"""Engine "vafa-intriligator" on Grassmannians: the closed formula of Bertram, Vafa and Intriligator, exact modulo a prime.

At q = 1, with J over the k-subsets of the n-th roots of ``(-1)^(k-1)``, ``x_J`` the roots chosen and ``s_l`` the Schur polynomial,

    N_{l,m}^{r} = n^{-k} sum_J s_l(x_J) s_m(x_J) s_r(1/x_J) prod_{i<j} (x_i - x_j) (1/x_i - 1/x_j).

In words: the vectors ``(s_l(x_J))_J`` multiply pointwise like Schubert classes, and are orthonormal for that weight. The formula is
evaluated over the field with p elements, p = 1 modulo 2n, where the roots exist. Over the complex numbers ``|s_l(x_J)|`` is at
most ``s_l(1, ..., 1)`` and the vectors are orthonormal, so every constant is at most ``s_l(1^k)``, the dimension of a
representation of GL_k; p is chosen above it, so the residue *is* the constant. The exponent of q follows from degrees.
No Chevalley formula, no recursion, no complete flags.

Source: Bertram, Quantum Schubert calculus, Adv. Math. 128 (1997), section 5; Siebert, Tian, Asian J. Math. 1 (1997); the
orthogonality in Rietsch, Quantum cohomology rings of Grassmannians and total positivity, Duke Math. J. 110 (2001), section 4.
"""

from collections.abc import Iterator
from functools import cache, lru_cache
from itertools import combinations
from math import isqrt, prod

import numpy as np

from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.geometry.weyl import Ints
from conjcheck.oracle.engine import Block, RowTerms
from conjcheck.oracle.guard import note_question

__all__ = ["MOST_CLASSES", "ResidueTable", "VafaIntriligatorEngine", "dimension", "residue_table"]

MOST_CLASSES = 1_000
"""Above this the square table of residues would take more than 8 MB times k; the engine says it is out of reach."""


def dimension(partition: tuple[int, ...], k: int) -> int:
    """``s_l(1, ..., 1)`` in k variables: the Weyl dimension formula.

    >>> dimension((2, 1), 3)
    8
    """
    padded = (*partition, *[0] * k)[:k]
    above = prod(padded[i] - padded[j] + j - i for i in range(k) for j in range(i + 1, k))
    return above // prod(j - i for i in range(k) for j in range(i + 1, k))


def _is_prime(p: int) -> bool:
    return p > 1 and all(p % t for t in range(2, isqrt(p) + 1))


@cache
def _field(n: int) -> tuple[int, int]:
    """A prime ``p < 2^31`` with ``p = 1`` modulo 2n, the largest such, and an element of order exactly 2n."""
    p = (2**31 - 2) // (2 * n) * (2 * n) + 1
    while not _is_prime(p):
        p -= 2 * n
    divisors = [t for t in range(2, 2 * n + 1) if (2 * n) % t == 0]
    for base in range(2, p):
        zeta = pow(base, (p - 1) // (2 * n), p)
        if all(pow(zeta, 2 * n // t, p) != 1 for t in divisors):
            return p, zeta
    raise AssertionError("a finite field has primitive roots")


class ResidueTable:
    """The residues ``s_l(x_J)`` for all l and J, ``(N, N)``, and the inverse of that square matrix.

    All products of residues stay below ``2^62``; they are reduced before they are summed, and a sum has at most
    ``MOST_CLASSES`` terms below ``2^31``: 64-bit integers cannot overflow.
    """

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.k, self.n = X.marked[0], X.n
        self.p, zeta = _field(self.n)
        p, k, n = self.p, self.k, self.n
        self.bounds = [dimension(u.partition, k) for u in X.classes]
        assert max(self.bounds) < p, "the prime must exceed every constant"
        # The n-th roots of (-1)^(k-1) are zeta^(2 j + (k-1 mod 2)), zeta of order 2n.
        roots = [pow(zeta, 2 * j + (k - 1) % 2, p) for j in range(n)]
        subsets = list(combinations(range(n), k))
        exponents = [tuple(sorted(x - 1 for x in u.permutation[:k])) for u in X.classes]
        powers = np.array([[pow(x, e, p) for x in roots] for e in range(n)], dtype=np.int64)
        alternants = self._minors(powers, exponents, subsets)
        vandermonde = alternants[0]
        inverse = np.array([pow(int(x), p - 2, p) for x in vandermonde], dtype=np.int64)
        self.values: Ints = alternants * inverse % p
        # Orthonormality: the inverse matrix has the entries weight_J * s_l(1/x_J); 1/x_J belongs to the conjugate subset.
        backwards = np.array([[pow(x, (p - 1 - e) % (p - 1), p) for x in roots] for e in range(n)], dtype=np.int64)
        conjugates = self._minors(backwards, exponents, subsets)
        unit = pow(pow(n, k, p), p - 2, p)
        self.back: Ints = conjugates * (vandermonde * unit % p) % p
        assert (self._solve(self.values[0][None, :]) == np.eye(1, len(exponents), dtype=np.int64)).all()

    def _minors(self, powers: Ints, rows: list[tuple[int, ...]], columns: list[tuple[int, ...]]) -> Ints:
        """``det(powers[rows[a], columns[b]])`` for all a and b, by expansion along the last row, all sizes up to k."""
        p = self.p
        minors = np.ones((1, 1), dtype=np.int64)
        places: dict[tuple[int, ...], int] = {(): 0}
        for size in range(1, self.k + 1):
            chosen = list(combinations(range(self.n), size))
            now = {subset: place for place, subset in enumerate(chosen)}
            last = np.array([subset[-1] for subset in chosen])
            heads = np.array([places[subset[:-1]] for subset in chosen])
            total = np.zeros((len(chosen), len(chosen)), dtype=np.int64)
            for t in range(size):
                entries = np.array([subset[t] for subset in chosen])
                others = np.array([places[subset[:t] + subset[t + 1 :]] for subset in chosen])
                part = powers[last[:, None], entries] * minors[heads[:, None], others] % p
                total += part if (size - 1 - t) % 2 == 0 else p - part
            minors, places = total % p, now
        found: Ints = minors[np.array([places[subset] for subset in rows])[:, None], [places[subset] for subset in columns]]
        return found

    def _solve(self, pointwise: Ints) -> Ints:
        """Coefficients in the Schubert basis of functions of J, ``(M, N) -> (M, N)``."""
        return np.stack([(self.back * f % self.p).sum(axis=1) % self.p for f in pointwise])

    def coefficients(self, u: int, v: int) -> Ints:
        """All coefficients of ``sigma_u * sigma_v`` at q = 1, one per class."""
        note_question()
        found: Ints = self._solve((self.values[u] * self.values[v] % self.p)[None, :])[0]
        assert found.max() <= min(self.bounds[u], self.bounds[v]), "a residue exceeds the bound: not a structure constant"
        return found

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``."""
        coefficients = self.coefficients(u.index, v.index)
        result: RowTerms = {}
        for index in np.flatnonzero(coefficients).tolist():
            w = self.X.classes[index]
            d, rest = divmod(u.length + v.length - w.length, self.n)
            assert (rest, d >= 0) == (0, True), "the degree axiom must hold"
            result[w, (d,)] = int(coefficients[index])
        return result

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant: a sum over J."""
        note_question()
        if u.length + v.length != w.length + d[0] * self.n:
            return 0
        pointwise = self.values[u.index] * self.values[v.index] % self.p
        return int((self.back[w.index] * pointwise % self.p).sum() % self.p)

    def blocks(self) -> Iterator[Block]:
        """The whole table, u in order."""
        X = self.X
        lengths = np.array([u.length for u in X.classes], dtype=np.int64)
        for u in X.classes:
            whole = np.stack([self.coefficients(u.index, v.index) for v in X.classes])
            v, w = np.nonzero(whole)
            d = (u.length + lengths[v] - lengths[w]) // self.n
            yield Block(u, v, w, d[:, None], whole[v, w])


@lru_cache(maxsize=32)
def residue_table(X: FlagVariety) -> ResidueTable:
    """The table of X, made once. Cost: ``O(k N^2)``; 0.1 s for the 252 classes of ``Gr(5,10)``."""
    return ResidueTable(X)


class VafaIntriligatorEngine:
    """Engine "vafa-intriligator"; see the module."""

    name = "vafa-intriligator"

    def refuses(self, X: FlagVariety) -> str | None:
        """Grassmannians with at most ``MOST_CLASSES`` classes."""
        if not X.is_grassmannian:
            return f"{X} is not a Grassmannian"
        if X.number_of_classes > MOST_CLASSES:
            return f"{X} has {X.number_of_classes:,} classes, the table of residues stops at {MOST_CLASSES:,}"
        return None

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of a product."""
        return residue_table(u.variety).row(u, v)

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant: a sum over J."""
        return residue_table(u.variety).constant(u, v, w, d)

    def blocks(self, X: FlagVariety) -> Iterator[Block]:
        """The whole table."""
        return residue_table(X).blocks()
