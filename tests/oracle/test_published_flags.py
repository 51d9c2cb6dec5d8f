"""Printed values on complete and partial flag varieties. Each value has its source beside it.

FGP = Fomin, Gelfand, Postnikov, Quantum Schubert polynomials, J. AMS 10 (1997) 565-596. KM = Kirillov, Maeno, Quantum double
Schubert polynomials, quantum Schubert polynomials and Vafa-Intriligator formula, Discrete Math. 217 (2000) 191-223. CF =
Ciocan-Fontanine, On quantum cohomology rings of partial flag varieties, Duke Math. J. 98 (1999) 485-524.

"seen" means read in the source, "from memory" stated in the literature as far as known, "computed" agreed on by independent
programs without a published source.
"""

import re
from collections import Counter
from itertools import combinations
from math import factorial

import numpy as np
import pytest
import sympy

from conjcheck import Fl, constant, product, table

# FGP, from memory. The whole table but for the unit.
FL_3 = """
S213 S213 = S312 + q1
S132 S132 = S231 + q2
S213 S132 = S231 + S312
S213 S231 = S321
S132 S312 = S321
S213 S312 = q1 S132
S132 S231 = q2 S213
S213 S321 = q1 S231 + q1 q2
S132 S321 = q2 S312 + q1 q2
S312 S312 = q1 S231
S231 S231 = q2 S312
S312 S231 = q1 q2
S312 S321 = q1 q2 S213
S231 S321 = q1 q2 S132
S321 S321 = q1 q2 S231 + q1 q2 S312
"""

# Computed.
FL_1_3_4 = """
S4231 S4231 = q1 q3 S3241 + q1 q3 S4132
S2134 S4231 = q1 S2341 + q1 q3
S3124 S3124 = q1 S2134 + q1 S1243
S2143 S3241 = q3 S4123 + q1 q3
S2143 S4231 = q1 q3 S2134 + q1 q3 S1243
"""
FL_1_2_4 = """
S4312 S4312 = q1 q2^2 S3124 + q1^2 q2^2
S2134 S4312 = q1 S3412 + q1 q2 S1324
S2413 S4312 = q1 q2 S2413 + q1 q2^2
S4213 S4213 = q1 q2 S3214 + q1 q2 S4123
"""

# KM, Appendix A at y = 0, seen; also FGP.
QUANTUM_SCHUBERT_POLYNOMIALS_OF_FL_4 = """
2341 = x1x2x3+q1x3+q2x1
1342 = x1x2+x1x3+x2x3+q1+q2
1423 = x1^2+x1x2+x2^2-q1-q2
2143 = x1^2+x1x2+x1x3
4123 = x1^3-2q1x1-q1x2
3142 = x1^2x2+x1^2x3+q1x1-q1x3
2413 = x1^2x2+x1x2^2+q1x1+q1x2-q2x1
1432 = x1^2x2+x1x2^2+x1^2x3+x1x2x3+x2^2x3+q1x1+q1x2+q2x2-q1x3
3412 = x1^2x2^2+2q1x1x2-q2x1^2+q1^2+q1q2
3241 = x1^2x2x3+q1x1x3+q2x1^2
2431 = x1^2x2x3+x1x2^2x3+q2x1^2+q2x1x2+q1x1x3+q1x2x3
4213 = x1^3x2+q1x1^2-q1x1x2-q1^2-q1q2
4132 = x1^3x2+x1^3x3+q1x1^2-q1x1x2-2q1x1x3-q1x2x3-q1^2-q1q2
4312 = x1^3x2^2+2q1x1^2x2-q2x1^3+q1^2x1+q1q2x1
4231 = x1^3x2x3+q2x1^3+q1x1^2x3-q1x1x2x3-q1^2x3-q1q2x1
3421 = x1^2x2^2x3+2q1x1x2x3+q2x1^2x2+q1^2x3+q1q2x1
"""


def lines(X, text):
    return [(X, line) for line in text.strip().splitlines()]


