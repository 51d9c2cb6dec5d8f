"""The relations that the recursion goes by, each held against a Chevalley formula written here on permutations of the roots.

A Weyl group element is the tuple ``k -> place of w(root k)``; nothing but the Cartan matrix is taken from the package, and the
reduced words that name the classes.
"""

from collections import Counter
from functools import cache
from itertools import combinations
from math import gcd

import pytest

from conjcheck import FlagVariety
from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.relations import annihilator, relation

TYPES = ["A4", "B2", "C2", "G2", "B3", "C3", "D4", "F4"]


class Roots:
    """The root system and Weyl group of G/B: all roots, positive ones first, elements as permutations of them."""

    def __init__(self, X):
        matrix, r = cartan_matrix(X.kind), X.rank
        units = [tuple(int(i == j) for j in range(r)) for i in range(r)]
        coroot_of = dict(zip(units, units, strict=True))
        todo = list(units)
        for root in todo:
            coroot = coroot_of[root]
            for j, unit in enumerate(units):
                height = sum(root[i] * matrix[i][j] for i in range(r))  # <root, alpha_j^vee>
                coheight = sum(coroot[i] * matrix[j][i] for i in range(r))  # <alpha_j, root^vee>
                image = tuple(x - height * y for x, y in zip(root, unit, strict=True))
                if image not in coroot_of:
                    coroot_of[image] = tuple(x - coheight * y for x, y in zip(coroot, unit, strict=True))
                    todo.append(image)
        self.roots = sorted(coroot_of, key=lambda root: (min(root) < 0, sum(root), root))
        self.half = len(self.roots) // 2
        self.place = {root: k for k, root in enumerate(self.roots)}
        self.coroots = [coroot_of[root] for root in self.roots]
        self.simple = [self.place[unit] for unit in units]
        self.unit = tuple(range(len(self.roots)))
        self.reflections = [self._reflection(k, matrix) for k in range(self.half)]
        self.elements = [self._from_word(u.word) for u in X.classes]
        self.index = {w: k for k, w in enumerate(self.elements)}

    def _reflection(self, k, matrix):
        """``s_alpha`` for the root in place k: ``beta - <beta, alpha^vee> alpha``."""
        images = []
        for beta in self.roots:
            height = sum(b * c * matrix[i][j] for i, b in enumerate(beta) if b for j, c in enumerate(self.coroots[k]) if c)
            images.append(self.place[tuple(x - height * y for x, y in zip(beta, self.roots[k], strict=True))])
        return tuple(images)

    def _from_word(self, word):
        w = self.unit
        for i in word:
            w = self.times(w, self.reflections[self.simple[i - 1]])
        return w

    @staticmethod
    def times(v, w):
        """The product ``v w``, which acts by w first."""
        return tuple(map(v.__getitem__, w))

    def length(self, w):
        """The number of positive roots that w makes negative."""
        return sum(k >= self.half for k in w[: self.half])

    @cache  # noqa: B019  # a root system lives as long as the tests
    def chevalley(self, u):
        """The terms ``(w, d, coroot)`` of the class u (Fulton, Woodward 2004, Theorem 10.1, on G/B): ``d`` is 0 if l rises by 1,
        ``alpha^vee`` if it falls by ``<2 rho, alpha^vee> - 1``; ``2 <rho, alpha^vee>`` is twice the height of the coroot."""
        found = []
        here = self.length(self.elements[u])
        for k, s in enumerate(self.reflections):
            w = self.times(self.elements[u], s)
            rise, coroot = self.length(w) - here, self.coroots[k]
            if rise == 1:
                found.append((self.index[w], (0,) * len(coroot), coroot))
            elif rise == 1 - 2 * sum(coroot):
                found.append((self.index[w], coroot, coroot))
        return found

    def divisor_times(self, weight, u):
        """``(sum of weight_i sigma_{s_i}) * sigma_u`` as ``{(w, d): coefficient}``, zeros dropped."""
        total = Counter()
        for w, d, coroot in self.chevalley(u):
            total[w, d] += sum(a * b for a, b in zip(weight, coroot, strict=True))
        return {term: count for term, count in total.items() if count}


