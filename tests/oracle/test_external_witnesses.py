"""Witnesses that share nothing with the oracle: Schubert polynomials, a plain script, the mirror potential."""

from functools import cache
from itertools import pairwise

import numpy as np
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import Fl, Gr, product, table
from conjcheck.oracle.comparison import RecursionEngine


def divided_difference(polynomial, i):
    """``(f - s_i f) / (x_i - x_{i+1})``, i from 1; a polynomial is ``{exponents: coefficient}``."""
    total = {}
    for exponents, count in polynomial.items():
        a, b = exponents[i - 1], exponents[i]
        sign, low, high = (1, b, a) if a > b else (-1, a, b)
        for t in range(high - low):  # (x^high y^low - x^low y^high) / (x - y) = sum of x^(high - 1 - t) y^(low + t)
            term = (*exponents[: i - 1], high - 1 - t, low + t, *exponents[i + 1 :])
            total[term] = total.get(term, 0) + sign * count
    return {term: count for term, count in total.items() if count}


def swapped(w, i):
    """``w s_i``."""
    return (*w[: i - 1], w[i], w[i - 1], *w[i + 1 :])


@cache
def schubert_polynomial(w):
    """Lascoux, Schutzenberger, Polynomes de Schubert, C. R. Acad. Sci. 294 (1982): ``S_w = d_i S_{w s_i}`` at an ascent i."""
    rise = next((i for i in range(1, len(w)) if w[i - 1] < w[i]), None)
    if rise is None:
        return {tuple(range(len(w) - 1, -1, -1)): 1}
    return divided_difference(schubert_polynomial(swapped(w, rise)), rise)


def classical_product(u, v, ends):
    """The coefficients of ``S_u S_v`` at the given ends of length ``l(u) + l(v)``: ``d_w (S_u S_v)``."""
    whole = {}
    for a, x in schubert_polynomial(u).items():
        for b, y in schubert_polynomial(v).items():
            term = tuple(map(sum, zip(a, b, strict=True)))
            whole[term] = whole.get(term, 0) + x * y
    found = {}
    for w in ends:
        polynomial, line = whole, w
        while polynomial and (fall := next((i for i in range(1, len(line)) if line[i - 1] > line[i]), None)):
            polynomial, line = divided_difference(polynomial, fall), swapped(line, fall)
        if polynomial:
            ((exponents, count),) = polynomial.items()
            assert not any(exponents)
            found[w] = count
    return found


def classical_row(u, v):
    """The part of the oracle's product with d = 0, by permutations."""
    return {w.permutation: count for (w, d), count in product(u, v).items() if not any(d)}


def test_schubert_polynomials_by_hand():
    """``S_1432 = x1^2 x2 + x1^2 x3 + x1 x2^2 + x1 x2 x3 + x2^2 x3`` and ``S_2143 = x1^2 + x1 x2 + x1 x3``
    (Lascoux-Schutzenberger).
    """
    assert schubert_polynomial((1, 4, 3, 2)) == {
        (2, 1, 0, 0): 1,
        (2, 0, 1, 0): 1,
        (1, 2, 0, 0): 1,
        (1, 1, 1, 0): 1,
        (0, 2, 1, 0): 1,
    }
    assert schubert_polynomial((2, 1, 4, 3)) == {(2, 0, 0, 0): 1, (1, 1, 0, 0): 1, (1, 0, 1, 0): 1}


@pytest.mark.parametrize("n", [2, 3, 4])
def test_classical_constants_are_those_of_schubert_polynomials(n):
    """Every classical constant of ``Fl(n)``, zeros included, is a coefficient of a product of Schubert polynomials."""
    X = Fl(n)
    for u in X.classes:
        for v in X.classes:
            ends = [w.permutation for w in X.of_length(u.length + v.length)]
            assert classical_row(u, v) == classical_product(u.permutation, v.permutation, ends)


@settings(deadline=None, max_examples=60)
@given(st.sampled_from(Fl(5).classes), st.sampled_from(Fl(5).classes))
def test_classical_rows_of_fl_5_are_those_of_schubert_polynomials(u, v):
    """The same on ``Fl(5)``, rows at random."""
    ends = [w.permutation for w in Fl(5).of_length(u.length + v.length)]
    assert classical_row(u, v) == classical_product(u.permutation, v.permutation, ends)


