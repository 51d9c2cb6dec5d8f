"""The laws that hold on every flag variety, as checks of the oracle: none of them knows how it computes.

Associativity, commutativity, unit, positivity, degree axiom, S3-symmetry, Poincare duality: general. Seidel and diagram symmetries as in
``conjcheck.geometry.symmetries``. No product of Schubert classes vanishes: Fulton, Woodward, J. Algebraic Geom. 13 (2004), Corollary 9.3
(from memory). Grassmannians: smallest power of q, the same, and Buch, Compositio Math. 137 (2003), Theorem 3; the powers form an
interval, Postnikov, Duke Math. J. 128 (2005); values at q = 1, Bertram, Adv. Math. 128 (1997), here over the complex numbers.
"""

from cmath import exp, pi
from collections.abc import Iterator
from functools import cache, partial
from itertools import combinations
from math import prod

import numpy as np
from numpy.typing import NDArray

from conjcheck.errors import OutOfReach
from conjcheck.geometry.cartan import automorphisms, cominuscule_nodes
from conjcheck.geometry.case import Case, Row, place_in_row
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.geometry.symmetries import diagram_images, seidel
from conjcheck.geometry.weyl import number_of_cosets
from conjcheck.oracle.check import (
    Check,
    Difference,
    Reader,
    RowList,
    TripleList,
    at_row,
    at_two_places,
    compare,
    sum_degrees,
    times,
)
from conjcheck.oracle.engine import RowTerms

__all__ = ["ROUNDING_MARGIN", "laws"]

ROUNDING_MARGIN = 0.01
"""A value in floating point that is further than this from an integer decides nothing."""

_LARGEST_COMPLETE = 2_000
_LAST_STABLE = 6


