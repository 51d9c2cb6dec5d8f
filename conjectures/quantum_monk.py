"""Quantum Monk: a divisor class times any class on complete flags.

With ``u = s_r`` and ``t_ab`` swapping *positions* a < b (1-based), on ``Fl(n)``

    sigma_{s_r} * sigma_v = sum sigma_{v t_ab} + sum q_a q_{a+1} ... q_{b-1} sigma_{v t_ab},    both over a <= r < b,

the first over the swaps that raise the length by 1, the second over those that lower it by ``2(b - a) - 1``: the largest drop
possible. A swap raises by 1 when ``v(a) < v(b)`` and no entry between the places lies between in value; it drops the most when
``v(a) > v(b)`` and every entry between the places does.

Source: S. Fomin, S. Gelfand and A. Postnikov, Quantum Schubert polynomials, J. Amer. Math. Soc. 10 (1997), 565-596.
"""

from conjcheck import CompleteFlags, FlagVariety, SchubertClass, candidate

__all__ = ["quantum_monk"]


@candidate(
    on=CompleteFlags(),
    premise=lambda X, u, v: u.length == 1,
    statement=r"\sigma_{s_r} * \sigma_v = \sum_{\ell(vt_{ab}) = \ell(v) + 1} \sigma_{vt_{ab}}"
    r" + \sum_{\ell(vt_{ab}) = \ell(v) + 1 - 2(b - a)} q_a \cdots q_{b-1}\, \sigma_{vt_{ab}}, \quad a \le r < b",
    references=["S. Fomin, S. Gelfand, A. Postnikov, Quantum Schubert polynomials, J. Amer. Math. Soc. 10 (1997), 565-596"],
)
def quantum_monk(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, tuple[int, ...]], int]:
    """Coefficient 1 for each swap across r that raises the length by 1 or drops it the most."""
    (r,) = u.descents
    word = v.permutation
    found = {}
    for a in range(r):  # 0-based places from here on
        for b in range(r, X.n):
            low, high = sorted((word[a], word[b]))
            inside = sum(low < entry < high for entry in word[a + 1 : b])
            if inside == (0 if word[a] < word[b] else b - a - 1):
                swapped = (*word[:a], word[b], *word[a + 1 : b], word[a], *word[b + 1 :])
                degree = tuple(int(word[a] > word[b] and a <= i < b) for i in range(X.n - 1))
                found[X.schubert(permutation=swapped), degree] = 1
    return found
