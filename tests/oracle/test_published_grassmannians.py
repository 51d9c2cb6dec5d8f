"""Printed values on Grassmannians: tables, Pieri, rim hooks, rational curves, degrees. Each value has its source beside it.

"seen" means read in the source, "from memory" stated in the literature as far as known, "computed" agreed on by two independent
programs without a published source.
"""

from fractions import Fraction
from functools import cache
from itertools import combinations
from itertools import product as cartesian
from math import factorial, prod

import pytest

from conjcheck import Gr, constant, product

GRASSMANNIANS = [Gr(k, n) for n in range(2, 7) for k in range(1, n)]
ENGINES = ["recursion", "vafa-intriligator"]

# Bertram, Quantum Schubert calculus, Adv. Math. 128 (1997) 289-305; from memory. The whole table but for the unit.
GR_2_4 = """
s1 s1 = s2 + s11
s1 s2 = s21
s1 s11 = s21
s1 s21 = s22 + q
s1 s22 = q s1
s2 s11 = q
s2 s2 = s22
s11 s11 = s22
s2 s21 = q s1
s11 s21 = q s1
s2 s22 = q s11
s11 s22 = q s2
s21 s21 = q s2 + q s11
s21 s22 = q s21
s22 s22 = q^2
"""

# Pieri products: Bertram, from memory; the others computed.
GR_2_5 = """
s1 s31 = s32 + q
s1 s32 = s33 + q s1
s1 s33 = q s2
s11 s3 = q
s2 s21 = s32 + q
s2 s31 = s33 + q s1
s2 s32 = q s2 + q s11
s2 s33 = q s21
s21 s21 = s33 + q s1
s21 s31 = q s2 + q s11
s31 s31 = q s3 + q s21
s32 s32 = q s32 + q^2
s33 s33 = q^2 s11
"""

# Computed; s333 s333 = q^3: Buch, Kresch, Tamvakis, J. AMS 16 (2003) 901-915, from memory (one cubic through three general points).
GR_3_6 = """
s21 s21 = s33 + 2 s321 + s222 + q
s321 s321 = q s33 + 2 q s321 + q s222 + q^2
s21 s321 = s333 + q s3 + 2 q s21 + q s111
s333 s333 = q^3
"""


def lines(X, text):
    return [(X, line) for line in text.strip().splitlines()]


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize(
    ("X", "line"), [*lines(Gr(2, 4), GR_2_4), *lines(Gr(2, 5), GR_2_5), *lines(Gr(3, 6), GR_3_6)], ids=lambda x: str(x)
)
def test_printed_products(X, line, engine, read):
    """Each printed product holds as a whole, in both orders of the factors."""
    left, right = line.split(" = ")
    u, v = (X.schubert(partition=map(int, name[1:])) for name in left.split())
    assert product(u, v, engine=engine) == product(v, u, engine=engine) == read(X, right)


def test_the_printed_table_of_gr_2_4_is_whole():
    """Its 15 products are all unordered pairs of the five classes other than the unit."""
    assert len(GR_2_4.strip().splitlines()) == 15


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize("n", range(2, 8))
def test_projective_spaces(n, engine):
    """``h^n = q`` on ``P^(n-1)`` (standard), on both sides of duality."""
    for X in {Gr(1, n), Gr(n - 1, n)}:
        for u in X.classes:
            for v in X.classes:
                d, rest = divmod(u.length + v.length, n)
                assert product(u, v, engine=engine) == {(X.of_length(rest)[0], (d,)): 1}


def test_two_points_on_a_line():
    """On P^2 one line passes through two points and meets a line: ``<s_1, s_21, s_21>_1 = 1`` (Woodward 2005, Example 2, seen)."""
    X = Gr(1, 3)
    line, point = X.schubert(word=(1,)), X.schubert(word=(2, 1))
    assert point is X.point
    assert constant(line, point, point.dual, (1,)) == 1


@pytest.mark.parametrize(("X", "count"), [(Gr(2, 4), 24), (Gr(2, 5), 70), (Gr(2, 6), 171), (Gr(3, 6), 345)], ids=str)
@pytest.mark.parametrize("engine", ENGINES)
def test_number_of_nonzero_terms(X, count, engine):
    """Nonzero terms over unordered pairs (computed)."""
    assert sum(len(product(u, v, engine=engine)) for u in X.classes for v in X.classes if u.index <= v.index) == count


