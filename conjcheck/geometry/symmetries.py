"""The symmetries of the structure constants of G/P: Seidel elements and diagram automorphisms, acting on classes and degrees.

Seidel (law 4): for a cominuscule node i, with ``v_i`` the minimal representative of ``w0`` modulo ``W_{P_i}``,
``sigma_{v_i} * sigma_w = q^{omega_i^vee - w^{-1} omega_i^vee} sigma_{v_i w}``. These classes form a group; in type A it is cyclic
of order n and ``v_i`` lowers every value by i modulo n.

Source: Seidel, Pi_1 of symplectic automorphism groups ..., GAFA 7 (1997); in this form Chaput, Manivel, Perrin, Affine symmetries
of the equivariant quantum cohomology ring of rational homogeneous spaces, Math. Res. Lett. 16 (2009).
"""

from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from time import perf_counter

import numpy as np

from conjcheck.geometry.cartan import automorphisms, cominuscule_nodes
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import Degree, FlagVariety, orbit_of
from conjcheck.geometry.weyl import Ints, dual_indices, orbit, reflected_by_word, weight_drops

__all__ = ["Seidel", "count_orbits", "count_row_orbits", "diagram_images", "orbit_of_case", "seidel"]


@dataclass(frozen=True, eq=False)
class Seidel:
    """The Seidel group of X, elements numbered from 0, the identity.

    Attributes:
        images: ``(G, N)``: index of the class ``g u``.
        shifts: ``(G, N, m)``: the exponent of q in ``S_g * sigma_u = q^shift sigma_{g u}``, one entry per marked node.
        units: ``(G,)``: index of the class ``S_g`` itself, on X.
        table: ``(G, G)``: number of the product of two elements.
    """

    images: Ints
    shifts: Ints
    units: Ints
    table: Ints

    def inverse(self, g: int) -> int:
        """The number of the inverse element."""
        return int(np.flatnonzero(self.table[g] == 0)[0])


@lru_cache(maxsize=64)
def seidel(X: FlagVariety) -> Seidel:
    """The Seidel group acting on the classes of X. Cost: ``O(G N rank^2)`` in numpy."""
    whole, drops = orbit_of(X), weight_drops(X.kind, X.marked)
    marked = [i - 1 for i in X.marked]
    images = [np.arange(len(whole.lengths))]
    shifts = [np.zeros((len(whole.lengths), len(marked)), dtype=np.int64)]
    for i in cominuscule_nodes(X.kind):
        word = orbit(X.kind, (i,)).word(len(orbit(X.kind, (i,)).lengths) - 1)
        images.append(whole.locate(reflected_by_word(X.kind, whole.weights, word)))
        shifts.append(drops[:, marked, i - 1])
    images_of_classes = np.stack(images)
    return Seidel(images_of_classes, np.stack(shifts), images_of_classes[:, 0], _group_table(X))


def _group_table(X: FlagVariety) -> Ints:
    """The multiplication table, from the images of a regular weight (no enumeration of G/B)."""
    words = [()] + [orbit(X.kind, (i,)).word(len(orbit(X.kind, (i,)).lengths) - 1) for i in cominuscule_nodes(X.kind)]
    rho = np.ones((1, X.rank), dtype=np.int64)
    images = [reflected_by_word(X.kind, rho, word) for word in words]
    names = {tuple(image[0].tolist()): g for g, image in enumerate(images)}
    return np.array([[names[tuple(reflected_by_word(X.kind, image, word)[0].tolist())] for image in images] for word in words])


def diagram_images(X: FlagVariety) -> list[tuple[FlagVariety, Ints, tuple[int, ...]]]:
    """For each diagram automorphism that is not the identity: the image of X, the images of the classes, the places of the degrees.

    Entry k of the third part is the place in ``d`` that goes to place k of the image's degree.
    """
    found = []
    whole = orbit_of(X)
    for images in automorphisms(X.kind)[1:]:
        marked = tuple(sorted(images[i - 1] for i in X.marked))
        Y = FlagVariety(X.name) if marked == X.marked else _sibling(X, marked)
        back = [images.index(j) for j in range(1, X.rank + 1)]
        places = tuple(X.marked.index(images.index(j) + 1) for j in marked)
        found.append((Y, orbit_of(Y).locate(whole.weights[:, back]), places))
    return found