@pytest.mark.parametrize(
    ("X", "line"), [*lines(Fl(3), FL_3), *lines(Fl(1, 3, n=4), FL_1_3_4), *lines(Fl(1, 2, n=4), FL_1_2_4)], ids=lambda x: str(x)
)
def test_printed_products(X, line, read):
    """Each printed product holds as a whole, in both orders of the factors."""
    left, right = line.split(" = ")
    u, v = (X.schubert(permutation=map(int, name[1:])) for name in left.split())
    assert product(u, v) == product(v, u) == read(X, right)


def test_the_printed_table_of_fl_3_is_whole():
    """Its 15 products are all unordered pairs of the five classes other than the unit, and all rows hold 45 constants."""
    assert len(FL_3.strip().splitlines()) == 15
    X = Fl(3)
    assert sum(len(product(u, v)) for u in X.classes for v in X.classes) == 45


def test_one_line_on_fl_3():
    """``<s_1, s_21, s_21>_(1,0) = 1`` (Woodward, Proc. AMS 133 (2005), Example 2, seen)."""
    X = Fl(3)
    s1, s21 = X.schubert(word=(1,)), X.schubert(word=(2, 1))
    assert constant(s1, s21, s21.dual, (1, 0)) == 1


def x_operator(X, r, x, times):
    """``x_r * x`` with ``x_r = sigma_{s_r} - sigma_{s_{r-1}}``, by the oracle's products."""
    zero, n = (0,) * len(X.marked), X.n
    factor = {}
    if r < n:
        factor[X.schubert(word=(r,)), zero] = 1
    if r > 1:
        factor[X.schubert(word=(r - 1,)), zero] = -1
    return times(factor, x)


def test_characteristic_polynomial_on_fl_3(times):
    """That of ``x_1`` is ``(t^2 - q1)^3 - q1^2 q2``; ``[pt] x_1^5 = q1``; ``q1 x_2 = x_1^3 - 2 q1 x_1`` (KM, Appendix B, seen)."""
    X = Fl(3)
    q1, q2, t = sympy.symbols("q1 q2 t")
    one = {(X.identity, (0, 0)): 1}
    matrix = sympy.zeros(6)
    for u in X.classes:
        for (w, d), count in x_operator(X, 1, {(u, (0, 0)): 1}, times).items():
            matrix[w.index, u.index] += count * q1 ** d[0] * q2 ** d[1]
    assert sympy.expand(matrix.charpoly(t).as_expr() - ((t**2 - q1) ** 3 - q1**2 * q2)) == 0
    power = [one]
    for _ in range(5):
        power.append(x_operator(X, 1, power[-1], times))
    assert {d: count for (w, d), count in power[5].items() if w is X.point} == {(1, 0): 1}
    left = {(w, (d[0] + 1, d[1])): count for (w, d), count in x_operator(X, 2, one, times).items()}
    right = Counter(power[3])
    for (w, d), count in power[1].items():
        right[w, (d[0] + 1, d[1])] -= 2 * count
    assert left == {term: count for term, count in right.items() if count}


def monk(n, r, w):
    """Quantum Monk, FGP Theorem 1.3, written out: the terms ``(w', d)`` of ``sigma_{s_r} * sigma_w``, each with coefficient 1."""
    here = sum(a > b for a, b in combinations(w, 2))
    for a in range(r):
        for b in range(r, n):
            swapped = list(w)
            swapped[a], swapped[b] = swapped[b], swapped[a]
            rise = sum(x > y for x, y in combinations(swapped, 2)) - here
            if rise == 1:
                yield tuple(swapped), (0,) * (n - 1)
            elif rise == 1 - 2 * (b - a):
                yield tuple(swapped), tuple(int(a <= i < b) for i in range(n - 1))


def apply_polynomial(n, text, v):
    """A polynomial in x and q applied to ``sigma_v`` through quantum Monk operators."""
    total = Counter()
    for sign, number, body in re.findall(r"([+-]?)(\d*)((?:[xq]\d(?:\^\d)?)+)", text):
        state = Counter({(v, (0,) * (n - 1)): int(f"{sign}{number or 1}")})
        for letter, index, power in re.findall(r"([xq])(\d)(?:\^(\d))?", body):
            for _ in range(int(power or 1)):
                following = Counter()
                for (w, d), count in state.items():
                    if letter == "q":
                        following[w, tuple(e + (i + 1 == int(index)) for i, e in enumerate(d))] += count
                        continue
                    for r, factor in ((int(index), 1), (int(index) - 1, -1)):
                        for end, step in monk(n, r, w) if 0 < r < n else ():
                            following[end, tuple(map(sum, zip(d, step, strict=True)))] += factor * count
                state = following
        total.update(state)
    return {term: count for term, count in total.items() if count}


