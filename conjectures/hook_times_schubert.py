"""Hook times Schubert: a class of hook shape times any class in the classical ring of complete flags.

On ``Fl(n)`` let u be a Grassmannian permutation, its only descent at k, its partition the hook ``(p, 1, ..., 1)`` with r ones
and p >= 1. The k-Bruhat order has the steps ``v -> v t_ab`` (swapping *positions* a <= k < b) that raise the length by 1; the label
of a step is the smaller of the two values swapped. Then ``c_{u,v}^w`` is the number of chains of such steps from v to w with

    l_1 < l_2 < ... < l_p > l_{p+1} > ... > l_{p+r}.

Source: F. Sottile, Pieri's formula for flag manifolds and Schubert polynomials, Ann. Inst. Fourier 46 (1996), 89-110.
"""

from functools import lru_cache

from conjcheck import CompleteFlags, FlagVariety, SchubertClass, candidate

__all__ = ["hook_times_schubert"]

Permutation = tuple[int, ...]
Chain = tuple[Permutation, ...]


def is_hook(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> bool:
    """Whether u has one descent and the shape of a hook."""
    return len(u.descents) == 1 and sum(part > 1 for part in shape(u)) <= 1


@candidate(
    on=CompleteFlags(),
    ring="classical",
    premise=is_hook,
    statement=r"c_{u,v}^{w} = \#\{v \lessdot_k \dots \lessdot_k w :"
    r" l_1 < \dots < l_p > l_{p+1} > \dots > l_{p+r}\}, \quad u = (p, 1^r) \text{ at descent } k",
    references=["F. Sottile, Pieri's formula for flag manifolds and Schubert polynomials, Ann. Inst. Fourier 46 (1996), 89-110"],
)
def hook_times_schubert(X: FlagVariety, u: SchubertClass, v: SchubertClass, w: SchubertClass) -> tuple[Chain, ...]:
    """The chains from v to w, each as the tuple of its permutations."""
    arm, *leg = shape(u)
    return chains(v.permutation, u.descents[0], arm, len(leg)).get(w.permutation, ())


def shape(u: SchubertClass) -> tuple[int, ...]:
    """The partition of a permutation with one descent, without zeros."""
    (k,) = u.descents
    return tuple(part for i in range(k, 0, -1) if (part := u.permutation[i - 1] - i))


@lru_cache(maxsize=4096)
def chains(v: Permutation, k: int, p: int, r: int) -> dict[Permutation, tuple[Chain, ...]]:
    """All chains from v whose labels rise p - 1 times and then fall r times, by their ends."""
    found: list[tuple[Chain, int]] = [((v,), 0)]
    for place in range(p + r):
        found = [
            ((*chain, end), label)
            for chain, before in found
            for end, label in steps(chain[-1], k)
            if (before < label if place < p else before > label)
        ]
    ends: dict[Permutation, tuple[Chain, ...]] = {}
    for chain, _ in found:
        ends[chain[-1]] = (*ends.get(chain[-1], ()), chain)
    return ends


@lru_cache(maxsize=65536)
def steps(v: Permutation, k: int) -> list[tuple[Permutation, int]]:
    """The steps up from v in the k-Bruhat order, with their labels."""
    return [
        ((*v[:a], v[b], *v[a + 1 : b], v[a], *v[b + 1 :]), v[a])
        for a in range(k)
        for b in range(k, len(v))
        if v[a] < v[b] and not any(v[a] < entry < v[b] for entry in v[a + 1 : b])
    ]
