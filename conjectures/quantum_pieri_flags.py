"""Quantum Pieri on complete flags: a one-column or one-row class times any class.

The quantum Bruhat graph on the permutations of 1..n has the step ``v -> v t_ab`` (swapping *positions* a < b) when the length rises
by 1, and, with weight ``q_a ... q_{b-1}``, when it drops by ``2(b - a) - 1``. On ``Fl(n)`` let u be a Grassmannian permutation with
its only descent at m whose partition is one column of p boxes: the class of ``e_p(x_1..x_m)``, u a cycle. Then

    sigma_u * sigma_v = sum q^d sigma_w

over the pairs ``(w, d)`` that p steps across m (``a <= m < b``) with pairwise distinct a's can reach, each once, however many
chains lead there. For one row of p boxes, the class of ``h_p(x_1..x_m)``, the b's are pairwise distinct instead.

Source: I. Ciocan-Fontanine, On quantum cohomology rings of partial flag varieties, Duke Math. J. 98 (1999), 485-524; classical:
F. Sottile, Pieri's formula for flag manifolds and Schubert polynomials, Ann. Inst. Fourier 46 (1996), 89-110.
"""

from collections.abc import Iterator
from functools import lru_cache

from conjcheck import CompleteFlags, FlagVariety, SchubertClass, candidate

__all__ = ["quantum_pieri_columns", "quantum_pieri_rows"]

Permutation = tuple[int, ...]
Degree = tuple[int, ...]

REFERENCES = [
    "I. Ciocan-Fontanine, On quantum cohomology rings of partial flag varieties, Duke Math. J. 98 (1999), 485-524",
    "F. Sottile, Pieri's formula for flag manifolds and Schubert polynomials, Ann. Inst. Fourier 46 (1996), 89-110",
]


@candidate(
    on=CompleteFlags(),
    premise=lambda X, u, v: len(u.descents) == 1 and max(shape(u)) == 1,
    statement=r"\sigma_{e_p(x_1..x_m)} * \sigma_v = \sum q^d \sigma_w \text{ over the ends of } p \text{ steps } t_{ab},"
    r" a \le m < b, \text{ with distinct } a",
    references=REFERENCES,
)
def quantum_pieri_columns(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, Degree], int]:
    """Coefficient 1 for each end of ``l(u)`` steps with pairwise distinct a's."""
    return {(X.schubert(permutation=w), d): 1 for w, d in ends(v.permutation, u.descents[0], u.length, 0)}


@candidate(
    on=CompleteFlags(),
    premise=lambda X, u, v: len(u.descents) == 1 and len(shape(u)) == 1,
    statement=r"\sigma_{h_p(x_1..x_m)} * \sigma_v = \sum q^d \sigma_w \text{ over the ends of } p \text{ steps } t_{ab},"
    r" a \le m < b, \text{ with distinct } b",
    references=REFERENCES,
)
def quantum_pieri_rows(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[tuple[SchubertClass, Degree], int]:
    """Coefficient 1 for each end of ``l(u)`` steps with pairwise distinct b's."""
    return {(X.schubert(permutation=w), d): 1 for w, d in ends(v.permutation, u.descents[0], u.length, 1)}


def shape(u: SchubertClass) -> tuple[int, ...]:
    """The partition of a permutation with one descent, without zeros."""
    (m,) = u.descents
    return tuple(part for i in range(m, 0, -1) if (part := u.permutation[i - 1] - i))


def ends(v: Permutation, m: int, p: int, distinct: int) -> set[tuple[Permutation, Degree]]:
    """Where p steps across m lead, all their a's (``distinct=0``) or all their b's (``distinct=1``) different."""
    reached = {(v, (0,) * (len(v) - 1), frozenset[int]())}
    for _ in range(p):
        reached = {
            (w, tuple(map(sum, zip(d, step, strict=True))), used | {places[distinct]})
            for old, d, used in reached
            for places, w, step in steps(old, m)
            if places[distinct] not in used
        }
    return {(w, d) for w, d, _ in reached}


@lru_cache(maxsize=65536)
def steps(v: Permutation, m: int) -> list[tuple[tuple[int, int], Permutation, Degree]]:
    """The steps from v across m in the quantum Bruhat graph: 0-based places, end, degree."""
    return list(_steps(v, m))


def _steps(v: Permutation, m: int) -> Iterator[tuple[tuple[int, int], Permutation, Degree]]:
    for a in range(m):
        for b in range(m, len(v)):
            low, high = sorted((v[a], v[b]))
            inside = sum(low < entry < high for entry in v[a + 1 : b])
            if inside == (0 if v[a] < v[b] else b - a - 1):
                degree = tuple(int(v[a] > v[b] and a <= i < b) for i in range(len(v) - 1))
                yield (a, b), (*v[:a], v[b], *v[a + 1 : b], v[a], *v[b + 1 :]), degree
