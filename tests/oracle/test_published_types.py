"""Printed values outside type A, each asked of every engine that covers the space. Each value has its source beside it.

KT = Kresch, Tamvakis, Quantum cohomology of the Lagrangian Grassmannian, J. Alg. Geom. 12 (2003) 777-810; ... of orthogonal
Grassmannians, Compositio Math. 140 (2004) 482-500. CMP = Chaput, Manivel, Perrin, Quantum cohomology of minuscule homogeneous spaces,
Transform. Groups 13 (2008) 47-89. "seen" means read in the source, "from memory" stated there as far as known, "computed" agreed on by
independent programs without a published source, "standard" in every text book.

``LG(n, 2n) = Cn/Pn`` and ``OG(n, 2n+1) = Bn/Pn``: classes are strict partitions with parts up to n. The part k is the word ``s_{n-k+1} ...
s_n``, the words of the parts follow each other from the smallest part to the largest.
"""

import random
import re
from collections import Counter
from itertools import combinations, pairwise
from math import factorial

import pytest

from conjcheck import FlagVariety, constant, product
from conjcheck.oracle import engines_for

# Q^3 = LG(2,4): KT, from memory.
Q_3 = """
s1 * s1 = 2 s2
s1 * s2 = s21 + q
s1 * s21 = q s1
s2 * s2 = q s1
s2 * s21 = q s2
s21 * s21 = q^2
"""
# Computed.
LG_3_6 = """
s1 * s3 = s31 + q
s2 * s2 = 2 s31 + q
s2 * s31 = s321 + 2 q s2
s3 * s3 = q s2
s21 * s21 = 2 q s2
s31 * s31 = 2 q s31 + q^2
s321 * s321 = q^3
"""
# Computed.
OG_3_7 = """
s2 * s2 = 2 s31
s3 * s3 = q
s21 * s21 = q
s32 * s32 = 2 q s31
s321 * s321 = q^2
"""
# Sp4/B = C2/B, alpha_1 short, classes by reduced words: computed.
SP_4 = """
w1 * w1 = w21 + q1
w2 * w2 = 2 w12 + q2
w1 * w121 = q1 w12 + q1 q2
w21 * w21 = 2 q1 w12 + q1 q2
w1212 * w1212 = q1 q2^2 w21 + q1^2 q2^2
"""
# The same on SO5/B = B2/B, where alpha_2 is short: nodes exchanged.
SO_5 = re.sub(r"(?<=[wq])[12]+", lambda found: found[0].translate(str.maketrans("12", "21")), SP_4)
# G2/B, alpha_1 short: computed.
G_2 = """
w1 * w1 = w21 + q1
w2 * w2 = 3 w12 + q2
w1 * w121 = w2121 + q1 w12 + q1 q2
w2 * w121 = w1212 + 2 w2121 + q1 q2
w1 * w21212 = w212121 + q1 q2^2
w2 * w21212 = q2 w2121 + 2 q1 q2^2
"""
PRINTED = {"C2/P2": Q_3, "C3/P3": LG_3_6, "B3/P3": OG_3_7, "C2/B": SP_4, "B2/B": SO_5, "G2/B": G_2}


def asked(names):
    """Pairs (engine, name): every engine that covers the space."""
    return [(engine.name, name) for name in names for engine in engines_for(FlagVariety(name))]


def ranked(letter, ranks):
    """Triples (engine, variety ``Ln/Pn``, n)."""
    return [(engine, FlagVariety(f"{letter}{n}/P{n}"), n) for n in ranks for engine, _ in asked([f"{letter}{n}/P{n}"])]


def strict(X, parts):
    """The class of a strict partition on ``Bn/Pn`` or ``Cn/Pn``."""
    return X.schubert(word=[i for k in sorted(parts) for i in range(X.rank - k + 1, X.rank + 1)])


def strict_partitions(n):
    """All strict partitions with parts up to n."""
    return [tuple(sorted(parts, reverse=True)) for size in range(n + 1) for parts in combinations(range(1, n + 1), size)]


def read_class(X, name):
    """``s31`` is a strict partition, ``w121`` a reduced word."""
    digits = tuple(map(int, name[1:]))
    return X.schubert(word=digits) if name[0] == "w" else strict(X, digits)


