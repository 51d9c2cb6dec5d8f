"""Closed formulas on record, as checks of the oracle: divisors, degrees, quantum Pieri rules, rim hooks, rational curves.

Sources. Quantum Chevalley formula: Fulton, Woodward, J. Algebraic Geom. 13 (2004), Theorem 10.1. Degree: Weyl's dimension formula.
Quantum Pieri: on Grassmannians Buch, Compositio Math. 137 (2003), Theorem 1; on ``Fl(n)`` Ciocan-Fontanine, Duke Math. J. 98 (1999)
(from memory); on ``LG`` and ``OG`` Kresch, Tamvakis, J. Algebraic Geom. 12 (2003) and Compositio Math. 140 (2004) (from memory). Rim hooks:
Bertram, Ciocan-Fontanine, Fulton, J. Algebra 219 (1999). A transposition and
the point: Kirillov, Maeno, Discrete Math. 217 (2000), Remark 12 (seen). Rational curves: Ravi, Rosenthal, Wang, Math. Ann. 311 (1998) (from memory).
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

__all__ = ["classical_degree", "formulas", "is_lagrangian", "is_odd_orthogonal", "strict_class", "strict_partitions", "weyl_degree"]

Shape = tuple[int, ...]

_LARGEST_DEGREE = 5_000
_LARGEST_PIERI = 6
_MOST_WEIGHTS = 3_000


def formulas(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The checks of all closed formulas that apply to X."""
    divisors = [(place, u) for u in X.classes for place in range(len(X.marked))]
    yield Check("quantum Chevalley", "products", divisors, partial(_chevalley, read))
    if len(divisors) <= _LARGEST_DEGREE:
        yield Check("degree by Weyl", "degrees", [X], partial(_degree, read))
    if X.is_grassmannian:
        special = [X.schubert(partition=(p,)) for p in range(1, X.n - X.marked[0] + 1)]
        yield Check("quantum Pieri", "products", [Row(X, p, u) for p in special for u in X.classes], partial(_pieri, read))
        yield Check("rim hooks", "rows", RowList(X), partial(_rim_hooks, read))
        yield Check("rational curves", "numbers", [(X, e) for e in range(3)], partial(_curves, read))
    elif X.kind.letter == "A" and X.is_complete and X.n <= _LARGEST_PIERI:
        factors = [(m, k, distinct) for m in range(1, X.n) for k in range(1, X.n) for distinct in (0, 1) if k <= (m, X.n - m)[distinct]]
        yield Check("quantum Pieri", "products", [(*f, w) for f in factors for w in X.classes], partial(_flag_pieri, read))
        triples = [(X, k, i, j) for k in range(1, X.n) for i, j in combinations(range(1, X.n + 1), 2)]
        yield Check("transposition times point", "numbers", triples, partial(_point_and_transposition, read))
    elif is_lagrangian(X) or is_odd_orthogonal(X):
        shapes = strict_partitions(X.rank)
        units = [(X, k, lam) for k in range(1, X.rank + 1) for lam in shapes]
        yield Check("quantum Pieri", "products", units, partial(_strict_pieri, read))


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


