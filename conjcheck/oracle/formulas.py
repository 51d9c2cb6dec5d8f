"""Closed formulas on record, as checks of the oracle: divisors, degrees, rim hooks, rational curves, a point and a transposition.

Sources. Quantum Chevalley formula: Fulton, Woodward, J. Algebraic Geom. 13 (2004), Theorem 10.1. Degree: Weyl's dimension formula.
Rim hooks: Bertram, Ciocan-Fontanine, Fulton, J. Algebra 219 (1999). Rational curves: Ravi, Rosenthal, Wang, Math. Ann. 311 (1998) (from
memory). A transposition and the point: Kirillov, Maeno, Discrete Math. 217 (2000), Remark 12 (seen).
"""

from collections.abc import Iterator
from fractions import Fraction
from functools import cache, partial
from itertools import combinations
from itertools import product as cartesian
from math import factorial, prod

from conjcheck.errors import OutOfReach
from conjcheck.geometry.cartan import positive_roots
from conjcheck.geometry.case import Row
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.oracle.check import Check, Difference, Reader, RowList, compare, times
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.engine import RowTerms
from conjcheck.oracle.grassmannian import dimension
from conjcheck.oracle.pieri import pieri_rules

__all__ = ["classical_degree", "formulas", "weyl_degree"]

Shape = tuple[int, ...]

_LARGEST_DEGREE = 5_000
_LARGEST_FLAGS = 6
_MOST_WEIGHTS = 3_000