def rational_curves(m, p, e):
    """Ravi, Rosenthal, Wang, Math. Ann. 311 (1998) 11-26, closed formula; from memory."""
    n, total = m + p, Fraction(0)
    for parts in cartesian(range(e + 1), repeat=p):
        if sum(parts) == e:
            above = prod(k - j + (parts[k] - parts[j]) * n for j, k in combinations(range(p), 2))
            below = prod(factorial(m + j + parts[j - 1] * n - 1) for j in range(1, p + 1))
            total += Fraction(above, below)
    return (-1) ** (e * (p + 1)) * factorial(m * p + e * n) * total


@pytest.mark.parametrize("engine", ENGINES)
@pytest.mark.parametrize(
    ("m", "p", "numbers"),
    [(2, 2, (2, 8, 32, 128)), (3, 2, (5, 55, 610, 6765)), (4, 2, (14, 364, 9842, 265720)), (3, 3, ()), (1, 3, ())],
)
def test_rational_curves(m, p, numbers, engine, times):
    """The coefficient of ``q^e [pt]`` in ``sigma_1^(mp + e(m+p))`` on ``Gr(p, m+p)`` (RRW, numbers and formula from memory)."""
    X = Gr(p, m + p)
    divisor = {(X.schubert(partition=(1,)), (0,)): 1}
    power, found = {(X.identity, (0,)): 1}, {}
    for exponent in range(1, m * p + 3 * (m + p) + 1):
        power = times(divisor, power, engine)
        e, rest = divmod(exponent - m * p, m + p)
        if rest == 0 and e >= 0:
            found[e] = power.get((X.point, (e,)), 0)
    expected = {e: rational_curves(m, p, e) for e in range(4)}
    assert found == expected
    assert list(found.values())[: len(numbers)] == list(numbers)


@pytest.mark.parametrize(("n", "degree"), [(1, 1), (2, 2), (3, 42), (4, 24024), (5, 701149020)])
def test_degrees_of_gr_n_2n(n, degree):
    """``sigma_1^(n^2)`` on ``Gr(n, 2n)`` (OEIS A039622, seen)."""
    X = Gr(n, 2 * n)
    (divisor,) = X.of_length(1)
    level = {X.identity: 1}
    for _ in range(n * n):
        following = {}
        for u, count in level.items():
            for (w, d), c in product(divisor, u).items():
                if d == (0,):
                    following[w] = following.get(w, 0) + c * count
        level = following
    assert level == {X.point: degree}


def padded(partition, k):
    return (*partition, *[0] * k)[:k]


@pytest.mark.parametrize("X", GRASSMANNIANS, ids=str)
def test_quantum_pieri(X):
    """Buch, Compositio Math. 137 (2003) 227-235, Theorem 1 (seen), on every row, as an independent enumeration."""
    k, n = X.steps[0], X.n
    m = n - k
    shapes = [padded(u.partition, k) for u in X.classes]
    for p in range(1, m + 1):
        special = X.schubert(partition=(p,))
        for u in X.classes:
            lam = padded(u.partition, k)
            expected = {}
            for mu in shapes:
                if (
                    sum(mu) == sum(lam) + p
                    and all(mu[i] >= lam[i] for i in range(k))
                    and all(lam[i] >= mu[i + 1] for i in range(k - 1))
                ):
                    expected[X.schubert(partition=mu), (0,)] = 1
                inner = all(lam[i] - 1 >= mu[i] for i in range(k)) and all(mu[i] >= lam[i + 1] - 1 for i in range(k - 1))
                if sum(mu) == sum(lam) + p - n and inner:
                    expected[X.schubert(partition=mu), (1,)] = 1
            assert product(special, u) == expected


@pytest.mark.parametrize("X", GRASSMANNIANS, ids=str)
def test_no_q_in_small_products(X):
    """No power of q if ``rows(l) + rows(m) <= k`` or ``l_1 + m_1 <= n - k`` (Buch 2003, Lemma 3, seen)."""
    k, m = X.steps[0], X.n - X.steps[0]
    for u in X.classes:
        for v in X.classes:
            few_rows = len(u.partition) + len(v.partition) <= k
            few_columns = sum(part[0] for part in (u.partition, v.partition) if part) <= m
            if few_rows or few_columns:
                assert {d for _, d in product(u, v)} <= {(0,)}


@pytest.mark.parametrize("X", [*GRASSMANNIANS, Gr(3, 7)], ids=str)
def test_exponents_of_q(X):
    """The least exponent is the least d such that the shape without its first d rows and columns lies inside the dual of the other
    (Fulton, Woodward 2004; Buch 2003, Theorem 3, seen); the exponents form an interval (Postnikov 2005, abstract seen)."""
    k = X.steps[0]
    for u in X.classes:
        for v in X.classes:
            inside = padded(v.dual.partition, k)
            lam = padded(u.partition, k)
            least = next(
                d
                for d in range(k + 1)
                if all(max(part - d, 0) <= room for part, room in zip((*lam[d:], *[0] * d), inside, strict=True))
            )
            exponents = sorted({d for _, (d,) in product(u, v)})
            assert exponents == list(range(least, least + len(exponents)))


