"""The lantern rule: a row of boxes times a shape of several rows, told with lanterns. Plausible, and false.

Invented for the tour of this project, story included: an imaginary reading group, the Lantern Circle, hangs the boxes of v as
lit lanterns on a wall of k rows and n - k columns. To multiply by a row of p boxes, either light p more lanterns, no two of them
in one column; or let the wind (one q) put out n - p lanterns, all of them on the rim, at least one in every lit row. A lantern is
on the rim when no lit one hangs diagonally below it, to the right. The constant is the number of ways to come to w.

Source: none; an invention of this project.
"""

from functools import lru_cache

from conjcheck import FlagVariety, Grassmannians, SchubertClass, candidate

__all__ = ["lantern_rule"]

Lantern = tuple[int, int]


@candidate(
    on=Grassmannians(),
    premise=lambda X, u, v: len(u.partition) == 1 < len(v.partition),
    statement=r"\sigma_p * \sigma_\lambda = \sum_{\mu/\lambda \text{ a horizontal strip}} \sigma_\mu"
    r" + q \sum_{\lambda/\nu \text{ in the rim of } \lambda \text{, meeting every row of } \lambda} \sigma_\nu",
)
def lantern_rule(X: FlagVariety, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: tuple[int]) -> list[tuple[Lantern, ...]]:
    """The ways from v to w, at most one: the lanterns (row, column) that change."""
    lit, left = lanterns(v.partition), lanterns(w.partition)
    changed = tuple(sorted(lit ^ left))
    columns, rows = [column for _, column in changed], {row for row, _ in changed}
    if d == (0,):
        legal = lit <= left and len(set(columns)) == len(columns)
    else:
        on_rim = all((row + 1, column + 1) not in lit for row, column in changed)
        legal = d == (1,) and left <= lit and on_rim and rows == {row for row, _ in lit}
    return [changed] if legal else []


@lru_cache(maxsize=65536)
def lanterns(partition: tuple[int, ...]) -> frozenset[Lantern]:
    """The boxes of a partition, rows and columns from 1."""
    return frozenset((row, column) for row, part in enumerate(partition, 1) for column in range(1, part + 1))
