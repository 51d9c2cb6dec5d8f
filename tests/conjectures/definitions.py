"""Slow definitions that the rules are held to: no rule and no part of the oracle is used here."""

from collections import Counter
from collections.abc import Mapping, Sequence
from functools import cache
from itertools import combinations, combinations_with_replacement, permutations, product
from math import prod
from typing import Any

from conjcheck import FlagVariety, SchubertClass

Permutation = tuple[int, ...]
Polynomial = Counter  # exponent tuple -> coefficient
Vector = Counter  # (permutation, degree) -> coefficient


def inversions(w: Sequence[int]) -> int:
    """The length of a permutation."""
    return sum(a > b for a, b in combinations(w, 2))


# -- classical ring of complete flags: Schubert polynomials -----------------------------------------------------------


def divided_difference(i: int, f: Polynomial) -> Polynomial:
    """``(f - s_i f) / (x_i - x_{i+1})``, i from 1."""
    result: Polynomial = Counter()
    for exponents, coefficient in f.items():
        a, b = exponents[i - 1 : i + 1]
        for j in range(abs(a - b)):
            step = (max(a, b) - 1 - j, min(a, b) + j)
            result[(*exponents[: i - 1], *step, *exponents[i + 1 :])] += coefficient if a > b else -coefficient
    return Counter({exponents: c for exponents, c in result.items() if c})


@cache
def schubert_polynomial(w: Permutation) -> Polynomial:
    """Lascoux and Schutzenberger's polynomial of w, from the longest element down."""
    n = len(w)
    for i in range(1, n):
        if w[i - 1] < w[i]:
            return divided_difference(i, schubert_polynomial((*w[: i - 1], w[i], w[i - 1], *w[i + 1 :])))
    return Counter({tuple(range(n - 1, -1, -1)): 1})


@cache
def classical_product(u: Permutation, v: Permutation) -> dict[Permutation, int]:
    """``{w: c_{u,v}^w}`` on complete flags: the divided difference by w, in degree l(w), is the coefficient of S_w."""
    f: Polynomial = Counter()
    for a, x in schubert_polynomial(u).items():
        for b, y in schubert_polynomial(v).items():
            f[tuple(map(sum, zip(a, b, strict=True)))] += x * y
    level = {tuple(range(1, len(u) + 1)): f}
    for _ in range(inversions(u) + inversions(v)):
        level = {
            tuple(i + 1 if x == i else i if x == i + 1 else x for x in w): divided_difference(i, g)  # s_i w, one longer
            for w, g in level.items()
            for i in range(1, len(u))
            if w.index(i) < w.index(i + 1)
        }
    return {w: sum(g.values()) for w, g in level.items() if sum(g.values())}


# -- quantum ring of complete flags: quantum Monk by counting inversions, and polynomials in its operators ---------------


@cache
def monk(w: Permutation, r: int) -> tuple[tuple[Permutation, tuple[int, ...]], ...]:
    """``sigma_{s_r} * sigma_w``, every coefficient 1: Fomin, Gelfand and Postnikov, J. Amer. Math. Soc. 10 (1997)."""
    found = []
    for a in range(1, r + 1):
        for b in range(r + 1, len(w) + 1):
            swapped = list(w)
            swapped[a - 1], swapped[b - 1] = w[b - 1], w[a - 1]
            rise = inversions(swapped) - inversions(w)
            if rise in (1, 1 - 2 * (b - a)):
                found.append((tuple(swapped), tuple(int(rise < 0 and a <= i < b) for i in range(1, len(w)))))
    return tuple(found)


def basis(w: Permutation) -> Vector:
    """``sigma_w``."""
    return Counter({(w, (0,) * (len(w) - 1)): 1})


def times_divisor(r: int, vector: Vector) -> Vector:
    """``sigma_{s_r}`` times a vector; 0 for r = 0 and r = n."""
    result: Vector = Counter()
    for (w, d), coefficient in vector.items():
        if 0 < r < len(w):
            for end, step in monk(w, r):
                result[end, tuple(map(sum, zip(d, step, strict=True)))] += coefficient
    return result


def times_x(i: int, vector: Vector) -> Vector:
    """``x_i = sigma_{s_i} - sigma_{s_{i-1}}`` times a vector."""
    return combine((1, times_divisor(i, vector)), (-1, times_divisor(i - 1, vector)))


