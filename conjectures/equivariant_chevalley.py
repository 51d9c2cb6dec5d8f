"""Equivariant quantum Chevalley: a divisor class times any class, equivariantly, on every G/P.

With the notation of ``quantum_chevalley.py``, and coefficients that are polynomials in the simple roots,

    sigma_{s_i} * sigma_u = (omega_i - u omega_i) sigma_u + the terms of the quantum Chevalley formula.

``omega_i - u omega_i`` is a sum of simple roots: each reflection of a reduced word of u, the last letter first, takes a nonnegative
multiple of its simple root off the weight.

Source: L. C. Mihalcea, On equivariant quantum cohomology of homogeneous spaces: Chevalley formulae and algorithms, Duke Math. J.
140 (2007), 321-350; without q: B. Kostant and S. Kumar, The nil Hecke ring and cohomology of G/P, Adv. Math. 62 (1986), 187-237.
"""

from _root_systems import cartan, chevalley_terms

from conjcheck import FlagVariety, HomogeneousSpaces, RootPolynomial, SchubertClass, candidate, simple_roots

__all__ = ["equivariant_chevalley"]


@candidate(
    on=HomogeneousSpaces(most_classes=56),
    ring="equivariant quantum",
    premise=lambda X, u, v: u.length == 1,
    statement=r"\sigma_{s_i} * \sigma_u = (\omega_i - u\omega_i)\, \sigma_u"
    r" + \sum_{\ell(u s_\alpha W_P) = \ell(u) + 1} \langle\omega_i, \alpha^\vee\rangle \sigma_{u s_\alpha}"
    r" + \sum_{\ell(u s_\alpha W_P) = \ell(u) + 1 - n_\alpha} \langle\omega_i, \alpha^\vee\rangle"
    r" q^{d(\alpha)} \sigma_{u s_\alpha}, \quad \alpha \in R^+ \setminus R_P^+",
    references=[
        "L. C. Mihalcea, On equivariant quantum cohomology of homogeneous spaces: Chevalley formulae and algorithms, "
        "Duke Math. J. 140 (2007), 321-350",
        "B. Kostant, S. Kumar, The nil Hecke ring and cohomology of G/P for a Kac-Moody group G, Adv. Math. 62 (1986), 187-237",
    ],
)
def equivariant_chevalley(
    X: FlagVariety, u: SchubertClass, v: SchubertClass
) -> dict[tuple[SchubertClass, tuple[int, ...]], RootPolynomial | int]:
    """The terms without equivariance, and a linear form at v itself."""
    (i,) = u.word
    drop = sum(count * root for count, root in zip(weight_drop(X, i, v), simple_roots(X), strict=True))
    return {(v, (0,) * len(X.marked)): drop, **chevalley_terms(X, i, v)}


def weight_drop(X: FlagVariety, i: int, u: SchubertClass) -> list[int]:
    """``omega_i - u omega_i`` in simple roots."""
    matrix = cartan(X.kind.letter, X.rank)
    weight, drop = [int(j == i) for j in range(1, X.rank + 1)], [0] * X.rank
    for letter in reversed(u.word):
        height = weight[letter - 1]
        weight = [a - height * b for a, b in zip(weight, matrix[letter - 1], strict=True)]
        drop[letter - 1] += height
    return drop