def _sibling(X: FlagVariety, marked: tuple[int, ...]) -> FlagVariety:
    return FlagVariety(f"{X.kind}/P{','.join(map(str, marked))}")


Indices = tuple[int, int, int, Degree]
"""A case of one variety: indices of u, v and w, and d."""


def orbit_of_case(case: Case, *, seidel_too: bool = True) -> set[Case]:
    """All cases of the same variety that have the same constant by laws 2, 3 and 4 (S3, diagram automorphisms, Seidel).

    Closed under: permuting the three insertions ``u, v, w^vee``; automorphisms that fix X; Seidel elements on u and v (these mix
    degrees: leave them out with ``seidel_too=False`` to stay inside the classical ring).
    """
    X = case.X
    start = (case.u.index, case.v.index, case.w.index, case.d)
    return {Case(X, X.classes[u], X.classes[v], X.classes[w], d) for u, v, w, d in _orbit(X, start, seidel_too=seidel_too)}


def count_orbits(cases: Iterable[Case], *, seidel_too: bool = True, deadline: float = float("inf")) -> tuple[int, bool]:
    """The number of orbits that cases of one variety lie in, and whether all were sorted before the ``perf_counter()`` deadline."""
    left = {(case.u.index, case.v.index, case.w.index, case.d): case.X for case in cases}
    orbits = 0
    while left:
        if perf_counter() > deadline:
            return orbits + 1, False
        start, X = next(iter(left.items()))
        orbits += 1
        for member in _orbit(X, start, seidel_too=seidel_too):
            left.pop(member, None)
    return orbits, True


def count_row_orbits(
    rows: Iterable[Row], *, seidel_too: bool = True, diagrams_too: bool = True, deadline: float = float("inf")
) -> tuple[int, bool]:
    """The number of orbits that rows of one variety lie in, and whether all were sorted before the ``perf_counter()`` deadline.

    What acts on products: swapping u and v; automorphisms that fix X; Seidel elements on u and on v, which only move the classes and
    shift the degrees of a product. Leave these out with ``seidel_too=False`` in a classical ring, automorphisms with
    ``diagrams_too=False`` where they do not fix the coefficients.
    """
    left = {(row.u.index, row.v.index): row.X for row in rows}
    orbits = 0
    while left:
        if perf_counter() > deadline:
            return orbits + 1, False
        start, X = next(iter(left.items()))
        orbits += 1
        images = [f for Y, f, _ in diagram_images(X) if Y is X] if diagrams_too else []
        moves = list(seidel(X).images[1:]) if seidel_too else []
        todo, seen = [start], {start}
        while todo:
            u, v = todo.pop()
            near = [(v, u), *((int(f[u]), int(f[v])) for f in images), *((int(g[u]), v) for g in moves)]
            fresh = set(near) - seen
            seen |= fresh
            todo.extend(fresh)
        for member in seen:
            left.pop(member, None)
    return orbits, True


def _orbit(X: FlagVariety, start: Indices, *, seidel_too: bool) -> set[Indices]:
    group, dual = seidel(X), dual_indices(X.kind, X.marked)
    homes = [(images, places) for Y, images, places in diagram_images(X) if Y is X]
    todo, seen = [start], {start}
    while todo:
        u, v, w, d = todo.pop()
        near = [(v, u, w, d), (u, int(dual[w]), int(dual[v]), d)]
        near += [(int(f[u]), int(f[v]), int(f[w]), tuple(d[p] for p in places)) for f, places in homes]
        for g in range(1, len(group.units)) if seidel_too else ():
            # S_g (sigma_u sigma_v): the term q^d sigma_w becomes q^(d + shift(w) - shift(u)) sigma_(g w) of sigma_(g u) sigma_v.
            moved = tuple((np.array(d) + group.shifts[g, w] - group.shifts[g, u]).tolist())
            if min(moved) >= 0:
                near.append((int(group.images[g, u]), v, int(group.images[g, w]), moved))
        fresh = [indices for indices in near if indices not in seen]
        seen.update(fresh)
        todo.extend(fresh)
    return seen
