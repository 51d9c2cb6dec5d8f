"""Slow definitions in every Lie type, from Cartan matrices written out here: no rule and no part of the oracle is used."""

from functools import cache
from math import factorial, prod
from typing import Any

from conjcheck import FlagVariety, SchubertClass

Tuple = tuple[int, ...]

CARTAN = {
    "A1": "2",
    "A2": "2 -1 / -1 2",
    "A3": "2 -1 0 / -1 2 -1 / 0 -1 2",
    "A4": "2 -1 0 0 / -1 2 -1 0 / 0 -1 2 -1 / 0 0 -1 2",
    "A5": "2 -1 0 0 0 / -1 2 -1 0 0 / 0 -1 2 -1 0 / 0 0 -1 2 -1 / 0 0 0 -1 2",
    "B2": "2 -2 / -1 2",
    "B3": "2 -1 0 / -1 2 -2 / 0 -1 2",
    "C2": "2 -1 / -2 2",
    "C3": "2 -1 0 / -1 2 -1 / 0 -2 2",
    "D4": "2 -1 0 0 / -1 2 -1 -1 / 0 -1 2 0 / 0 -1 0 2",
    "E6": "2 0 -1 0 0 0 / 0 2 0 -1 0 0 / -1 0 2 -1 0 0 / 0 -1 -1 2 -1 0 / 0 0 0 -1 2 -1 / 0 0 0 0 -1 2",
    "F4": "2 -1 0 0 / -1 2 -2 0 / 0 -1 2 -1 / 0 0 -1 2",
    "G2": "2 -1 / -3 2",
}
"""``C[i][j] = <alpha_i, alpha_j^vee>``: Bourbaki, Groupes et algebres de Lie, ch. 4-6 (1968), plates I-IX."""


@cache
def matrix_of(kind: str) -> tuple[Tuple, ...]:
    """The Cartan matrix of a type; row i is ``alpha_i`` in fundamental weights."""
    return tuple(tuple(map(int, row.split())) for row in CARTAN[kind].split("/"))


@cache
def roots_and_coroots(kind: str) -> tuple[tuple[Tuple, Tuple], ...]:
    """The positive roots with their coroots, both as images of simple ones under the same reflections."""
    matrix = matrix_of(kind)
    rank = len(matrix)
    units = [tuple(int(i == j) for j in range(rank)) for i in range(rank)]
    todo = [(unit, unit) for unit in units]
    for root, coroot in todo:
        for j in range(rank):
            down = sum(root[i] * matrix[i][j] for i in range(rank))
            codown = sum(coroot[i] * matrix[j][i] for i in range(rank))
            image = tuple(a - down * e for a, e in zip(root, units[j], strict=True))
            coimage = tuple(a - codown * e for a, e in zip(coroot, units[j], strict=True))
            if min(image) >= 0 and (image, coimage) not in todo:
                todo.append((image, coimage))
    return tuple(todo)


def act(kind: str, word: Tuple, weight: Tuple) -> Tuple:
    """``s_{i1} ... s_{il}`` on a weight, in fundamental weights."""
    for i in reversed(word):
        weight = tuple(a - weight[i - 1] * b for a, b in zip(weight, matrix_of(kind)[i - 1], strict=True))
    return weight


def top_weight(X: FlagVariety) -> Tuple:
    """The sum of the marked fundamental weights; its stabiliser is the Weyl group of the Levi."""
    return tuple(int(i in X.marked) for i in range(1, X.rank + 1))


@cache
def classes_by_weight(X: FlagVariety) -> dict[Tuple, SchubertClass]:
    """The classes by the image of the top weight."""
    return {act(str(X.kind), u.word, top_weight(X)): u for u in X.classes}


def chevalley(X: FlagVariety, i: int, u: SchubertClass) -> dict[tuple[SchubertClass, Tuple], int]:
    """Fulton and Woodward's formula on weights: ``u s_alpha lambda = u lambda - <lambda, alpha^vee> u(alpha)``."""
    kind, found = str(X.kind), {}
    matrix, classes = matrix_of(kind), classes_by_weight(X)
    start = act(kind, u.word, top_weight(X))
    for root, coroot in roots_and_coroots(kind):
        d = tuple(coroot[j - 1] for j in X.marked)
        if coroot[i - 1]:
            image = act(kind, u.word, tuple(sum(a * row[j] for a, row in zip(root, matrix, strict=True)) for j in range(X.rank)))
            end = classes[tuple(a - sum(d) * b for a, b in zip(start, image, strict=True))]
            cost = sum(a * b for a, b in zip(d, X.q_degrees, strict=True))
            if end.length in (u.length + 1, u.length + 1 - cost):
                found[end, d if end.length <= u.length else (0,) * len(d)] = coroot[i - 1]
    return found


def degree(X: FlagVariety, weight: Tuple) -> int:
    """``N! prod <weight, alpha^vee> / <rho, alpha^vee>`` over the roots outside the Levi (Borel and Hirzebruch)."""
    coroots = [coroot for root, coroot in roots_and_coroots(str(X.kind)) if any(root[i - 1] for i in X.marked)]
    above = prod(sum(a * c for a, c in zip(weight, coroot, strict=True)) for coroot in coroots)
    return factorial(len(coroots)) * above // prod(map(sum, coroots))


# -- fixed points, at integer values of the simple roots ---------------------------------------------------------------


def value(polynomial: Any, values: Tuple) -> int:
    """A polynomial in the simple roots, or an integer, at integers."""
    if isinstance(polynomial, int):
        return polynomial
    return sum(c * prod(a**x for a, x in zip(values, e, strict=True)) for e, c in polynomial.terms)


def localise(X: FlagVariety, x: SchubertClass, values: Tuple) -> dict[SchubertClass, int]:
    """All ``sigma_u`` at the fixed point x: sums over the reduced subwords for u of a reduced word of x.

    A subword with letters at the places j gives the product of the roots ``s_{i1} ... s_{i(j-1)} alpha_{ij}``: S. Billey, Kostant
    polynomials and the cohomology ring for G/B, Duke Math. J. 96 (1999).
    """
    matrix, word = matrix_of(str(X.kind)), x.word
    found = {top_weight(X): 1}
    for place in range(len(word), 0, -1):
        i = word[place - 1]
        root = [int(j == i) for j in range(1, X.rank + 1)]
        for k in reversed(word[: place - 1]):
            root[k - 1] -= sum(a * row[k - 1] for a, row in zip(root, matrix, strict=True))
        factor = sum(a * b for a, b in zip(root, values, strict=True))
        for weight, number in list(found.items()):
            if weight[i - 1] > 0:
                longer = act(str(X.kind), (i,), weight)
                found[longer] = found.get(longer, 0) + number * factor
    classes = classes_by_weight(X)
    return {classes[weight]: number for weight, number in found.items()}


@cache
def fixed_points(X: FlagVariety, values: Tuple) -> dict[SchubertClass, dict[SchubertClass, int]]:
    """``{x: {u: sigma_u at x}}``."""
    return {x: localise(X, x, values) for x in X.classes}


def classical_product(X: FlagVariety, u: SchubertClass, v: SchubertClass, values: Tuple) -> dict[SchubertClass, int]:
    """The equivariant product without q, its coefficients at integers, from its values at the fixed points."""
    points: dict[SchubertClass, int] = {}
    for x, local in fixed_points(X, values).items():  # by length: sigma_w is 0 at x unless w is below x
        rest = local.get(u, 0) * local.get(v, 0) - sum(c * local.get(w, 0) for w, c in points.items())
        assert rest % local[x] == 0
        if rest:
            points[x] = rest // local[x]
    return points