def times_q(i: int, vector: Vector) -> Vector:
    """``q_i`` times a vector."""
    return Counter({(w, (*d[: i - 1], d[i - 1] + 1, *d[i:])): c for (w, d), c in vector.items()})


def combine(*terms: tuple[int, Vector]) -> Vector:
    """A linear combination, without zeros."""
    result: Vector = Counter()
    for factor, vector in terms:
        for key, coefficient in vector.items():
            result[key] += factor * coefficient
    return Counter({key: c for key, c in result.items() if c})


def times_quantum_elementary(p: int, m: int, vector: Vector) -> Vector:
    """The quantum elementary polynomial ``E_p^m``, the quantum form of e_p(x_1..x_m), times a vector (same source)."""
    if p == 0:
        return vector
    if p < 0 or p > m:
        return Counter()
    return combine(
        (1, times_quantum_elementary(p, m - 1, vector)),
        (1, times_x(m, times_quantum_elementary(p - 1, m - 1, vector))),
        (1, times_q(m - 1, times_quantum_elementary(p - 2, m - 2, vector)) if p > 1 else Counter()),
    )


# -- quantum ring of Grassmannians: the formula of Bertram, Vafa and Intriligator, exactly, modulo a prime -----------------


def box(k: int, n: int) -> list[tuple[int, ...]]:
    """The partitions of k rows (zeros kept) of at most n - k columns."""
    return [tuple(reversed(rows)) for rows in combinations_with_replacement(range(n - k + 1), k)]


@cache
def determinant_terms(k: int) -> list[tuple[int, Permutation]]:
    """Sign and places of the terms of a determinant."""
    return [((-1) ** inversions(w), w) for w in permutations(range(k))]


def bialternant(shape: Sequence[int], xs: Sequence[int]) -> int:
    """The determinant of ``x_i^(shape_j + k - j)`` modulo PRIME: the Schur polynomial times that of the empty shape."""
    k = len(xs)
    powers = [[pow(x, part + k - 1 - j, PRIME) for j, part in enumerate(shape)] for x in xs]
    return sum(sign * prod(powers[i][j] for i, j in enumerate(w)) for sign, w in determinant_terms(k)) % PRIME


PRIME = 1_000_000_321
"""A prime that is 1 modulo 2n for all n up to 6, so that the roots of unity below exist."""


@cache
def residues(k: int, n: int) -> dict[tuple[tuple[int, ...], ...], int]:
    """``{(l, m, w): N_{l,m}^{w,d} modulo PRIME}`` for every three shapes in the box, d the degree that fits, 0 if none does.

    ``N = n^(-k) sum_J D_l(x_J) D_m(x_J) D_w(1/x_J) / D_0(x_J)``, D the bialternants and J the k-subsets of the n-th roots of
    ``(-1)^(k-1)``.
    """
    unity = {pow(c, (PRIME - 1) // (2 * n), PRIME) for c in range(1, 200)}
    roots = [x for x in sorted(unity) if pow(x, n, PRIME) == (-1) ** (k - 1) % PRIME]
    assert len(roots) == n
    shapes = box(k, n)
    result: Counter = Counter()
    for xs in combinations(roots, k):
        direct = {shape: bialternant(shape, xs) for shape in shapes}
        inverse = {shape: bialternant(shape, [pow(x, -1, PRIME) for x in xs]) for shape in shapes}
        scale = pow(n**k * direct[(0,) * k], -1, PRIME)
        for a, b, c in product(shapes, repeat=3):
            result[a, b, c] += direct[a] * direct[b] * inverse[c] * scale
    return {key: value % PRIME for key, value in result.items()}


def check_grassmannian_row(X: FlagVariety, u: SchubertClass, v: SchubertClass, answer: Mapping[Any, int]) -> None:
    """Hold one whole product on ``Gr(k, n)``, ``{(w, d): int}``, against the residues."""
    (k,), n = X.steps, X.n
    table = residues(k, n)
    a, b = (tuple((*x.partition, *[0] * k)[:k]) for x in (u, v))
    assert all(u.length + v.length == w.length + n * d for w, (d,) in answer)
    values = {w: value for (w, _), value in answer.items()}
    assert {w: table[a, b, (*w.partition, *[0] * k)[:k]] for w in X.classes if table[a, b, (*w.partition, *[0] * k)[:k]]} == values
