"""Quantum Pieri on Lagrangian Grassmannians: a one-row class times any class of ``LG(n, 2n)``.

Classes are strict partitions with parts up to n, drawn unshifted; ``deg q = n + 1``. For u one row of k boxes and l that of v

    sigma_k * sigma_l = sum 2^N(l, mu) sigma_mu + q sum 2^(N(nu, l) - 1) sigma_nu.

First sum: mu contains l, ``|mu| = |l| + k``, and mu/l is a horizontal strip; ``N(l, mu)`` is the number of its connected components
that do not meet the first column. Second sum: l contains nu, ``|nu| = |l| + k - n - 1``, and l/nu is a horizontal strip with
``N(nu, l)`` components, all of them counted. Boxes that touch at a corner are connected.

Source: A. Kresch and H. Tamvakis, Quantum cohomology of the Lagrangian Grassmannian, J. Algebraic Geom. 12 (2003), 777-810; the
classical part: H. Hiller and B. Boe, Pieri formula for SO_{2n+1}/U_n and Sp_n/U_n, Adv. Math. 62 (1986), 49-67.
"""

from _strips import components, interlacing, is_strict

from conjcheck import FlagVariety, LagrangianGrassmannians, SchubertClass, candidate

__all__ = ["quantum_pieri_lagrangian"]


@candidate(
    on=LagrangianGrassmannians(),
    premise=lambda X, u, v: len(u.partition) == 1,
    statement=r"\sigma_k * \sigma_\lambda = \sum_{\mu/\lambda} 2^{N(\lambda,\mu)} \sigma_\mu"
    r" + q \sum_{\lambda/\nu} 2^{N'(\nu,\lambda)} \sigma_\nu, \quad \mu/\lambda \text{ and } \lambda/\nu \text{ horizontal strips of }"
    r" k \text{ and } n + 1 - k \text{ boxes},\ N \text{ their components outside the first column},\ N' \text{ all but one}",
    references=[
        "A. Kresch, H. Tamvakis, Quantum cohomology of the Lagrangian Grassmannian, J. Algebraic Geom. 12 (2003), 777-810",
        "H. Hiller, B. Boe, Pieri formula for SO_{2n+1}/U_n and Sp_n/U_n, Adv. Math. 62 (1986), 49-67",
    ],
)
def quantum_pieri_lagrangian(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, tuple[int]], int]:
    """A power of 2 for each horizontal strip added to v, or removed from it."""
    n, size = X.rank, u.length + v.length
    old = (*v.partition, 0)
    found = {}
    for mu in filter(is_strict, interlacing((n, *old[:-1]), old, size)):
        found[X.schubert(partition=mu), (0,)] = 2 ** (components(mu, old) - (mu[-1] > 0))
    for nu in filter(is_strict, interlacing(old[:-1], old[1:], size - n - 1)):
        found[X.schubert(partition=nu), (1,)] = 2 ** (components(old[:-1], nu) - 1)
    return found
