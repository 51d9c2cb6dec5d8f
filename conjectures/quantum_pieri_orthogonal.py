"""Quantum Pieri on maximal orthogonal Grassmannians: a one-row class times any class of ``OG(n, 2n+1)``.

Classes are strict partitions with parts up to n, drawn unshifted; ``deg q = 2n``. For u one row of k boxes and l that of v

    tau_k * tau_l = sum 2^(N(l, mu) - 1) tau_mu + q sum 2^(N(l, nu) - 1) tau_{nu without its first two rows}.

In both sums the shapes have ``|l| + k`` boxes and contain l, and what they add is a horizontal strip with N connected components
(boxes that touch at a corner are connected). In the first mu is strict; in the second nu is ``(n, n, ...)``, strict after that.

``OG(n+1, 2n+2)``, one family of maximal isotropic subspaces in even dimension, is the same variety with the same classes: there
the parts go up to n, too, so the rule speaks of both.

Source: A. Kresch and H. Tamvakis, Quantum cohomology of orthogonal Grassmannians, Compositio Math. 140 (2004), 482-500; the
classical part: H. Hiller and B. Boe, Pieri formula for SO_{2n+1}/U_n and Sp_n/U_n, Adv. Math. 62 (1986), 49-67.
"""

from _strips import components, interlacing, is_strict

from conjcheck import FlagVariety, OrthogonalGrassmannians, SchubertClass, candidate

__all__ = ["quantum_pieri_orthogonal"]


@candidate(
    on=OrthogonalGrassmannians(),
    premise=lambda X, u, v: len(u.partition) == 1,
    statement=r"\tau_k * \tau_\lambda = \sum_{\mu} 2^{N'(\lambda,\mu)} \tau_\mu"
    r" + q \sum_{\nu = (n,n,\bar\nu)} 2^{N'(\lambda,\nu)} \tau_{\bar\nu}, \quad \mu/\lambda \text{ and } \nu/\lambda"
    r" \text{ horizontal strips of } k \text{ boxes},\ N' \text{ their components but one}",
    references=[
        "A. Kresch, H. Tamvakis, Quantum cohomology of orthogonal Grassmannians, Compositio Math. 140 (2004), 482-500",
        "H. Hiller, B. Boe, Pieri formula for SO_{2n+1}/U_n and Sp_n/U_n, Adv. Math. 62 (1986), 49-67",
    ],
)
def quantum_pieri_orthogonal(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, tuple[int]], int]:
    """A power of 2 for each horizontal strip added to v; a shape that begins with two longest rows loses them for a q."""
    (q_degree,) = X.q_degrees
    n = q_degree // 2
    old = (*v.partition, 0)
    found = {}
    for shape in interlacing((n, *old[:-1]), old, u.length + v.length):
        d = int(shape[:2] == (n, n))
        rest = shape[2:] if d else shape
        if is_strict(rest):
            found[X.schubert(partition=rest), (d,)] = 2 ** (components(shape, old) - 1)
    return found