def formulas(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The checks of all closed formulas that apply to X."""
    divisors = [(place, u) for u in X.classes for place in range(len(X.marked))]
    yield Check("quantum Chevalley", "products", divisors, partial(_chevalley, read))
    if len(divisors) <= _LARGEST_DEGREE:
        yield Check("degree by Weyl", "degrees", [X], partial(_degree, read))
    yield from pieri_rules(X, read)
    if X.is_grassmannian:
        yield Check("rim hooks", "rows", RowList(X), partial(_rim_hooks, read))
        yield Check("rational curves", "numbers", [(X, e) for e in range(3)], partial(_curves, read))
    elif X.kind.letter == "A" and X.is_complete and X.n <= _LARGEST_FLAGS:
        triples = [(X, k, i, j) for k in range(1, X.n) for i, j in combinations(range(1, X.n + 1), 2)]
        yield Check("transposition times point", "numbers", triples, partial(_point_and_transposition, read))


def _chevalley(read: Reader, unit: tuple[int, SchubertClass]) -> Iterator[Difference]:
    place, u = unit
    X = u.variety
    divisor = X.schubert(word=(X.marked[place],))
    expected = {(X.classes[w], d): c[place] for w, d, c in chevalley(X).terms(u.index) if c[place]}
    yield from compare(Row(X, divisor, u), ("product", read(divisor, u)), ("quantum Chevalley formula", expected))


def classical_degree(X: FlagVariety, read: Reader) -> int:
    """The coefficient of ``[pt]`` in ``D^dim`` at q = 0, D the sum of the divisors: from one row for each divisor and class."""
    zero, level = (0,) * len(X.marked), {X.identity: 1}
    for _ in range(X.dim):
        following: dict[SchubertClass, int] = {}
        for u, count in level.items():
            for divisor in X.of_length(1):
                for (w, d), c in read(divisor, u).items():
                    if d == zero:
                        following[w] = following.get(w, 0) + c * count
        level = following
    return level.get(X.point, 0)


def weyl_degree(X: FlagVariety) -> int:
    """The degree of X for the sum of the marked fundamental weights: ``dim! prod <lambda, a^vee> / <rho, a^vee>``, roots outside the Levi.

    >>> weyl_degree(FlagVariety("Gr(3,6)")), weyl_degree(FlagVariety("G2/B"))
    (42, 720)
    """
    above, below = factorial(X.dim), 1
    for _, coroot in positive_roots(X.kind):
        if height := sum(coroot[i - 1] for i in X.marked):
            above, below = above * height, below * sum(coroot)
    return above // below


def _degree(read: Reader, X: FlagVariety) -> Iterator[Difference]:
    found, expected = classical_degree(X, read), weyl_degree(X)
    if found != expected:
        yield Difference(f"{X}: degree for the sum of the divisors", ("products", found), ("Weyl", expected))


# -- Grassmannians -------------------------------------------------------------------------------------------------------


def _padded(shape: Shape, k: int) -> Shape:
    return (*shape, *[0] * k)[:k]


@cache
def _tableau_weights(shape: Shape, k: int) -> tuple[Shape, ...]:
    """The weights of all semistandard tableaux of a shape with entries 1..k, with repetition, by Gelfand-Tsetlin patterns."""
    if k == 0:
        return ((),)
    return tuple(
        (*weight, sum(shape) - sum(inner))
        for inner in cartesian(*(range(shape[i + 1], shape[i] + 1) for i in range(k - 1)))
        for weight in _tableau_weights(inner, k - 1)
    )


def _without_rim_hooks(shape: Shape, k: int, n: int) -> tuple[int, int, Shape] | None:
    """``(sign, power, core)`` after removal of n-rim hooks until k rows fit in n - k columns; ``None`` if it dies.

    A rim hook of height ht contributes ``q (-1)^(k - ht)``; it is a bead that moves down n places.
    """
    sign, power = 1, 0
    while shape[0] > n - k:
        beads = [part + k - 1 - i for i, part in enumerate(shape)]
        moved = beads[0] - n
        if moved < 0 or moved in beads:
            return None
        height = 1 + sum(bead > moved for bead in beads[1:])
        beads = sorted([*beads[1:], moved], reverse=True)
        shape = tuple(bead - (k - 1 - i) for i, bead in enumerate(beads))
        sign, power = sign * (-1) ** (k - height), power + 1
    return sign, power, shape


def _rim_hooks(read: Reader, row: Row) -> Iterator[Difference]:
    """The classical product in k variables (Brauer, Klimyk), then rim hooks.

    Raises:
        OutOfReach: too many tableaux.
    """
    X, k = row.X, row.X.marked[0]
    small, large = sorted((row.u.partition, row.v.partition), key=lambda shape: dimension(shape, k))
    if dimension(small, k) > _MOST_WEIGHTS:
        raise OutOfReach(f"expected a factor with at most {_MOST_WEIGHTS:,} tableaux, got {row}")
    start, expected = _padded(large, k), RowTerms()
    for weight in _tableau_weights(_padded(small, k), k):
        beads = [start[i] + weight[i] + k - 1 - i for i in range(k)]
        if len(set(beads)) < k:
            continue
        sign = (-1) ** sum(a < b for a, b in combinations(beads, 2))
        shape = tuple(bead - (k - 1 - i) for i, bead in enumerate(sorted(beads, reverse=True)))
        if reduced := _without_rim_hooks(shape, k, X.n):
            key = X.schubert(partition=reduced[2]), (reduced[1],)
            expected[key] = expected.get(key, 0) + sign * reduced[0]
    yield from compare(row, ("product", read(row.u, row.v)), ("rim hooks", expected))


def _rational_curves(m: int, p: int, e: int) -> Fraction:
    """The number of Ravi, Rosenthal and Wang on ``Gr(p, m + p)``."""
    n, total = m + p, Fraction(0)
    scale = (-1) ** (e * (p + 1)) * factorial(m * p + e * n)
    for parts in cartesian(range(e + 1), repeat=p):
        if sum(parts) == e:
            above = prod(k - j + (parts[k] - parts[j]) * n for j, k in combinations(range(p), 2))
            below = prod(factorial(m + j + parts[j] * n) for j in range(p))
            total += Fraction(scale * above, below)
    return total


def _curves(read: Reader, unit: tuple[FlagVariety, int]) -> Iterator[Difference]:
    """The coefficient of ``q^e [pt]`` in ``sigma_1^(dim + e n)``."""
    X, e = unit
    power: RowTerms = {(X.identity, (0,)): 1}
    for _ in range(X.dim + e * X.n):
        power = times(read, {(X.classes[1], (0,)): 1}, power)
    found, expected = power.get((X.point, (e,)), 0), _rational_curves(X.n - X.marked[0], X.marked[0], e)
    if found != expected:
        where = f"{X}: coefficient of q^{e} [pt] in sigma_1^{X.dim + e * X.n}"
        yield Difference(where, ("products", found), ("Ravi, Rosenthal, Wang", str(expected)))


# -- complete flags ------------------------------------------------------------------------------------------------------


def _point_and_transposition(read: Reader, unit: tuple[FlagVariety, int, int, int]) -> Iterator[Difference]:
    """``[pt] sigma_{s_k} * sigma_{t_ij} * [pt]`` is ``q_i ... q_{j-1}`` if ``i <= k < j``, else 0."""
    X, k, i, j = unit
    zero, line = (0,) * (X.n - 1), list(range(1, X.n + 1))
    line[i - 1], line[j - 1] = j, i
    factor, other = X.schubert(word=(k,)), X.schubert(permutation=line)
    whole = times(read, read(factor, other), {(X.point, zero): 1})
    found = {(w, d): count for (w, d), count in whole.items() if w is X.point}
    expected = {(X.point, tuple(int(i <= r < j) for r in range(1, X.n))): 1} if i <= k < j else {}
    yield from compare(Row(X, factor, other), ("products", found), ("Kirillov-Maeno, Remark 12", expected), third=X.point)
