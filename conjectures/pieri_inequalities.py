"""Quantum Pieri with open choices: which inequalities multiply a row of boxes by a shape? A page to sift.

Half of finding a rule is finding its inequalities: weak or strict, with 0, 1 or 2 to spare, rows or columns, up to which power of q. Here
that half is left open. On ``Gr(k, n)`` let u be a row of p boxes and l the partition of v, padded to k rows. The constant is 0 or 1: for
``d = 0`` it is 1 when the parts of w and v interlace, ``w_i >= l_i >= w_{i+1}``; for ``d = 1`` when they do so after one box is taken from
each row of l, ``l_i - 1 >= w_i >= l_{i+1} - 1``. The first value of each choice makes it the theorem; ``conjcheck sift`` finds out that no
other combination is true, and where each of them fails first.

Source: A. Bertram, Quantum Schubert calculus, Adv. Math. 128 (1997), 289-305; in this form A. S. Buch, Quantum cohomology of
Grassmannians, Compositio Math. 137 (2003), 227-235, Theorem 1. The wrong variants are ours.
"""

from conjcheck import FlagVariety, Grassmannians, SchubertClass, candidate

__all__ = ["pieri_inequalities"]


@candidate(
    on=Grassmannians(),
    premise=lambda X, u, v: len(u.partition) == 1,
    statement=r"\sigma_p * \sigma_\lambda = \sum_{\mu} \sigma_\mu + q \sum_{\nu} \sigma_\nu, \quad"
    r" \mu_i \ge \lambda_i \ge \mu_{i+1}, \quad \lambda_i - 1 \ge \nu_i \ge \lambda_{i+1} - 1",
    references=["A. S. Buch, Quantum cohomology of Grassmannians, Compositio Math. 137 (2003), 227-235, Theorem 1"],
    variants={
        "along": ("rows", "columns"),  # the parts compared are the rows of the shapes, or their columns
        "apart": (0, 1),  # d = 0: how much less w_{i+1} must be than l_i
        "taken": (1, 0, 2),  # d > 0: so many boxes at least go from each row
        "spared": (1, 0, 2),  # d > 0: so many boxes less than the next row may be left
        "highest": (1, 0),  # the highest power of q
    },
)
def pieri_inequalities(
    X: FlagVariety,
    u: SchubertClass,
    v: SchubertClass,
    w: SchubertClass,
    d: tuple[int],
    *,
    along: str,
    apart: int,
    taken: int,
    spared: int,
    highest: int,
) -> int:
    """1 if the parts of w and v interlace, else 0."""
    (k,), n = X.steps, X.n
    old, new = (padded(x.partition, k) if along == "rows" else padded(conjugate(x.partition), n - k) for x in (v, w))
    if d == (0,):
        grown = all(a <= b for a, b in zip(old, new, strict=True))
        return int(grown and all(b <= a - apart for a, b in zip(old[:-1], new[1:], strict=True)))
    above = all(b <= a - taken for a, b in zip(old, new, strict=True))
    below = all(b >= a - spared for a, b in zip(old[1:], new[:-1], strict=True))
    return int(d[0] <= highest and above and below)


def padded(partition: tuple[int, ...], count: int) -> tuple[int, ...]:
    """A partition with zeros at the end, ``count`` parts in all."""
    return (*partition, *[0] * (count - len(partition)))


def conjugate(partition: tuple[int, ...]) -> tuple[int, ...]:
    """The columns of a shape.

    >>> conjugate((3, 1))
    (2, 1, 1)
    """
    return tuple(sum(part > j for part in partition) for j in range(max(partition, default=0)))