def read(X, text):
    """``2 q1 w12 + q1 q2^2`` as ``{(w, d): N}``; without a class the unit."""
    total = Counter()
    for term in text.split(" + "):
        count, d, w = 1, [0] * len(X.marked), X.identity
        for factor in term.split():
            if factor.isdigit():
                count = int(factor)
            elif factor[0] == "q":
                node, power = re.fullmatch(r"q(\d*)(?:\^(\d+))?", factor).groups()
                d[X.marked.index(int(node)) if node else 0] += int(power or 1)
            else:
                w = read_class(X, factor)
        total[w, tuple(d)] += count
    return dict(total)


def combine(*terms):
    """The sum of multiples of elements, zeros dropped."""
    total = Counter()
    for factor, element in terms:
        for key, count in element.items():
            total[key] += factor * count
    return {key: count for key, count in total.items() if count}


def times(engine, element, v):
    """An element ``{(w, d): c}`` times a class."""
    total = Counter()
    for (u, d), a in element.items():
        for (w, e), b in product(u, v, engine=engine).items():
            total[w, tuple(map(sum, zip(d, e, strict=True)))] += a * b
    return {key: count for key, count in total.items() if count}


def monomial(engine, X, *factors):
    """The product of classes, one after the other."""
    element = {(X.identity, (0,) * len(X.marked)): 1}
    for v in factors:
        element = times(engine, element, v)
    return element


def test_which_engines_are_asked():
    """Every value below is asked of the recursion and of localisation; on E6, E7, E8 and from B6 on only the latter reaches."""
    small = [*PRINTED, "C5/P5", "B5/P5", "D5/P5", "F4/P1", "G2/P2", "B3/B", "C3/B"]
    assert sorted(asked(small)) == sorted((engine, name) for name in small for engine in ("recursion", "localisation"))
    assert {engine for engine, _ in asked(["A3/B"])} >= {"recursion", "localisation"}
    assert {engine for engine, _ in asked(["E6/P1", "E7/P7", "E8/P8", "B8/P8"])} >= {"localisation"}


@pytest.mark.parametrize(("engine", "name"), asked(PRINTED))
def test_printed_products(engine, name):
    """Each printed product holds as a whole, in both orders of the factors."""
    X = FlagVariety(name)
    lines = PRINTED[name].strip().splitlines()
    assert len(lines) >= 5
    for line in lines:
        left, right = line.split(" = ")
        u, v = (read_class(X, factor) for factor in left.split(" * "))
        assert product(u, v, engine=engine) == product(v, u, engine=engine) == read(X, right), line


@pytest.mark.parametrize(("engine", "X", "n"), [*ranked("C", [2, 3, 4]), *ranked("B", [2, 3, 4])], ids=str)
def test_strict_partitions_are_the_classes(engine, X, n):
    """The words name all classes, ``|lambda|`` is the length, and the complement is the Poincare dual (KT, from memory): the engine finds
    the point in the product of the two and nowhere else.
    """
    shapes = strict_partitions(n)
    assert len({strict(X, lam) for lam in shapes}) == len(X.classes) == 2**n
    for lam in shapes:
        assert strict(X, lam).length == sum(lam)
        for mu in shapes:
            if sum(lam) + sum(mu) == X.dim:
                dual = set(lam) | set(mu) == set(range(1, n + 1))
                assert constant(strict(X, lam), strict(X, mu), X.point, engine=engine) == dual


def special(n, k):
    """The part k as a partition: ``None`` where the class is 0."""
    return (k,) if 1 <= k <= n else () if k == 0 else None


@pytest.mark.parametrize(("engine", "X", "n"), ranked("C", [2, 3, 4, 5, 6]), ids=str)
def test_relations_of_lagrangian_grassmannians(engine, X, n):
    """``s_i^2 + 2 sum_{k>=1} (-1)^k s_{i+k} s_{i-k} = (-1)^(n-i) q s_{2i-n-1}`` (KT, from memory)."""

    def row(lam, mu):
        return product(strict(X, lam), strict(X, mu), engine=engine)

    for i in range(1, n + 1):
        left = combine(
            (1, row((i,), (i,))),
            *[(2 * (-1) ** k, row((i + k,), special(n, i - k))) for k in range(1, i + 1) if i + k <= n],
        )
        right = special(n, 2 * i - n - 1)
        assert left == ({} if right is None else {(strict(X, right), (1,)): (-1) ** (n - i)}), i