def laws(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The checks of all laws that apply to X."""
    rows = RowList(X)
    yield Check("unit", "classes", X.classes, partial(_unit, read))
    yield Check("commutativity", "rows", rows, partial(_commutativity, read))
    yield Check("degree axiom, positivity", "rows", rows, partial(_degree_axiom, read))
    yield Check("associativity", "triples", TripleList(X), partial(_associativity, read), weight=2)
    yield Check("S3-symmetry", "rows", rows, partial(_s3, read), weight=2)
    yield Check("Poincare duality", "rows", RowList(X, X.dim), partial(_duality, read))
    if len(automorphisms(X.kind)) > 1:
        yield Check("diagram symmetry", "rows", rows, partial(_diagram, read))
    if cominuscule_nodes(X.kind):
        yield Check("Seidel symmetry", "rows", rows, partial(_seidel, read), weight=2)
    every_node = tuple(range(1, X.rank + 1))
    if X.kind.letter == "A" and X.is_complete and X.n <= _LAST_STABLE:
        larger = FlagVariety(f"A{X.rank + 1}/B")
        yield Check(f"classical limit in {larger}", "rows", rows, partial(_classical, read, larger))
    elif not X.is_complete and number_of_cosets(X.kind, every_node) <= _LARGEST_COMPLETE:
        larger = FlagVariety(f"{X.kind}/B")
        yield Check(f"classical limit in {larger}", "rows", rows, partial(_classical, read, larger))
    if X.is_grassmannian:
        yield Check(f"Vafa-Intriligator in floats +-{ROUNDING_MARGIN}", "rows", rows, partial(_floats, read))
        yield Check("powers of q", "rows", rows, partial(_powers, read))


def _unit(read: Reader, u: SchubertClass) -> Iterator[Difference]:
    X = u.variety
    expected = {(u, (0,) * len(X.marked)): 1}
    for row in (Row(X, X.identity, u), Row(X, u, X.identity)):
        yield from compare(row, ("product", read(row.u, row.v)), ("unit", expected))


def _commutativity(read: Reader, row: Row) -> Iterator[Difference]:
    X, u, v = row.X, row.u, row.v
    here, there = read(u, v), read(v, u)
    pairs = ((Case(X, u, v, w, d), here.get((w, d), 0), Case(X, v, u, w, d), there.get((w, d), 0)) for w, d in {*here, *there})
    yield from at_two_places("commutativity", pairs)


def _degree_axiom(read: Reader, row: Row) -> Iterator[Difference]:
    """Every term is an integer above 0 at a degree that the axiom allows, and there is a term."""
    terms = read(row.u, row.v)
    if not terms:
        yield at_row(row, ("product", 0), ("no product of Schubert classes vanishes", "not 0"))
    for w, d in sorted(terms, key=place_in_row):
        case, count = Case(row.X, row.u, row.v, w, d), terms[w, d]
        if not case.obeys_degree_axiom:
            yield Difference(case, ("product", count), ("degree axiom", 0))
        elif type(count) is not int or count < 1:
            yield Difference(case, ("product", count if type(count) is int else repr(count)), ("positivity", "an int above 0"))


def _associativity(read: Reader, triple: tuple[Row, SchubertClass]) -> Iterator[Difference]:
    row, z = triple
    zero = (0,) * len(row.X.marked)
    left = times(read, read(row.u, row.v), {(z, zero): 1})
    right = times(read, {(row.u, zero): 1}, read(row.v, z))
    yield from compare(row, ("(u * v) * z", left), ("u * (v * z)", right), third=z)


def _s3(read: Reader, row: Row) -> Iterator[Difference]:
    """``N_{u,v}^{w,d} = N_{u,w^vee}^{v^vee,d}`` for every w in the product."""
    X, u, v = row.X, row.u, row.v
    here = read(u, v)
    pairs = []
    for w in {w for w, _ in here}:
        there = read(u, w.dual)
        for d in {d for x, d in here if x is w} | {d for x, d in there if x is v.dual}:
            first, second = Case(X, u, v, w, d), Case(X, u, w.dual, v.dual, d)
            pairs.append((first, here.get((w, d), 0), second, there.get((v.dual, d), 0)))
    yield from at_two_places("S3-symmetry", pairs)


def _duality(read: Reader, row: Row) -> Iterator[Difference]:
    """The coefficient of ``[pt]`` at q = 0 in ``sigma_u * sigma_v``, ``l(u) + l(v) = dim``, is 1 for ``v = u^vee``, else 0."""
    key = row.X.point, (0,) * len(row.X.marked)
    found, expected = read(row.u, row.v).get(key, 0), int(row.v is row.u.dual)
    if found != expected:
        yield Difference(Case(row.X, row.u, row.v, *key), ("product", found), ("Poincare duality", expected))


@cache
def _images(X: FlagVariety) -> list[tuple[FlagVariety, list[int], tuple[int, ...]]]:
    return [(Y, images.tolist(), places) for Y, images, places in diagram_images(X)]


def _diagram(read: Reader, row: Row) -> Iterator[Difference]:
    X, u, v = row.X, row.u, row.v
    here = read(u, v)
    for Y, images, places in _images(X):
        image = Row(Y, Y.classes[images[u.index]], Y.classes[images[v.index]])
        there = read(image.u, image.v)
        moved = {(Y.classes[images[w.index]], tuple(d[p] for p in places)): (w, d) for w, d in here}
        back = [places.index(k) for k in range(len(places))]
        for w, d in there.keys() - moved.keys():
            moved[w, d] = X.classes[images.index(w.index)], tuple(d[p] for p in back)
        yield from at_two_places(
            "diagram symmetry",
            (
                (Case(X, u, v, *key), here.get(key, 0), Case(Y, image.u, image.v, *target), there.get(target, 0))
                for target, key in moved.items()
            ),
        )


def _seidel(read: Reader, row: Row) -> Iterator[Difference]:
    """``S_g * (sigma_u * sigma_v) = q^shift(u) sigma_{gu} * sigma_v`` for all g; with u = e these are the products of ``S_g`` itself."""
    X, u, v = row.X, row.u, row.v
    group, here = seidel(X), read(u, v)
    for g in range(1, len(group.units)):
        start = tuple(group.shifts[g, u.index].tolist())
        gu = X.classes[group.images[g, u.index]]
        there = read(gu, v)
        moved: RowTerms = {}
        for (w, d), count in here.items():
            moved[X.classes[group.images[g, w.index]], sum_degrees(d, tuple(group.shifts[g, w.index].tolist()))] = count
        found = {(w, sum_degrees(d, start)): count for (w, d), count in there.items()}
        back = group.images[group.inverse(g)]
        pairs = []
        for w, d in {*moved, *found}:
            if moved.get((w, d), 0) == found.get((w, d), 0):
                continue
            origin = X.classes[back[w.index]]
            first = tuple(a - b for a, b in zip(d, group.shifts[g, origin.index].tolist(), strict=True))
            second = tuple(a - b for a, b in zip(d, start, strict=True))
            if min(first) < 0 or min(second) < 0:
                case, count = (
                    (Case(X, gu, v, w, second), found[w, d]) if min(first) < 0 else (Case(X, u, v, origin, first), moved[w, d])
                )
                yield Difference(case, ("product", count), ("Seidel symmetry, a negative power of q", 0))
            else:
                here_, there_ = Case(X, u, v, origin, first), Case(X, gu, v, w, second)
                pairs.append((here_, moved.get((w, d), 0), there_, found.get((w, d), 0)))
        yield from at_two_places("Seidel symmetry", pairs)


def _classical(read: Reader, larger: FlagVariety, row: Row) -> Iterator[Difference]:
    """The constants with d = 0 are those of a larger space in which the classes have the same reduced words.

    G/B over G/P, by the pull-back; and ``Fl(n)`` inside ``Fl(n+1)``, among classes that fix n + 1.
    """
    X, zero = row.X, (0,) * len(row.X.marked)
    above = {w: larger.schubert(word=w.word) for w in (row.u, row.v, *X.of_length(row.u.length + row.v.length))}
    there, nothing = read(above[row.u], above[row.v]), (0,) * len(larger.marked)
    expected = {(w, zero): there.get((image, nothing), 0) for w, image in above.items() if w.length == row.u.length + row.v.length}
    found = {(w, d): count for (w, d), count in read(row.u, row.v).items() if d == zero}
    yield from compare(row, ("product", found), (f"classical constant of {larger}", expected))


Complex = NDArray[np.complex128]


@cache
def _schur_values(X: FlagVariety) -> tuple[Complex, Complex]:
    """``s_l(x_J)`` for all classes, J over k-subsets of the n-th roots of ``(-1)^(k-1)``, and the matrix that leads back."""
    k, n = X.marked[0], X.n
    shift = (k - 1) % 2 / 2
    points = np.array([[exp(2j * pi * (t + shift) / n) for t in subset] for subset in combinations(range(n), k)])

    def alternant(exponents: list[int]) -> Complex:
        found: Complex = np.linalg.det(points[:, :, None] ** np.array(exponents)[None, None, :])
        return found

    below = alternant(list(range(k)))
    values = np.array([alternant([x - 1 for x in u.permutation[:k]]) / below for u in X.classes])
    measure = np.array([prod(abs(a - b) ** 2 for a, b in combinations(row, 2)) for row in points]) / n**k
    return values, values.conj() * measure


def _floats(read: Reader, row: Row) -> Iterator[Difference]:
    """At q = 1: ``n^-k sum_J s_l s_m conj(s_r) prod |x_i - x_j|^2``, a reference in floating point, rounded to the nearest integer.

    Raises:
        OutOfReach: a value is further than ``ROUNDING_MARGIN`` from an integer.
    """
    X, total = row.X, row.u.length + row.v.length
    values, back = _schur_values(X)
    numbers = back @ (values[row.u.index] * values[row.v.index])
    rounded = np.rint(numbers.real)
    if np.abs(numbers - rounded).max() > ROUNDING_MARGIN:
        raise OutOfReach(f"expected values within {ROUNDING_MARGIN} of integers, got {row} outside")
    found: RowTerms = {}
    for w in X.classes:
        d, rest = divmod(total - w.length, X.n)
        if rounded[w.index] and (rest or d < 0):
            yield at_row(row, (f"floating point at {w!r}", int(rounded[w.index])), ("degree axiom", 0))
        elif rounded[w.index]:
            found[w, (d,)] = int(rounded[w.index])
    yield from compare(row, ("product", read(row.u, row.v)), ("Vafa-Intriligator in floats", found))


def _powers(read: Reader, row: Row) -> Iterator[Difference]:
    """Which powers of q occur in a product on ``Gr(k,n)``.

    The smallest is the least d such that the first partition without its first d rows and columns lies inside the dual of the
    second; the powers form an interval; there is no q if the rows, or the columns, fit (Buch 2003, Lemma 3).
    """
    X, k, terms = row.X, row.X.marked[0], read(row.u, row.v)
    if not terms:
        yield at_row(row, ("product", 0), ("no product of Schubert classes vanishes", "not 0"))
        return
    lam, inside = ((*shape, *[0] * k)[:k] for shape in (row.u.partition, row.v.dual.partition))
    least = next(d for d in range(k + 1) if all(max(a - d, 0) <= b for a, b in zip((*lam[d:], *[0] * d), inside, strict=True)))
    powers = sorted({d for _, (d,) in terms})
    rows, columns = (
        sum(sizes) for sizes in zip(*((len(u.partition), max(u.partition, default=0)) for u in (row.u, row.v)), strict=True)
    )
    expected = [0] if rows <= k or columns <= X.n - k else list(range(least, least + len(powers)))
    if powers != expected:
        case = Case(X, row.u, row.v, *min(terms, key=place_in_row))
        hows = ("powers of q in the product", "smallest power by Fulton-Woodward, no gaps")
        yield Difference(case, (hows[0], str(powers)), (hows[1], str(expected)))