def _pieri(read: Reader, row: Row) -> Iterator[Difference]:
    """``sigma_p * sigma_l = sum sigma_mu + q sum sigma_nu``: ``mu/l`` a horizontal strip of size p; ``|nu| = |l| + p - n`` and
    ``l_1 - 1 >= nu_1 >= l_2 - 1 >= ... >= l_k - 1 >= nu_k >= 0``.
    """
    X = row.X
    k, lam = X.marked[0], _padded(row.v.partition, X.marked[0])
    total = row.u.length + row.v.length
    expected: RowTerms = {}
    for w in X.of_length(total):
        mu = _padded(w.partition, k)
        if all(a >= b for a, b in zip(mu, lam, strict=True)) and all(lam[i] >= mu[i + 1] for i in range(k - 1)):
            expected[w, (0,)] = 1
    for w in X.of_length(total - X.n):
        nu = _padded(w.partition, k)
        if all(lam[i] - 1 >= nu[i] for i in range(k)) and all(nu[i] >= lam[i + 1] - 1 for i in range(k - 1)):
            expected[w, (1,)] = 1
    yield from compare(row, ("product", read(row.u, row.v)), ("quantum Pieri rule", expected))


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
    """``(sign, power, core)`` after removal of n-rim hooks until k rows fit in n - k columns; ``None`` if it dies. A rim hook of height ht
    contributes ``q (-1)^(k - ht)``; it is a bead that moves down n places.
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
    for parts in cartesian(range(e + 1), repeat=p):
        if sum(parts) == e:
            above = prod(k - j + (parts[k] - parts[j]) * n for j, k in combinations(range(p), 2))
            below = prod(factorial(m + j + parts[j] * n) for j in range(p))
            total += Fraction(above, below)
    return (-1) ** (e * (p + 1)) * factorial(m * p + e * n) * total


def _curves(read: Reader, unit: tuple[FlagVariety, int]) -> Iterator[Difference]:
    """The coefficient of ``q^e [pt]`` in ``sigma_1^(dim + e n)``."""
    X, e = unit
    power, divisor = {(X.identity, (0,)): 1}, {(X.classes[1], (0,)): 1}
    for _ in range(X.dim + e * X.n):
        power = times(read, divisor, power)
    found, expected = power.get((X.point, (e,)), 0), _rational_curves(X.n - X.marked[0], X.marked[0], e)
    if found != expected:
        where = f"{X}: coefficient of q^{e} [pt] in sigma_1^{X.dim + e * X.n}"
        yield Difference(where, ("products", found), ("Ravi, Rosenthal, Wang", str(expected)))


# -- complete flags ------------------------------------------------------------------------------------------------------


def _flag_pieri(read: Reader, unit: tuple[int, int, int, SchubertClass]) -> Iterator[Difference]:
    """Multiplication by ``e_k`` (``distinct`` 0) or ``h_k`` (1) of ``x_1, ..., x_m``: the distinct ends of k steps ``w -> w t_ab`` in the
    quantum Bruhat graph, ``a <= m < b``, with pairwise distinct a's or b's.
    """
    m, k, distinct, w = unit
    X = w.variety
    states: set[tuple[Shape, Shape, frozenset[int]]] = {(w.permutation, (0,) * (X.n - 1), frozenset())}
    for _ in range(k):
        following = set()
        for u, d, used in states:
            here = sum(x > y for x, y in combinations(u, 2))
            for pair in cartesian(range(m), range(m, X.n)):
                if pair[distinct] in used:
                    continue
                a, b = pair
                line = list(u)
                line[a], line[b] = line[b], line[a]
                rise = sum(x > y for x, y in combinations(line, 2)) - here
                quantum = rise == 1 - 2 * (b - a)
                if rise == 1 or quantum:
                    end = tuple(e + (quantum and a <= i < b) for i, e in enumerate(d))
                    following.add((tuple(line), end, used | {pair[distinct]}))
        states = following
    letters = range(m + k - 1, m - 1, -1) if distinct else range(m - k + 1, m + 1)
    factor = X.schubert(word=letters)
    expected = {(X.schubert(permutation=line), d): 1 for line, d, _ in states}
    yield from compare(Row(X, factor, w), ("product", read(factor, w)), ("quantum Pieri rule", expected))


def _point_and_transposition(read: Reader, unit: tuple[FlagVariety, int, int, int]) -> Iterator[Difference]:
    """``[pt] sigma_{s_k} * sigma_{t_ij} * [pt]`` is ``q_i ... q_{j-1}`` if ``i <= k < j``, else 0."""
    X, k, i, j = unit
    zero, line = (0,) * (X.n - 1), list(range(1, X.n + 1))
    line[i - 1], line[j - 1] = j, i
    factor, other = X.schubert(word=(k,)), X.schubert(permutation=line)
    whole = times(read, read(factor, other), {(X.point, zero): 1})
    found = {(w, d): count for (w, d), count in whole.items() if w is X.point}
    expected = {(X.point, tuple(int(i <= r < j) for r in range(1, X.n))): 1} if i <= k < j else {}
    yield from compare(Row(X, factor, other), ("coefficient in (u * v) * [pt]", found), ("Kirillov-Maeno, Remark 12", expected))


# -- Lagrangian and odd orthogonal Grassmannians -------------------------------------------------------------------------


def is_lagrangian(X: FlagVariety) -> bool:
    """Whether X is ``LG(n,2n)``."""
    return X.kind.letter == "C" and X.marked == (X.rank,)


def is_odd_orthogonal(X: FlagVariety) -> bool:
    """Whether X is ``OG(n,2n+1)``."""
    return X.kind.letter == "B" and X.marked == (X.rank,)


@cache
def strict_partitions(n: int) -> tuple[Shape, ...]:
    """All strict partitions with parts up to n, by size."""
    found = [shape for size in range(n + 1) for shape in combinations(range(n, 0, -1), size)]
    return tuple(sorted(found, key=lambda shape: (sum(shape), shape)))


@cache
def strict_class(X: FlagVariety, shape: Shape) -> SchubertClass:
    """The class of a strict partition on ``LG(n,2n)`` or ``OG(n,2n+1)``: the part k is the word ``s_{n-k+1} ... s_n``, smallest part first."""
    return X.schubert(word=[i for k in sorted(shape) for i in range(X.rank - k + 1, X.rank + 1)])


def _strip(big: Shape, small: Shape) -> set[tuple[int, int]] | None:
    """The boxes of ``big/small``, unshifted, if they are a horizontal strip."""
    size = max(len(big), len(small))
    big, small = _padded(big, size), _padded(small, size)
    if any(a < b for a, b in zip(big, small, strict=True)) or any(b < a for b, a in zip(small, big[1:], strict=False)):
        return None
    return {(i, j) for i, (a, b) in enumerate(zip(big, small, strict=True)) for j in range(b + 1, a + 1)}


def _components(boxes: set[tuple[int, int]]) -> list[set[tuple[int, int]]]:
    """Connected components; boxes that touch at a corner are connected."""
    left, found = set(boxes), []
    while left:
        todo, part = [left.pop()], set()
        while todo:
            i, j = todo.pop()
            part.add((i, j))
            near = {(a, b) for a, b in left if abs(a - i) <= 1 and abs(b - j) <= 1}
            left -= near
            todo += near
        found.append(part)
    return found


def _strict_pieri(read: Reader, unit: tuple[FlagVariety, int, Shape]) -> Iterator[Difference]:
    """``LG``: ``s_k s_l = sum 2^N s_mu + q sum 2^N' s_nu``, strips ``mu/l`` and ``l/nu``, N the components that miss column 1, N' all but one.
    ``OG``: ``t_k t_l = sum 2^N' t_mu + q sum 2^N' t_nu``, strips ``mu/l`` and ``(n, n, nu)/l``.
    """
    X, k, lam = unit
    n, lagrangian, expected = X.rank, is_lagrangian(X), RowTerms()
    for mu in strict_partitions(n):
        excess = sum(mu) - sum(lam) - k
        if excess == 0 and (boxes := _strip(mu, lam)) is not None:
            parts = _components(boxes)
            power = sum(all(j > 1 for _, j in part) for part in parts) if lagrangian else len(parts) - 1
            expected[strict_class(X, mu), (0,)] = 2**power
        big, small = (lam, mu) if lagrangian else ((n, n, *mu), lam)
        if excess == (-n - 1 if lagrangian else -2 * n) and (boxes := _strip(big, small)) is not None:
            expected[strict_class(X, mu), (1,)] = 2 ** (len(_components(boxes)) - 1)
    row = Row(X, strict_class(X, (k,)), strict_class(X, lam))
    yield from compare(row, ("product", read(row.u, row.v)), ("quantum Pieri rule", expected))