@cache
def tableau_weights(shape, k):
    """The weights of all semistandard tableaux of a shape with entries 1..k, with repetition, by Gelfand-Tsetlin patterns."""
    if k == 0:
        return ((),)
    found = []
    for inner in cartesian(*(range(shape[i + 1], shape[i] + 1) for i in range(k - 1))):
        found += [(*weight, sum(shape) - sum(inner)) for weight in tableau_weights(inner, k - 1)]
    return tuple(found)


def classical_product(lam, mu, k):
    """``s_lam s_mu`` in k variables (Brauer, Klimyk): the weights of one factor are added to the other and straightened."""
    total = {}
    for weight in tableau_weights(lam, k):
        beta = [mu[i] + weight[i] + k - 1 - i for i in range(k)]
        if len(set(beta)) == k:
            sign = (-1) ** sum(a < b for a, b in combinations(beta, 2))
            shape = tuple(b - (k - 1 - i) for i, b in enumerate(sorted(beta, reverse=True)))
            total[shape] = total.get(shape, 0) + sign
    return {shape: count for shape, count in total.items() if count}


def without_rim_hooks(shape, k, n):
    """``(sign, power, core)`` of a shape of k rows after removal of n-rim hooks until it fits in n - k columns; ``None`` if
    it dies.

    Bertram, Ciocan-Fontanine, Fulton, J. Algebra 219 (1999) 728-746: a rim hook of height ht contributes ``q (-1)^(k - ht)``.
    """
    sign, power = 1, 0
    while shape[0] > n - k:
        beta = [part + k - 1 - i for i, part in enumerate(shape)]
        moved = beta[0] - n  # removing a rim hook moves one bead down n places; the order of removals does not matter
        if moved < 0 or moved in beta:
            return None
        height = 1 + sum(b > moved for b in beta[1:])
        beta = sorted([*beta[1:], moved], reverse=True)
        shape = tuple(b - (k - 1 - i) for i, b in enumerate(beta))
        sign, power = sign * (-1) ** (k - height), power + 1
    return sign, power, shape


@pytest.mark.parametrize("X", GRASSMANNIANS, ids=str)
def test_rim_hooks(X):
    """Every product from classical Littlewood-Richardson numbers by removal of rim hooks, both parities of k and n."""
    k, n = X.steps[0], X.n
    for u in X.classes:
        for v in X.classes:
            total = {}
            for shape, count in classical_product(padded(u.partition, k), padded(v.partition, k), k).items():
                if reduced := without_rim_hooks(shape, k, n):
                    sign, power, core = reduced
                    term = X.schubert(partition=core), (power,)
                    total[term] = total.get(term, 0) + sign * count
            assert product(u, v) == {term: count for term, count in total.items() if count}


def test_rim_hook_reference_by_hand():
    """The reference itself: ``s_21 s_21 = s42 + s411 + s33 + 2 s321 + s3111 + s222 + s2211`` cut to 3 rows; three removals."""
    assert classical_product((2, 1, 0), (2, 1, 0), 3) == {
        (4, 2, 0): 1,
        (4, 1, 1): 1,
        (3, 3, 0): 1,
        (3, 2, 1): 2,
        (2, 2, 2): 1,
    }
    assert without_rim_hooks((3, 1), 2, 4) == (1, 1, (0, 0))
    assert without_rim_hooks((4, 0), 2, 4) == (-1, 1, (0, 0))
    assert without_rim_hooks((3, 0), 2, 4) is None
    assert len(tableau_weights((2, 1, 0), 3)) == 8


@pytest.mark.parametrize("X", GRASSMANNIANS, ids=str)
def test_transposed_partitions(X):
    """Law 3 in the language of partitions: ``Gr(k, n)`` and ``Gr(n - k, n)`` have the same table up to transposition."""
    Y = Gr(X.n - X.steps[0], X.n)

    def turned(u):
        return Y.schubert(partition=tuple(sum(part > j for part in u.partition) for j in range(max(u.partition, default=0))))

    for u in X.classes:
        for v in X.classes:
            assert {(turned(w), d): count for (w, d), count in product(u, v).items()} == product(turned(u), turned(v))
