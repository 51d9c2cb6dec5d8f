"""Quantum Pieri rules: a special class times a Schubert class, as checks of the oracle.

Sources. Grassmannians: Buch, Quantum cohomology of Grassmannians, Compositio Math. 137 (2003), Theorem 1. ``Fl(n)``: Ciocan-Fontanine,
On quantum cohomology rings of partial flag varieties, Duke Math. J. 98 (1999) (from memory). ``LG(n,2n)`` and ``OG(n,2n+1)``: Kresch,
Tamvakis, J. Algebraic Geom. 12 (2003) and Compositio Math. 140 (2004) (from memory).
"""

from collections.abc import Iterator
from functools import cache, partial
from itertools import combinations
from itertools import product as cartesian

from conjcheck.geometry.case import Row
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.oracle.check import Check, Difference, Reader, compare
from conjcheck.oracle.engine import RowTerms

__all__ = ["is_lagrangian", "is_odd_orthogonal", "pieri_rules", "strict_class", "strict_partitions"]

Shape = tuple[int, ...]

_LARGEST_FLAGS = 6


def pieri_rules(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The quantum Pieri rule on X, if there is one."""
    if X.is_grassmannian:
        special = [X.schubert(partition=(p,)) for p in range(1, X.n - X.marked[0] + 1)]
        yield Check("quantum Pieri", "products", [Row(X, p, u) for p in special for u in X.classes], partial(_pieri, read))
    elif X.kind.letter == "A" and X.is_complete and X.n <= _LARGEST_FLAGS:
        factors = [
            (m, k, distinct) for m in range(1, X.n) for k in range(1, X.n) for distinct in (0, 1) if k <= (m, X.n - m)[distinct]
        ]
        yield Check("quantum Pieri", "products", [(*f, w) for f in factors for w in X.classes], partial(_flag_pieri, read))
    elif is_lagrangian(X) or is_odd_orthogonal(X):
        units = [(X, k, lam) for k in range(1, X.rank + 1) for lam in strict_partitions(X.rank)]
        yield Check("quantum Pieri", "products", units, partial(_strict_pieri, read))


def _padded(shape: Shape, k: int) -> Shape:
    return (*shape, *[0] * k)[:k]


def _pieri(read: Reader, row: Row) -> Iterator[Difference]:
    """``sigma_p * sigma_l = sum sigma_mu + q sum sigma_nu``.

    ``mu/l`` is a horizontal strip of size p; ``|nu| = |l| + p - n`` and ``l_1 - 1 >= nu_1 >= l_2 - 1 >= ... >= l_k - 1 >= nu_k >= 0``.
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


def _flag_pieri(read: Reader, unit: tuple[int, int, int, SchubertClass]) -> Iterator[Difference]:
    """Multiplication by ``e_k`` (``distinct`` 0) or ``h_k`` (1) of ``x_1, ..., x_m``.

    Its terms are the distinct ends of k steps ``w -> w t_ab`` in the quantum Bruhat graph, ``a <= m < b``, pairwise distinct a's or b's.
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
    """The class of a strict partition on ``LG(n,2n)`` or ``OG(n,2n+1)``: a part k is the word ``s_{n-k+1} ... s_n``, smallest first."""
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
    """The quantum Pieri rules of Kresch and Tamvakis; strips are horizontal, of size k.

    ``LG``: ``s_k s_l = sum 2^N s_mu + q sum 2^N' s_nu``, strips ``mu/l`` and ``l/nu``, N the components that miss column 1, N' all but
    one. ``OG``: ``t_k t_l = sum 2^N' t_mu + q sum 2^N' t_nu``, strips ``mu/l`` and ``(n, n, nu)/l``.
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