@cache
def roots_of(name):
    return Roots(FlagVariety(f"{name}/B"))


def product_of_parts(name, how):
    """``sum of L * sigma_z`` of a relation, by the Chevalley formula of this file."""
    total = Counter()
    for weight, z in how.parts:
        for term, count in roots_of(name).divisor_times(weight, z).items():
            total[term] += count
    return {term: count for term, count in total.items() if count}


@pytest.mark.parametrize(
    ("name", "order", "positive"),
    [("A4", 120, 10), ("B2", 8, 4), ("C2", 8, 4), ("G2", 12, 6), ("B3", 48, 9), ("C3", 48, 9), ("D4", 192, 12), ("F4", 1152, 24)],
)
def test_the_group_of_this_file_is_the_weyl_group(name, order, positive):
    """Orders and numbers of positive roots (Bourbaki, plates I-IX); words name distinct elements of the length they have."""
    X, group = FlagVariety(f"{name}/B"), roots_of(name)
    assert len(group.index) == len(X.classes) == order
    assert group.half == X.dim == positive
    assert [group.length(w) for w in group.elements] == [u.length for u in X.classes]


@pytest.mark.parametrize("name", TYPES)
def test_the_terms_of_the_package_are_those_of_this_file(name):
    """Every Chevalley term on G/B, classical and quantum, with its coefficients for all divisors; none is missing, none is there twice."""
    X, group = FlagVariety(f"{name}/B"), roots_of(name)
    for u in range(len(X.classes)):
        assert Counter(chevalley(X).terms(u)) == Counter(group.chevalley(u))


LARGER = [pytest.param(name, marks=pytest.mark.slow) for name in ("A5", "B4", "C4", "B5", "C5", "D5", "D6")]


@pytest.mark.parametrize("name", [*TYPES, *LARGER])
def test_every_class_has_a_relation_that_holds(name):
    """``sum of L * sigma_z = den * sigma_w + others``: every z is one letter shorter, w occurs just ``den`` times with d = 0, and the
    others are shorter than w, or have its length and a relation that never comes back to w.
    """
    X = FlagVariety(f"{name}/B")
    ahead = {}
    for w in X.classes[1:]:
        how = relation(X, w.index)
        assert how.parts
        assert how.den > 0
        assert all(any(weight) and X.classes[z].length == w.length - 1 for weight, z in how.parts)
        total = product_of_parts(name, how)
        assert total.pop((w.index, (0,) * X.rank)) == how.den
        ahead[w.index] = {x for (x, d) in total if not any(d)}
        assert all(X.classes[x].length == w.length for x in ahead[w.index])
        assert all(X.classes[x].length == w.length - 2 * sum(d) for x, d in total)
    settled = set()
    while ahead:
        ready = {w for w, needed in ahead.items() if needed <= settled}
        assert ready, f"relations of {sorted(ahead)} need each other"
        settled |= ready
        ahead = {w: needed for w, needed in ahead.items() if w not in ready}
    assert len(settled) == len(X.classes) - 1


@pytest.mark.parametrize("name", ["A4", "B2", "C2", "G2", "B3", "C3"])
def test_the_relations_alone_rebuild_the_ring(name):
    """At numbers for the q's, modulo a prime, the relations turn divisors into matrices of all classes; column 1 of each is its class,
    and the matrices commute: the ring is consistent, whatever relations were found.
    """
    X, group, p = FlagVariety(f"{name}/B"), roots_of(name), 10**9 + 7
    values = [pow(5, k + 1, p) for k in range(X.rank)]

    def at(d):
        total = 1
        for x, e in zip(values, d, strict=True):
            total = total * pow(x, e, p) % p
        return total

    columns = {0: [{u: 1} for u in range(len(X.classes))]}  # columns[w][u] = sigma_w * sigma_u
    waiting = list(range(1, len(X.classes)))
    while waiting:
        later = []
        for w in waiting:
            how = relation(X, w)
            others = product_of_parts(name, how)
            others.pop((w, (0,) * X.rank))
            if any(x not in columns for x, _ in others) or any(z not in columns for _, z in how.parts):
                later.append(w)
                continue
            inverse, matrix = pow(how.den, -1, p), []
            for u in range(len(X.classes)):
                total = Counter()
                for weight, z in how.parts:
                    for x, count in columns[z][u].items():
                        for (y, d), factor in group.divisor_times(weight, x).items():
                            total[y] += count * factor * at(d)
                for (x, d), factor in others.items():
                    for y, count in columns[x][u].items():
                        total[y] -= factor * at(d) * count
                matrix.append({y: count * inverse % p for y, count in total.items() if count % p})
            columns[w] = matrix
        assert len(later) < len(waiting)
        waiting = later
    for w, u in combinations(range(len(X.classes)), 2):
        assert columns[w][u] == columns[u][w]
    assert all(matrix[0] == {w: 1} for w, matrix in columns.items())


