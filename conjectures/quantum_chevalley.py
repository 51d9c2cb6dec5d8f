"""Quantum Chevalley: a divisor class times any class, on every G/P.

For a marked node i, with alpha over the positive roots outside the Levi of P,

    sigma_{s_i} * sigma_u = sum <omega_i, alpha^vee> sigma_{u s_alpha} + sum <omega_i, alpha^vee> q^d(alpha) sigma_{u s_alpha},

the first sum over the alpha with ``l(u s_alpha W_P) = l(u) + 1``, the second over those with ``l(u s_alpha W_P) = l(u) + 1 - n_alpha``.
Here ``d(alpha)`` is ``alpha^vee`` modulo the coroots of the Levi, ``n_alpha = <2 rho - 2 rho_P, alpha^vee>`` is the degree of
``q^d(alpha)``, and ``l(u W_P)`` is the length of the minimal representative. ``_root_systems.py`` says how cosets are computed.

Source: D. Peterson (lectures, 1997); W. Fulton and C. Woodward, On the quantum product of Schubert classes, J. Algebraic Geom. 13
(2004), 641-661, Theorem 10.1.
"""

from _root_systems import Terms, chevalley_terms

from conjcheck import FlagVariety, HomogeneousSpaces, SchubertClass, candidate

__all__ = ["quantum_chevalley"]


@candidate(
    on=HomogeneousSpaces(most_classes=240),
    premise=lambda X, u, v: u.length == 1,
    statement=r"\sigma_{s_i} * \sigma_u = \sum_{\ell(u s_\alpha W_P) = \ell(u) + 1} \langle\omega_i, \alpha^\vee\rangle"
    r" \sigma_{u s_\alpha} + \sum_{\ell(u s_\alpha W_P) = \ell(u) + 1 - n_\alpha} \langle\omega_i, \alpha^\vee\rangle"
    r" q^{d(\alpha)} \sigma_{u s_\alpha}, \quad \alpha \in R^+ \setminus R_P^+",
    references=[
        "W. Fulton, C. Woodward, On the quantum product of Schubert classes, J. Algebraic Geom. 13 (2004), 641-661, Theorem 10.1"
    ],
)
def quantum_chevalley(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> Terms:
    """The pairing of ``omega_i`` with each coroot that raises the length by 1 or drops it as far as its q allows."""
    return chevalley_terms(X, u.word[0], v)