def test_a_classical_two_on_fl_6():
    """The first classical constant above 1 is on ``Fl(6)``: for a row with a 2, Schubert polynomials say 2 as well."""
    X = Fl(6)
    u = X.schubert(permutation=(2, 1, 4, 3, 6, 5))
    row = classical_row(u, u)
    assert max(row.values()) >= 2
    assert row == classical_product(u.permutation, u.permutation, [w.permutation for w in X.of_length(2 * u.length)])


def by_permutations(row):
    return {(w.permutation, d): count for (w, d), count in row.items()}


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_every_row_is_that_of_the_plain_script(n, plain):
    """All rows of ``Fl(n)`` against the table of the plain scipy script, term by term."""
    X, expected = Fl(n), plain(n)
    assert len(expected) == len(X.classes) ** 2
    for u in X.classes:
        for v in X.classes:
            assert by_permutations(product(u, v)) == expected[u.permutation, v.permutation]


@pytest.mark.parametrize("n", [3, 4])
def test_the_route_without_symmetries_is_that_of_the_plain_script(n, plain):
    """The second route of the recursion agrees on every row as well."""
    X, expected, engine = Fl(n), plain(n), RecursionEngine()
    for u in X.classes:
        for v in X.classes:
            assert by_permutations(engine.direct_row(u, v)) == expected[u.permutation, v.permutation]


def test_localisation_is_that_of_the_plain_script(plain):
    """The equivariant engine on every row of ``Fl(3)``."""
    X, expected = Fl(3), plain(3)
    for u in X.classes:
        for v in X.classes:
            assert by_permutations(product(u, v, engine="localisation")) == expected[u.permutation, v.permutation]


def table_matches(X, expected):
    """Whether the streamed table holds exactly the expected rows."""
    lines = [u.permutation for u in X.classes]
    seen = set()
    for block in table(X):
        seen.add(block.u)
        found = {v: {} for v in lines}
        for v, w, d, count in zip(block.v.tolist(), block.w.tolist(), map(tuple, block.d.tolist()), block.N.tolist(), strict=True):
            assert (lines[w], d) not in found[lines[v]], "every constant is delivered once"
            found[lines[v]][lines[w], d] = count
        assert all(found[v] == expected[block.u.permutation, v] for v in lines)
    return seen == set(X.classes)


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_the_streamed_table_is_that_of_the_plain_script(n, plain):
    """``table(Fl(n))`` delivers every nonzero constant exactly once."""
    assert table_matches(Fl(n), plain(n))


@pytest.mark.slow
def test_the_streamed_table_of_fl_6_is_that_of_the_plain_script(plain):
    """All 6,531,372 constants of ``Fl(6)``, one by one (about a minute and 4 GB)."""
    assert table_matches(Fl(6), plain(6))


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_the_plain_script_drops_no_degree(n, plain):
    """The script keeps a box of degrees. At q = 1 nothing can be dropped: its row sums are those of dense integer matrices.

    Constants are not negative, so a term outside the box would show as a missing amount.
    """
    rows = plain(n)
    lines = sorted({u for u, _ in rows}, key=lambda w: (sum(a > b for i, a in enumerate(w) for b in w[i:]), [-x for x in w]))
    index = {w: k for k, w in enumerate(lines)}
    length = {w: sum(a > b for i, a in enumerate(w) for b in w[i:]) for w in lines}
    x = []
    for r in range(1, n + 1):
        matrix = np.zeros((len(lines),) * 2, dtype=np.int64)
        for w in lines:
            for other in range(1, n + 1):
                if other != r:
                    a, b = sorted((r, other))
                    end = list(w)
                    end[a - 1], end[b - 1] = end[b - 1], end[a - 1]
                    if length[tuple(end)] - length[w] in (1, 1 - 2 * (b - a)):
                        matrix[index[w], index[tuple(end)]] += 1 if a == r else -1
        x.append(matrix)
    # S_w as a polynomial in the x at q = 1: peel the transition sigma_w = x_r sigma_v - others, as whole matrices.
    products = {lines[0]: np.eye(len(lines), dtype=np.int64)}
    for w in lines[1:]:
        r = max(i for i in range(1, n) if w[i - 1] > w[i])
        s = max(i for i in range(r + 1, n + 1) if w[i - 1] < w[r - 1])
        v = list(w)
        v[r - 1], v[s - 1] = v[s - 1], v[r - 1]
        row = x[r - 1][index[tuple(v)]].copy()
        row[index[w]] -= 1
        known = sum(count * products[lines[k]] for k, count in enumerate(row.tolist()) if count)
        products[w] = products[tuple(v)] @ x[r - 1] - known
    for u in lines:
        for v in lines:
            assert sum(rows[u, v].values()) == products[u][index[v]].sum()