@pytest.mark.parametrize("name", ["A2", "A3", "A4"])
def test_transitions_are_one_subtraction_and_keep_n_in_place(name):
    """Type A: one part, ``den = 1``, and for a permutation that fixes n every class in the relation fixes n (what the symmetric route of
    the recursion relies on).
    """
    X, group = FlagVariety(f"{name}/B"), roots_of(name)
    for w in X.classes[1:]:
        how = relation(X, w.index)
        assert how.den == 1
        ((weight, z),) = how.parts
        assert all(x in (-1, 0, 1) for x in weight)
        if w.permutation[-1] == X.n:
            reached = [z, *(x for x, _ in group.divisor_times(weight, z))]
            assert {X.classes[x].permutation[-1] for x in reached} == {X.n}


@pytest.mark.parametrize("name", ["D4", "F4"])
def test_some_relations_need_several_divisor_products(name):
    """On D4 and F4 the single eliminations end early: the rest comes from the whole level at once, and is not empty."""
    X = FlagVariety(f"{name}/B")
    several = [w for w in X.classes[1:] if len(relation(X, w.index).parts) > 1]
    assert several
    assert len(several) < len(X.classes) // 2


@pytest.mark.parametrize(
    ("vectors", "witness", "spanned"),
    [
        ([], (1, 0), False),
        ([(1, 0)], (0, 1), False),
        ([(1, 1, 0), (0, 1, 1)], (1, 0, 1), False),
        ([(1, 2, 1), (0, 1, 1)], (1, 1, 0), True),
        ([(2, 1), (4, 2)], (1, 0), False),
        ([(2, 1), (4, 2)], (6, 3), True),
        ([(1, 1, 1, 0), (0, 1, 2, 1), (1, 0, 0, 1)], (1, 1, 0, 0), False),
        ([(1, 1, 1, 0), (0, 1, 2, 1), (1, 0, 0, 1)], (2, 2, 3, 2), True),
        ([(0, 0, 3)], (0, 2, 5), False),
    ],
)
def test_annihilators_vanish_where_they_should(vectors, witness, spanned):
    """Zero on the vectors, positive on the witness, without a common divisor; ``None`` just when the witness is in their span."""

    def value(weight, vector):
        return sum(a * b for a, b in zip(weight, vector, strict=True))

    found = annihilator(vectors, witness)
    assert (rank([*vectors, witness]) == rank(vectors)) == spanned == (found is None)
    if found is not None:
        assert all(value(found, vector) == 0 for vector in vectors)
        assert value(found, witness) > 0
        assert gcd(*found) == 1


def rank(vectors):
    """The rank of integer vectors: the size of their largest nonzero minor."""

    def determinant(rows):
        if not rows:
            return 1
        return sum((-1) ** j * rows[0][j] * determinant([row[:j] + row[j + 1 :] for row in rows[1:]]) for j in range(len(rows)))

    for size in range(min(len(vectors), max(map(len, vectors), default=0)), 0, -1):
        for chosen in combinations(vectors, size):
            for places in combinations(range(len(chosen[0])), size):
                if determinant([[row[j] for j in places] for row in chosen]):
                    return size
    return 0
