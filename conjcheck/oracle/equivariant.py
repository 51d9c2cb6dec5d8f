"""Equivariant structure constants ``c_{u,v}^{w,d}``, polynomials in the simple roots with nonnegative coefficients.

They come from the engine "localisation". For comparisons they are known by their values at two random points, modulo two primes
above ``2^30``: two different polynomials of degree at most 1,000 agree at both with probability below ``(1000 / 2^30)^2 <
1e-12``. To be shown, and to be exact, one constant is interpolated from as many points as it has monomials, modulo one prime,
and checked at two more points modulo another.

Convention (Mihalcea 2007): ``sigma_{s_i} * sigma_u`` has the term ``(omega_i - u omega_i) sigma_u``; then every constant is a
polynomial in the simple roots with nonnegative coefficients, homogeneous of degree ``l(u) + l(v) - l(w) - sum d_i deg q_i``. In
type A this is the convention of double Schubert polynomials with ``alpha_i = y_{i+1} - y_i``.

Source: Mihalcea, On equivariant quantum cohomology of homogeneous spaces, Duke Math. J. 140 (2007); positivity: Graham,
Positivity in equivariant Schubert calculus, Duke Math. J. 109 (2001), and Mihalcea, Positivity in equivariant quantum Schubert
calculus, Amer. J. Math. 128 (2006).
"""

from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations_with_replacement
from math import comb

import numpy as np

from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import Case
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.geometry.polynomial import RootPolynomial
from conjcheck.oracle.localisation import LocalisationEngine, localisation
from conjcheck.oracle.residues import primes, solve

__all__ = ["MOST_DEGREE", "MOST_MONOMIALS", "Sampled", "equivariant_constant", "equivariant_terms", "number_of_monomials"]

MOST_DEGREE = 1_000
MOST_MONOMIALS = 130

_POINTS = ((0, 0), (1, 0))
"""The points of comparison: number of the prime, seed of the residues."""


@dataclass(frozen=True, slots=True, eq=False)
class Sampled:
    """An equivariant constant known by its values at some points; compares with polynomials and integers.

    Attributes:
        points: pairs (prime, residues of the simple roots).
        residues: the values there.
    """

    points: tuple[tuple[int, tuple[int, ...]], ...]
    residues: tuple[int, ...]

    def __eq__(self, other: object) -> bool:
        if isinstance(other, Sampled):
            return self.residues == other.residues
        if isinstance(other, RootPolynomial):
            return all(other.at(t, p) == value for (p, t), value in zip(self.points, self.residues, strict=True))
        if isinstance(other, int):
            return all(other % p == value for (p, _), value in zip(self.points, self.residues, strict=True))
        return NotImplemented

    __hash__ = None  # type: ignore[assignment]  # equal to polynomials whose hash it cannot know

    def __repr__(self) -> str:
        return "a polynomial known by its values"


def equivariant_terms(u: SchubertClass, v: SchubertClass, *, quantum: bool) -> dict[tuple[SchubertClass, Degree], Sampled]:
    """The nonzero equivariant constants of ``sigma_u * sigma_v``, sampled; only ``d = 0`` unless quantum.

    Raises:
        OutOfReach: the variety has too many classes or the product too many powers of q.
    """
    X = u.variety
    engine, work = localisation(X), LocalisationEngine()
    most = u.length + v.length if quantum else 0
    if reason := work.refuses(X):
        raise OutOfReach(f"expected a variety in reach of engine 'localisation', but {reason}")
    work.check(X, most)
    tables = [engine.equivariant_residues(u, v, most, prime, seed) for prime, seed in _POINTS]
    points = tuple(_point(X, prime, seed) for prime, seed in _POINTS)
    return {key: Sampled(points, residues) for key in tables[0] if any(residues := tuple(table[key] for table in tables))}


def _point(X: FlagVariety, prime: int, seed: int) -> tuple[int, tuple[int, ...]]:
    p = primes(prime + 1)[prime]
    return p, tuple(localisation(X).numbers(p, seed).simple.tolist())


def number_of_monomials(case: Case) -> int:
    """How many monomials the constant of a case may have; 0 if its degree would be negative."""
    degree = _degree(case)
    return comb(degree + case.X.rank - 1, degree) if degree >= 0 else 0


def _degree(case: Case) -> int:
    weight = sum(a * b for a, b in zip(case.d, case.X.q_degrees, strict=True))
    return case.u.length + case.v.length - case.w.length - weight


@lru_cache(maxsize=1024)
def equivariant_constant(case: Case) -> RootPolynomial:
    """One equivariant constant, exactly.

    >>> from conjcheck.geometry.case import Case
    >>> equivariant_constant(Case.parse("Gr(1,3): (1) * (1) -> (1)"))
    alpha1

    Raises:
        OutOfReach: more than ``MOST_MONOMIALS`` monomials.
    """
    X, degree = case.X, _degree(case)
    if degree < 0:
        return RootPolynomial.of(X.rank, {})
    count = number_of_monomials(case)
    if count > MOST_MONOMIALS:
        raise OutOfReach(f"expected a constant of at most {MOST_MONOMIALS} monomials, got {count} at {case}")
    engine, key = localisation(X), (case.w, case.d)
    most = case.u.length + case.v.length - case.w.length - degree
    exponents = [tuple(roots.count(i) for i in range(X.rank)) for roots in combinations_with_replacement(range(X.rank), degree)]
    p = primes(1)[0]
    rows, values = [], []
    for seed in range(count):
        _, t = _point(X, 0, seed)
        rows.append([RootPolynomial.of(X.rank, {e: 1}).at(t, p) for e in exponents])
        values.append(engine.equivariant_residues(case.u, case.v, most, 0, seed).get(key, 0))
    solution = solve(np.array(rows, dtype=np.int64), np.array(values, dtype=np.int64), p)
    found = RootPolynomial.of(X.rank, dict(zip(exponents, solution, strict=True)))
    for seed in (0, 1):
        q, t = _point(X, 1, seed)
        check = engine.equivariant_residues(case.u, case.v, most, 1, seed).get(key, 0)
        assert found.at(t, q) == check, "the interpolated polynomial must hold at further points"
    assert found.is_positive, "equivariant constants have nonnegative coefficients"
    return found
