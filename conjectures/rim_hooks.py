"""Rim hooks: any product on a Grassmannian, from Littlewood-Richardson numbers, with signs.

On ``Gr(k, n)`` multiply Schur polynomials in k variables, ``s_u s_v = sum c_{u,v}^l s_l``, shapes of k rows and of any width.
From a shape wider than n - k remove the n-rim hook that begins at the end of its first row, again and again, until it fits; each
hook of height h (in rows) gives a factor ``(-1)^(k - h) q``. A shape that is too wide and has no such hook counts 0. Then

    N_{u,v}^{w,d} = sum of the signs times c_{u,v}^l over the shapes l that d such hooks reduce to w.

The rule is right but not positive: a test of the signs, not a combinatorial formula for the numbers.

Source: A. Bertram, I. Ciocan-Fontanine and W. Fulton, Quantum multiplication of Schur polynomials, J. Algebra 219 (1999), 728-746.
"""

from collections import Counter
from functools import lru_cache
from itertools import accumulate
from operator import add

from conjcheck import FlagVariety, Grassmannians, SchubertClass, candidate

__all__ = ["rim_hooks"]

Shape = tuple[int, ...]


@candidate(
    on=Grassmannians(),
    statement=r"N_{u,v}^{w,d} = \sum_{\lambda \to w,\ d \text{ rim hooks}} \Bigl(\prod_{i=1}^{d} (-1)^{k - \mathrm{ht}_i}\Bigr)"
    r" c_{u,v}^{\lambda}",
    references=[
        "A. Bertram, I. Ciocan-Fontanine, W. Fulton, Quantum multiplication of Schur polynomials, J. Algebra 219 (1999), 728-746"
    ],
)
def rim_hooks(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, tuple[int]], int]:
    """The signed sums, without those that cancel."""
    (k,), n = X.steps, X.n
    total: Counter[tuple[Shape, int]] = Counter()
    for wide, count in littlewood_richardson(u.partition, v.partition, k).items():
        shape, hooks, sign = remove_rim_hooks(wide, n)
        total[shape, hooks] += sign * count
    return {(X.schubert(partition=shape), (d,)): value for (shape, d), value in total.items() if value}


def littlewood_richardson(u: Shape, v: Shape, k: int) -> Counter[Shape]:
    """All ``c_{u,v}^l`` over the shapes l of k rows: Littlewood-Richardson tableaux of shape l/u and content v, letter by letter.

    Each letter fills a horizontal strip, and down to any row it occurs at most as often as the letter before it above that row.
    """
    states = Counter({((*u, *[0] * k)[:k], (sum(v),) * k): 1})
    for size in v:
        grown: Counter[tuple[Shape, Shape]] = Counter()
        for (shape, most), count in states.items():
            for strip in strips(shape, most, size):
                grown[tuple(map(add, shape, strip)), tuple(accumulate(strip[:-1], initial=0))] += count
        states = grown
    result: Counter[Shape] = Counter()
    for (shape, _), count in states.items():
        result[shape] += count
    return result


def strips(shape: Shape, most: Shape, size: int) -> list[Shape]:
    """Horizontal strips on a shape, as boxes per row: ``size`` boxes in all, at most ``most[r]`` of them in rows 0..r."""
    partial: list[Shape] = [()]
    for r in range(len(shape)):
        room = shape[r - 1] - shape[r] if r else size
        partial = [(*s, x) for s in partial for x in range(min(room, min(most[r], size) - sum(s)) + 1)]
    return [s for s in partial if sum(s) == size]


@lru_cache(maxsize=65536)
def remove_rim_hooks(shape: Shape, n: int) -> tuple[Shape, int, int]:
    """The shape that is left, the number of n-rim hooks removed, and the product of their signs (0: one could not be removed).

    In the beads ``b_i = shape_i + k - i`` (i = 1..k) the hook at the end of the first row is the move of b_1 down by n, to a place
    that must be free; its height is 1 plus the number of beads passed.
    """
    k, hooks, sign = len(shape), 0, 1
    beads = [part + k - 1 - i for i, part in enumerate(shape)]
    while sign and beads[0] >= n:
        moved, *others = beads
        moved -= n
        height = 1 + sum(bead > moved for bead in others)
        sign = 0 if moved in others else sign * (-1) ** (k - height)
        hooks += 1
        beads = sorted((moved, *others), reverse=True)
    return tuple(bead - (k - 1 - i) for i, bead in enumerate(beads)), hooks, sign