@pytest.mark.parametrize("line", QUANTUM_SCHUBERT_POLYNOMIALS_OF_FL_4.strip().splitlines(), ids=lambda line: line[:4])
def test_quantum_schubert_polynomials(line):
    """The printed polynomial, applied to every ``sigma_v`` through quantum Monk operators, is the oracle's ``sigma_w *
    sigma_v``.
    """
    X = Fl(4)
    name, text = line.split(" = ")
    w = X.schubert(permutation=map(int, name))
    for v in X.classes:
        found = {(end.permutation, d): count for (end, d), count in product(w, v).items()}
        assert found == apply_polynomial(4, text, v.permutation)


@pytest.mark.parametrize("n", [2, 3, 4, 5, 6])
def test_squares_of_divisors(n):
    """``sigma_{s_k}^2 = sigma_{s_{k+1} s_k} + sigma_{s_{k-1} s_k} + q_k`` for every n (KM, Remark 15, seen)."""
    X = Fl(n)
    zero = (0,) * (n - 1)
    for k in range(1, n):
        u = X.schubert(word=(k,))
        expected = {(X.identity, tuple(int(i == k) for i in range(1, n))): 1}
        if k < n - 1:
            expected[X.schubert(word=(k + 1, k)), zero] = 1
        if k > 1:
            expected[X.schubert(word=(k - 1, k)), zero] = 1
        assert product(u, u) == expected


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_point_in_divisor_times_transposition_times_point(n, times):
    """``[pt] sigma_{s_k} * sigma_{t_ij} * [pt]`` is ``q_i ... q_{j-1}`` if i <= k < j, else 0 (KM, Remark 12, seen)."""
    X = Fl(n)
    zero = (0,) * (n - 1)
    for k in range(1, n):
        for i, j in combinations(range(1, n + 1), 2):
            w = list(range(1, n + 1))
            w[i - 1], w[j - 1] = j, i
            pair = times({(X.schubert(word=(k,)), zero): 1}, {(X.schubert(permutation=w), zero): 1})
            found = {d: count for (end, d), count in times(pair, {(X.point, zero): 1}).items() if end is X.point}
            assert found == ({tuple(int(i <= r < j) for r in range(1, n)): 1} if i <= k < j else {})


def quantum_pieri(n, m, k, w, distinct):
    """CF, from memory: distinct ends of k steps ``w -> w t_ab`` in the quantum Bruhat graph, a <= m < b, with pairwise distinct a's
    (``distinct=0``, elementary) or b's (``distinct=1``, complete homogeneous)."""
    states = {(w, (0,) * (n - 1), frozenset())}
    for _ in range(k):
        following = set()
        for u, d, used in states:
            here = sum(x > y for x, y in combinations(u, 2))
            for a in range(m):
                for b in range(m, n):
                    swapped = list(u)
                    swapped[a], swapped[b] = swapped[b], swapped[a]
                    rise = sum(x > y for x, y in combinations(swapped, 2)) - here
                    quantum = rise == 1 - 2 * (b - a)
                    if (a, b)[distinct] not in used and (rise == 1 or quantum):
                        end = tuple(e + (quantum and a <= i < b) for i, e in enumerate(d))
                        following.add((tuple(swapped), end, used | {(a, b)[distinct]}))
        states = following
    return {(u, d): 1 for u, d, _ in states}


