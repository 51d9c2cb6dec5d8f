"""Quantum Pieri on Grassmannians: a one-row class times any class.

On ``Gr(k, n)`` let u be one row of p boxes and l the partition of v, padded to k rows in a box of width m = n - k. Then

    sigma_p * sigma_l = sum sigma_mu + q sum sigma_nu

over the partitions with ``m >= mu_1 >= l_1 >= mu_2 >= ... >= mu_k >= l_k`` and ``|mu| = |l| + p``, and over those with
``l_1 - 1 >= nu_1 >= l_2 - 1 >= nu_2 >= ... >= l_k - 1 >= nu_k >= 0`` and ``|nu| = |l| + p - n``.

Source: A. Bertram, Quantum Schubert calculus, Adv. Math. 128 (1997), 289-305; in this form A. S. Buch, Quantum cohomology of
Grassmannians, Compositio Math. 137 (2003), 227-235, Theorem 1.
"""

from collections.abc import Iterator, Sequence

from conjcheck import FlagVariety, Grassmannians, SchubertClass, candidate

__all__ = ["quantum_pieri_grassmannians"]


@candidate(
    on=Grassmannians(),
    premise=lambda X, u, v: len(u.partition) == 1,
    statement=r"\sigma_p * \sigma_\lambda = \sum_{\mu} \sigma_\mu + q \sum_{\nu} \sigma_\nu, \quad"
    r" n - k \ge \mu_1 \ge \lambda_1 \ge \dots \ge \mu_k \ge \lambda_k, \quad"
    r" \lambda_1 - 1 \ge \nu_1 \ge \lambda_2 - 1 \ge \dots \ge \lambda_k - 1 \ge \nu_k \ge 0",
    references=[
        "A. Bertram, Quantum Schubert calculus, Adv. Math. 128 (1997), 289-305",
        "A. S. Buch, Quantum cohomology of Grassmannians, Compositio Math. 137 (2003), 227-235, Theorem 1",
    ],
)
def quantum_pieri_grassmannians(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, tuple[int]], int]:
    """Coefficient 1 for each interlacing partition."""
    (k,), n = X.steps, X.n
    old = (*v.partition, *[0] * k)[:k]
    less = tuple(part - 1 for part in old)
    grown = interlacing((n - k, *old[:-1]), old, v.length + u.length)
    shrunk = interlacing(less, (*less[1:], 0), v.length + u.length - n)
    return {(X.schubert(partition=shape), (d,)): 1 for d, shapes in ((0, grown), (1, shrunk)) for shape in shapes}


def interlacing(above: Sequence[int], below: Sequence[int], size: int) -> Iterator[tuple[int, ...]]:
    """All integer tuples of a given sum between two bounds, entry by entry."""
    if not above:
        if size == 0:
            yield ()
        return
    for part in range(max(below[0], size - sum(above[1:])), min(above[0], size - sum(below[1:])) + 1):
        for rest in interlacing(above[1:], below[1:], size - part):
            yield (part, *rest)