@pytest.mark.parametrize(("engine", "X", "n"), ranked("B", [2, 3, 4, 5, 6]), ids=str)
def test_relations_of_orthogonal_grassmannians(engine, X, n):
    """``t_i^2 + 2 sum_{k=1}^{i-1} (-1)^k t_{i+k} t_{i-k} + (-1)^i t_{2i} = 0`` for i < n, and ``t_n^2 = q`` (KT, from memory)."""

    def row(lam, mu):
        return product(strict(X, lam), strict(X, mu), engine=engine)

    for i in range(1, n):
        terms = [(1, row((i,), (i,)))]
        terms += [(2 * (-1) ** k, row((i + k,), (i - k,))) for k in range(1, i) if i + k <= n]
        if 2 * i <= n:
            terms.append(((-1) ** i, {(strict(X, (2 * i,)), (0,)): 1}))
        assert combine(*terms) == {}, i
    assert row((n,), (n,)) == {(X.identity, (1,)): 1}


def strip(big, small):
    """The rows ``(from, to)`` of ``big/small`` in order if it is a horizontal strip, else ``None``; columns count unshifted, from 1."""
    rows = max(len(big), len(small)) + 1
    big, small = (*big, *[0] * (rows - len(big))), (*small, *[0] * (rows - len(small)))
    if all(a >= b for a, b in zip(big, small, strict=True)) and all(b >= a for b, a in zip(small, big[1:], strict=False)):
        return [(b + 1, a) for a, b in zip(big, small, strict=True)]
    return None


def components(rows):
    """How many components a horizontal strip has, and how many of them reach column 1. Boxes that touch at a corner are connected, so
    only neighbouring rows can touch, where the lower one ends just left of the upper one.
    """
    filled = [low <= high for low, high in rows]
    joints = sum(filled[i] and filled[i + 1] and below[1] + 1 == above[0] for i, (above, below) in enumerate(pairwise(rows)))
    return sum(filled) - joints, sum(low == 1 for (low, _), full in zip(rows, filled, strict=True) if full)


def pieri_lagrangian(n, k, lam):
    """KT, from memory: ``s_k s_l = sum 2^N s_mu + q sum 2^N' s_nu``, ``mu/l`` a horizontal strip of size k, N its components that miss
    column 1; ``l/nu`` a horizontal strip with ``|nu| = |l| + k - n - 1``, N' its components minus 1.
    """
    expected = {}
    for mu in strict_partitions(n):
        if sum(mu) == sum(lam) + k and (rows := strip(mu, lam)) is not None:
            count, touching = components(rows)
            expected[mu, 0] = 2 ** (count - touching)
        if sum(mu) == sum(lam) + k - n - 1 and (rows := strip(lam, mu)) is not None:
            expected[mu, 1] = 2 ** (components(rows)[0] - 1)
    return expected


def pieri_orthogonal(n, k, lam):
    """KT, from memory: ``t_k t_l = sum 2^(c-1) t_mu + q sum 2^(c-1) t_{nu minus (n, n)}``, ``mu/l`` and ``nu/l`` horizontal strips of size
    k with c components, ``nu = (n, n, ...)`` and strict after that.
    """
    expected = {}
    for mu in strict_partitions(n):
        for whole, d in ((mu, 0), ((n, n, *mu), 1)):
            if sum(whole) == sum(lam) + k and (rows := strip(whole, lam)) is not None:
                expected[mu, d] = 2 ** (components(rows)[0] - 1)
    return expected


PIERI = [
    pytest.param(*triple, formula, marks=[pytest.mark.slow] if triple[2] > 4 else [], id=f"{triple[0]}-{triple[1].kind}")
    for letter, formula in (("C", pieri_lagrangian), ("B", pieri_orthogonal))
    for triple in ranked(letter, [2, 3, 4, 5])
]


@pytest.mark.parametrize(("engine", "X", "n", "formula"), PIERI)
def test_quantum_pieri(engine, X, n, formula):
    """Every product by a special class is the one that the formula says, and the formula gives quantum terms as well as powers of 2."""
    seen = Counter()
    for k in range(1, n + 1):
        for lam in strict_partitions(n):
            expected = {(strict(X, mu), (d,)): count for (mu, d), count in formula(n, k, lam).items()}
            assert product(strict(X, (k,)), strict(X, lam), engine=engine) == expected, (k, lam)
            seen.update(("quantum" if any(d) else "classical", count > 1) for (_, d), count in expected.items())
    assert seen["quantum", False] > 0
    assert seen["classical", True] > 0 or n == 2
    assert seen["quantum", True] > 0 or n < 4


