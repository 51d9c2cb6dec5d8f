"""The mirror witness: critical values of a Laurent polynomial against the spectrum of ``c_1 *``. It knows no Schubert calculus.

Toric potential of ``Fl(k1, ..., km; n)`` at q = 1: cut the n x n grid into diagonal blocks of sizes ``k_i - k_{i-1}``. The boxes strictly
below the blocks carry one variable each, their number is dim X; the lower-left corner of each block carries 1. Each step right or
down between neighbouring carriers, at least one of them a box, adds (value at the head) / (value at the tail). Every critical value of this
potential on the torus is an eigenvalue of ``c_1 *``, where ``c_1 = sum deg q_i sigma_{s_i}``. Both sides are polynomials over Q; the
critical values come from a Groebner basis (sympy).

Source: Givental, Stationary phase integrals, quantum Toda lattices, flag manifolds and the mirror conjecture, AMS Transl. 180 (1997);
Eguchi, Hori, Xiong, Gravitational quantum cohomology, Int. J. Mod. Phys. A 12 (1997); Batyrev, Ciocan-Fontanine, Kim, van Straten,
Mirror symmetry and toric degenerations of partial flag manifolds, Acta Math. 184 (2000).
"""

from collections.abc import Callable
from importlib.util import find_spec
from itertools import pairwise
from itertools import product as cartesian
from typing import Any

from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.oracle.engine import RowTerms

__all__ = ["CRITICAL_POINTS", "critical_values", "has_sympy", "spectrum"]

CRITICAL_POINTS = {
    "Gr(1,3)": (3, 0.5),
    "Gr(2,4)": (4, 0.5),
    "Gr(2,5)": (10, 2.0),
    "Fl(3)": (6, 0.5),
    "Fl(1,3;4)": (9, 1.0),
    "Fl(1,2;4)": (11, 5.0),
}
"""The spaces where this is tried: the number of critical points there (computed, no source), and about how many seconds it takes.

On ``Gr(2,4)``, ``Fl(1,3;4)`` and ``Fl(1,2;4)`` there are fewer of them than the 6, 12 and 12 Schubert classes: common practice, no source.
"""


def has_sympy() -> bool:
    """Whether sympy, which is optional, is installed."""
    return find_spec("sympy") is not None


def _potential(X: FlagVariety) -> tuple[Any, list[Any]]:
    """The potential at q = 1 and its variables."""
    import sympy

    cuts = [0, *X.steps, X.n]
    block = [b for b, (low, high) in enumerate(pairwise(cuts)) for _ in range(low, high)]
    boxes = {(i, j): sympy.Symbol(f"x{i}_{j}") for i in range(X.n) for j in range(X.n) if block[i] > block[j]}
    carriers = boxes | {(high - 1, low): sympy.Integer(1) for low, high in pairwise(cuts)}
    potential = sum(
        carriers[head] / carriers[tail]
        for tail in carriers
        for head in ((tail[0], tail[1] + 1), (tail[0] + 1, tail[1]))
        if head in carriers and (tail in boxes or head in boxes)
    )
    return potential, [boxes[box] for box in sorted(boxes)]


def critical_values(X: FlagVariety) -> tuple[Any, int]:
    """A squarefree polynomial in t over Q whose roots are the critical values, and the number of critical points.

    The critical points are the zeros of an ideal; its quotient has the standard monomials of a Groebner basis as a basis, and the
    eigenvalues of multiplication by the potential are the critical values. ``z`` is the inverse of the product of all variables.

    Cost: a Groebner basis in dim X + 1 variables.
    """
    import sympy

    potential, variables = _potential(X)
    inverse = sympy.Symbol("z")
    symbols = (inverse, *variables)
    whole = sympy.prod(variables)
    equations = [sympy.numer(sympy.together(sympy.diff(potential, x))) for x in variables]
    basis = sympy.groebner([*equations, inverse * whole - 1], *symbols, order="grevlex")
    heads = [sympy.Poly(f, *symbols).monoms(order="grevlex")[0] for f in basis.exprs]
    places = {term: k for k, term in enumerate(_standard_monomials(heads))}
    as_polynomial = sympy.expand(inverse * sympy.expand(potential * whole))
    matrix = sympy.zeros(len(places))
    for term, k in places.items():
        factor = sympy.prod(x**e for x, e in zip(symbols, term, strict=True))
        for found, count in sympy.Poly(basis.reduce(sympy.expand(as_polynomial * factor))[1], *symbols).terms():
            matrix[k, places[found]] = count
    polynomial = matrix.charpoly(sympy.Symbol("t")).as_poly()
    return sympy.quo(polynomial, sympy.gcd(polynomial, polynomial.diff())), len(places)


def _standard_monomials(heads: list[tuple[int, ...]]) -> list[tuple[int, ...]]:
    """The exponents that no leading exponent divides, for an ideal of dimension 0."""
    bounds = [next(head[i] for head in heads if sum(head) == head[i] > 0) for i in range(len(heads[0]))]
    return [
        term
        for term in cartesian(*map(range, bounds))
        if not any(all(a >= b for a, b in zip(term, head, strict=True)) for head in heads)
    ]


def spectrum(X: FlagVariety, row: Callable[[SchubertClass, SchubertClass], RowTerms]) -> Any:
    """The characteristic polynomial of ``c_1 *`` at q = 1, from products of divisors."""
    import sympy

    matrix = sympy.zeros(len(X.classes))
    for degree, node in zip(X.q_degrees, X.marked, strict=True):
        for u in X.classes:
            for (w, _), count in row(X.schubert(word=(node,)), u).items():
                matrix[w.index, u.index] += degree * count
    return matrix.charpoly(sympy.Symbol("t")).as_poly()