def mirror_potential(steps, n):
    """Givental 1996; Eguchi, Hori, Xiong 1997; Batyrev, Ciocan-Fontanine, Kim, van Straten 1998-2000: the toric potential at q = 1.

    The n x n grid is cut into diagonal blocks; boxes strictly below the blocks carry one variable each, the lower-left corner of
    each block carries 1. Each step right or down between neighbouring carriers, at least one of them a box, adds head/tail.
    """
    cuts = [0, *steps, n]
    block = [b for b, (low, high) in enumerate(pairwise(cuts)) for _ in range(low, high)]
    carrier = {(i, j): sympy.Symbol(f"x{i}_{j}") for i in range(n) for j in range(n) if block[i] > block[j]}
    boxes = set(carrier)
    carrier |= {(high - 1, low): sympy.Integer(1) for low, high in pairwise(cuts)}
    potential = sum(
        carrier[head] / carrier[tail]
        for tail in carrier
        for head in ((tail[0], tail[1] + 1), (tail[0] + 1, tail[1]))
        if head in carrier and (tail in boxes or head in boxes)
    )
    return potential, [carrier[box] for box in sorted(boxes)]


CRITICAL_POINTS = [
    (Gr(1, 3), 3),
    (Gr(2, 4), 4),
    (Gr(2, 5), 10),
    (Fl(3), 6),
    (Fl(1, 3, n=4), 9),
    pytest.param(Fl(1, 2, n=4), 11, marks=pytest.mark.slow),
]


@pytest.mark.parametrize(("X", "points"), CRITICAL_POINTS, ids=str)
def test_critical_values_of_the_mirror_potential(X, points):
    """Every critical value of the toric mirror potential at q = 1 is an eigenvalue of ``c_1 *`` (mirror symmetry; exact, by
    Groebner bases).

    As many critical points as classes on P^2, ``Gr(2,5)`` and ``Fl(3)``; the toric potential has too few of them on
    ``Gr(2,4)`` (4 of 6), ``Fl(1,2;4)`` (11 of 12) and ``Fl(1,3;4)`` (9 of 12): computed, common practice, no source.
    """
    potential, variables = mirror_potential(X.steps, X.n)
    assert len(variables) == X.dim
    value, unit = sympy.symbols("t z")
    equations = [sympy.numer(sympy.together(sympy.diff(potential, x))) for x in variables]
    equations.append(sympy.numer(sympy.together(potential - value)))
    equations.append(unit * sympy.prod(variables) - 1)
    basis = sympy.groebner(equations, unit, *variables, value, order="grevlex").fglm("lex")
    last = sympy.Poly(basis.exprs[-1], value)
    assert last.free_symbols == {value}

    matrix = sympy.zeros(len(X.classes))
    for degree, node in zip(X.q_degrees, X.marked, strict=True):
        for u in X.classes:
            for (w, _), count in product(X.schubert(word=(node,)), u).items():
                matrix[w.index, u.index] += degree * count
    spectrum = matrix.charpoly(value).as_poly()
    radical = sympy.quo(last, sympy.gcd(last, last.diff(value)))
    assert sympy.rem(spectrum, radical).is_zero
    assert radical.degree() >= 2
    heads = [sympy.Poly(f, unit, *variables, value).monoms(order="lex")[0] for f in basis.exprs]
    assert standard_monomials(heads) == points


def standard_monomials(heads):
    """The dimension of the quotient by an ideal of dimension 0 with the given leading exponents: the number of critical points."""
    size = len(heads[0])
    bounds = [next(h[i] for h in heads if sum(h) == h[i] and h[i]) for i in range(size)]
    box = np.ndindex(*bounds)
    return sum(not any(all(a >= b for a, b in zip(term, head, strict=True)) for head in heads) for term in box)