@pytest.mark.parametrize("n", [3, 4, 5])
def test_quantum_pieri(n):
    """Multiplication by ``e_k`` and ``h_k`` of ``x_1, ..., x_m`` on every class (CF, from memory)."""
    X = Fl(n)
    for m in range(1, n):
        for k in range(1, n):
            factors = []
            if k <= m:
                factors.append((X.schubert(word=range(m - k + 1, m + 1)), 0))
            if k <= n - m:
                factors.append((X.schubert(word=range(m + k - 1, m - 1, -1)), 1))
            for factor, distinct in factors:
                for w in X.classes:
                    found = {(end.permutation, d): count for (end, d), count in product(factor, w).items()}
                    assert found == quantum_pieri(n, m, k, w.permutation, distinct)


def totals(X):
    """Counts of the values of the constants of X: all, with d > 0, with d = 0; and the largest degree that occurs."""
    everything, quantum, largest = Counter(), Counter(), np.zeros(len(X.marked), dtype=int)
    for block in table(X):
        everything.update(block.N.tolist())
        quantum.update(block.N[block.d.any(axis=1)].tolist())
        largest = np.maximum(largest, block.d.max(axis=0))
    return everything, quantum, everything - quantum, tuple(largest.tolist())


@pytest.mark.parametrize(("n", "count", "largest"), [(2, 4, (1,)), (3, 45, (1, 1)), (4, 1168, (2, 2, 2)), (5, 62925, (2, 3, 3, 2))])
def test_number_of_constants(n, count, largest):
    """Nonzero constants over ordered pairs, and the largest exponents of q (computed by three programs)."""
    everything, _, classical, degree = totals(Fl(n))
    assert everything.total() == count
    assert set(classical) == {1}
    assert degree == largest
    if n <= 4:
        assert set(everything) == {1}


def test_the_first_twos():
    """On ``Fl(5)`` 54,594 nonzero constants have d > 0, and 25 of them are 2; all others are 1 (computed)."""
    everything, quantum, _, _ = totals(Fl(5))
    assert quantum.total() == 54594
    assert quantum == {1: 54569, 2: 25}
    assert everything == {1: 62900, 2: 25}


def test_number_of_constants_of_fl_6():
    """6,531,372 nonzero constants, the largest 3, degrees up to (2,3,4,3,2); 411,555 classical ones, 2,442 of them 2, none larger
    (computed by three programs)."""
    everything, _, classical, degree = totals(Fl(6))
    assert (everything.total(), max(everything), degree) == (6531372, 3, (2, 3, 4, 3, 2))
    assert (classical.total(), classical[2], max(classical)) == (411555, 2442, 2)


@pytest.mark.parametrize(("n", "degree"), [(2, 2), (3, 48), (4, 46080)])
def test_anticanonical_degree(n, degree):
    """``int c_1^N = 2^N N!`` on ``Fl(n)`` with ``c_1 = 2 (sigma_{s_1} + ... + sigma_{s_{n-1}})`` (Weyl; law 8): A2 48, A3 46080."""
    X = Fl(n)
    assert degree == 2**X.dim * factorial(X.dim)
    level = {X.identity: 1}
    for _ in range(X.dim):
        following = Counter()
        for u, count in level.items():
            for divisor in X.of_length(1):
                for (w, d), c in product(divisor, u).items():
                    if not any(d):
                        following[w] += 2 * c * count
        level = following
    assert level == {X.point: degree}


@pytest.mark.parametrize("steps", [(1, 2), (1, 3), (2, 3), (1, 2, 3), (2, 4), (1, 4)])
def test_degree_of_partial_flags_by_hooks(steps):
    """The classical ``D^dim`` for ``D = sum k-th divisors`` is ``dim! prod <lambda_P, a^vee>/<rho, a^vee>`` over roots
    outside the Levi.
    """
    n = 5 if 4 in steps else 4
    X = Fl(*steps, n=n)
    above, below = factorial(X.dim), 1
    for i, j in combinations(range(1, n + 1), 2):
        height = sum(i <= k < j for k in steps)
        if height:
            above, below = above * height, below * (j - i)
    level = {X.identity: 1}
    for _ in range(X.dim):
        following = Counter()
        for u, count in level.items():
            for divisor in X.of_length(1):
                for (w, d), c in product(divisor, u).items():
                    if not any(d):
                        following[w] += c * count
        level = following
    assert above % below == 0
    assert level == {X.point: above // below}