OG_DEGREES = [1, 1, 2, 12, 286, 33592, 23178480, 108995910720]
"""OG(n, 2n+1) in its half-spin embedding, n = 1..8 (OEIS A003121, seen). n = 1 is a conic, P^1 in its own right: B1 is no type here."""


def degree(engine, X):
    """``D^dim``, D the sum of the divisors, as a multiple of the class of a point, d = 0 throughout."""
    none = (0,) * len(X.marked)
    level = Counter({X.identity: 1})
    for _ in range(X.dim):
        above = Counter()
        for w, count in level.items():
            for divisor in X.of_length(1):
                for (x, d), factor in product(divisor, w, engine=engine).items():
                    above[x] += count * factor * (d == none)
        level = +above
    assert set(level) == {X.point}
    return level[X.point]


@pytest.mark.parametrize(
    ("engine", "X", "n"),
    [pytest.param(*triple, marks=[pytest.mark.slow] if triple[2] == 8 else []) for triple in ranked("B", range(2, 9))],
    ids=str,
)
def test_degrees_of_orthogonal_grassmannians(engine, X, n):
    """1, 2, 12, 286, 33592, 23178480, 108995910720 for n = 2..8 (OEIS A003121, seen)."""
    assert degree(engine, X) == OG_DEGREES[n - 1]


COMPLETE = [
    pytest.param(engine, name, marks=[pytest.mark.slow] if engine == "localisation" and name in {"B3/B", "C3/B"} else [])
    for engine, name in asked(["A1/B", "A2/B", "A3/B", "B2/B", "C2/B", "G2/B", "B3/B", "C3/B"])
]


@pytest.mark.parametrize(("engine", "name"), COMPLETE)
def test_anticanonical_degrees_of_complete_flags(engine, name):
    """``(2 D)^N = 2^N N!`` on G/B of dimension N (Weyl): A2 48, A3 46080, B2 384, G2 46080, B3 and C3 185794560."""
    X = FlagVariety(name)
    printed = {"A1": 2, "A2": 48, "A3": 46080, "B2": 384, "C2": 384, "G2": 46080, "B3": 185794560, "C3": 185794560}
    assert 2**X.dim * degree(engine, X) == printed[str(X.kind)] == 2**X.dim * factorial(X.dim)


@pytest.mark.parametrize(("engine", "name"), asked(["E6/P1"]))
def test_relations_of_the_cayley_plane(engine, name):
    """``3 h s^2 - 6 h^5 s + 2 h^9 = 0`` and ``s^3 - 12 h^8 s + 5 h^12 = q`` on E6/P1, s = sigma_{2431} (CMP Theorem, from memory)."""
    X = FlagVariety(name)
    h, s = X.classes[1], X.schubert(word=(2, 4, 3, 1))

    def power(a, b):
        return monomial(engine, X, *[h] * a, *[s] * b)

    assert combine((3, power(1, 2)), (-6, power(5, 1)), (2, power(9, 0))) == {}
    assert combine((1, power(0, 3)), (-12, power(8, 1)), (5, power(12, 0))) == {(X.identity, (1,)): 1}


# Numbers of classes and index c_1 (standard).
SPACES = {
    "E6/P1": (27, 12),
    "E7/P7": (56, 18),
    "E6/P2": (72, 11),
    "E7/P1": (126, 17),
    "E8/P8": (240, 29),
    "F4/P1": (24, 8),
    "F4/P4": (24, 11),
    "G2/P1": (6, 5),
    "G2/P2": (6, 3),
    **{f"C{n}/P{n}": (2**n, n + 1) for n in (2, 3, 4, 5)},
    **{f"B{n}/P{n}": (2**n, 2 * n) for n in (2, 3, 4, 5)},
    **{f"B{n}/P1": (2 * n, 2 * n - 1) for n in (2, 3, 4, 5)},
    **{f"D{n}/P1": (2 * n, 2 * n - 2) for n in (4, 5, 6)},
    **{f"C{n}/P2": (2 * n * (n - 1), 2 * n - 1) for n in (3, 4, 5)},
}
"""Name: classes, index. LG(n,2n) n + 1, OG(n,2n+1) 2n, quadrics Q^n n, IG(2,2n) 2n - 1."""


@pytest.mark.parametrize(("engine", "name"), asked(SPACES))
def test_number_of_classes_and_index(engine, name):
    """The engine finds q * 1 in the product of the divisor with a class of length ``c_1 - 1``, and with no class of another length."""
    X = FlagVariety(name)
    count, index = SPACES[name]
    assert (len(X.classes), X.q_degrees) == (count, (index,))
    (h,) = X.of_length(1)
    found = [u.length for length in (index - 2, index - 1, index) for u in X.of_length(length) if unit_in(engine, h, u)]
    assert found == [index - 1]


def unit_in(engine, h, u):
    """Whether the product has a term ``q^d * 1`` with d > 0."""
    return any(w is u.variety.identity and any(d) for w, d in product(h, u, engine=engine))


@pytest.mark.parametrize(
    ("engine", "name"), asked(f"{kind}/P1" for kind in ("B2", "B3", "B4", "B5", "C2", "C3", "C4", "C5", "D4", "D5"))
)
def test_powers_of_the_hyperplane(engine, name):
    """``h^(N+1) = q`` on ``Cn/P1 = P^(2n-1)`` and ``= 4 q h`` on the quadrics ``Bn/P1`` and ``Dn/P1``; two points are ``q^2`` on
    quadrics, ``q h^(2n-2)`` on projective space (standard).
    """
    X = FlagVariety(name)
    (h,) = X.of_length(1)
    top = monomial(engine, X, *[h] * (X.dim + 1))
    point = product(X.point, X.point, engine=engine)
    if name[0] == "C":
        (line,) = X.of_length(X.dim - 1)
        assert (top, point) == ({(X.identity, (1,)): 1}, {(line, (1,)): 1})
    else:
        assert (top, point) == ({(h, (1,)): 4}, {(X.identity, (2,)): 1})


def half_spin(X, parts):
    """The class of a strict partition with parts below ``r`` on ``Dr/Pr``: as on ``B_{r-1}``, but rows end in ``s_r`` and ``s_{r-1}`` by
    turns, the largest in ``s_r``.
    """
    r = X.rank
    rows = [[*range(r - k, r - 1), r - place % 2] for place, k in enumerate(sorted(parts, reverse=True))]
    return X.schubert(word=[i for row in reversed(rows) for i in row])


def chain(X):
    """The classes of a space with one class in each length, by length."""
    return {(u.length,): u for u in X.classes}


SAME = [
    ("B3/P3", strict, "D4/P4", half_spin),
    ("B4/P4", strict, "D5/P5", half_spin),
    ("C2/P2", None, "B2/P1", None),
    ("B2/P2", None, "A3/P1", None),
    ("C2/P1", None, "A3/P3", None),
    ("C3/P1", None, "A5/P1", None),
    ("G2/P1", None, "B3/P1", None),
]


@pytest.mark.parametrize(("one", "name", "other", "rename"), SAME, ids=[f"{a} = {b}" for a, _, b, _ in SAME])
def test_isomorphic_varieties_have_the_same_products(one, name, other, rename):
    """``OG(n,2n+1) = OG(n+1,2n+2)``, ``LG(2,4) = Q^3``, ``Cn/P1 = P^(2n-1)``, ``OG(2,5) = P^3``, ``G2/P1 = Q^5`` (standard): the
    products correspond, by every engine, all of them or forty at random.
    """
    X, Y = FlagVariety(one), FlagVariety(other)
    if name is None:
        pairs = [(u, chain(Y)[shape]) for shape, u in chain(X).items()]
    else:
        pairs = [(name(X, lam), rename(Y, lam)) for lam in strict_partitions(X.rank)]
    there = dict(pairs)
    assert len(there) == len(set(there.values())) == len(X.classes) == len(Y.classes)
    assert X.q_degrees == Y.q_degrees
    engines = [engine for engine, _ in asked([one])]
    assert len(engines) >= 2
    every = [(u, v) for u in X.classes for v in X.classes[u.index :]]
    for u, v in random.Random(one).sample(every, min(len(every), 40)):
        for engine in engines:
            moved = {(there[w], d): count for (w, d), count in product(u, v, engine=engine).items()}
            assert product(there[u], there[v], engine=engine) == moved
