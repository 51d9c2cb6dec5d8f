"""Equivariant constants against the formula of Andersen, Jantzen, Soergel and Billey, Chevalley terms, and each other."""

from itertools import combinations

import pytest

from conjcheck import Case, Fl, FlagVariety, Gr, product, simple_roots
from conjcheck.errors import OutOfReach
from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.case import outcomes
from conjcheck.oracle.equivariant import Sampled, equivariant_constant, equivariant_terms, number_of_monomials


def reflect(X, i, root):
    """``s_i`` applied to a root in simple roots."""
    matrix = cartan_matrix(X.kind)
    drop = sum(a * matrix[j][i - 1] for j, a in enumerate(root))
    return tuple(a - (j == i - 1) * drop for j, a in enumerate(root))


def billey(u, w):
    """``sigma_u|_w``: the sum over reduced words of u inside one of w of products of roots, as a polynomial.

    Billey, Kostant polynomials and the cohomology ring for G/B, Duke Math. J. 96 (1999), Theorem 4; also Andersen, Jantzen, Soergel.
    """
    X, letters = w.variety, w.word
    roots = []
    for place, i in enumerate(letters):
        root = tuple(int(j == i - 1) for j in range(X.rank))
        for j in reversed(letters[:place]):
            root = reflect(X, j, root)
        roots.append(sum((a * alpha for a, alpha in zip(root, simple_roots(X), strict=True)), 0 * simple_roots(X)[0]))
    total = 0 * simple_roots(X)[0]
    for places in combinations(range(len(letters)), u.length):
        chosen = tuple(letters[p] for p in places)
        if same_element(X, chosen, u.word):
            term = simple_roots(X)[0] ** 0
            for p in places:
                term = term * roots[p]
            total = total + term
    return total


def same_element(X, one, other):
    """Whether two words are one element: they move the sum of the fundamental weights, and its multiples, to one place."""
    matrix = cartan_matrix(X.kind)

    def moved(word):
        weight = [1] * X.rank
        for i in reversed(word):
            height = weight[i - 1]
            weight = [a - height * c for a, c in zip(weight, matrix[i - 1], strict=True)]
        return weight

    return moved(one) == moved(other)


@pytest.mark.parametrize("name", ["Fl(3)", "C2/B", "G2/B"])
def test_classical_constants_multiply_localisations(name):
    """On G/B, ``sigma_u|_x sigma_v|_x = sum c_{u,v}^w sigma_w|_x`` at every fixed point x, as polynomials."""
    X = FlagVariety(name)
    at = {(u, x): billey(u, x) for u in X.classes for x in X.classes}
    pairs = [(u, v) for u in X.classes for v in X.classes if u.index <= v.index][:: 1 if len(X.classes) < 7 else 9]
    zero = (0,) * X.rank
    for u, v in pairs:
        terms = {w: equivariant_constant(Case(X, u, v, w, zero)) for w in X.classes if number_of_monomials(Case(X, u, v, w, zero))}
        for x in X.classes:
            assert at[u, x] * at[v, x] == sum((c * at[w, x] for w, c in terms.items()), 0 * simple_roots(X)[0])


@pytest.mark.parametrize("X", [Fl(3), Gr(2, 4), FlagVariety("C2/B"), FlagVariety("G2/P1")], ids=str)
def test_degree_zero_is_the_ordinary_product(X):
    """The constants of degree 0 are the ordinary ones, and the others vanish with the roots."""
    for u in X.classes:
        for v in X.classes[::2]:
            terms = equivariant_terms(u, v, quantum=True)
            plain = dict(product(u, v))
            total = u.length + v.length
            weight = {key: key[0].length + sum(a * b for a, b in zip(key[1], X.q_degrees, strict=True)) for key in terms}
            assert {key: True for key in terms if weight[key] == total} == dict.fromkeys(plain, True)
            assert all(terms[key] == n for key, n in plain.items())
            assert max(weight.values()) <= total


def test_chevalley_terms():
    """A divisor times a class has the equivariant term ``omega_i - u omega_i`` (Mihalcea 2007), here on Fl(3) and E6/P1."""
    X = Fl(3)
    a, b = simple_roots(X)
    expected = {(1, 2, 3): 0, (1, 3, 2): 0, (2, 1, 3): a, (2, 3, 1): a, (3, 1, 2): a + b, (3, 2, 1): a + b}
    for u in X.classes:
        case = Case(X, X.schubert(word=(1,)), u, u, (0, 0))
        assert equivariant_constant(case) == expected[u.permutation]
    E6 = FlagVariety("E6/P1")
    u = E6.schubert(word=(4, 3, 1))
    roots = simple_roots(E6)
    assert equivariant_constant(Case(E6, E6.classes[1], u, u, (0,))) == roots[0] + roots[2] + roots[3]


def test_projective_line():
    """On P^1, ``pt * pt = alpha pt + q``: the quantum and the equivariant correction side by side."""
    X = Gr(1, 2)
    pt, one = X.point, X.identity
    terms = equivariant_terms(pt, pt, quantum=True)
    assert terms == {(pt, (0,)): simple_roots(X)[0], (one, (1,)): 1}


def test_commutes_and_is_positive():
    """On Gr(2,4) every exact constant is symmetric in u and v, homogeneous, and has nonnegative coefficients."""
    X = Gr(2, 4)
    for u in X.classes:
        for v in X.classes:
            for w, d in outcomes(X, u.length + v.length, equivariant=True):
                case = Case(X, u, v, w, d)
                found = equivariant_constant(case)
                assert found.is_positive
                assert found.is_homogeneous
                assert found == equivariant_constant(Case(X, v, u, w, d))


def test_outcomes_of_equivariant_rows():
    """An equivariant row has all (w, d) whose degree is at most ``l(u) + l(v)``."""
    X = Fl(3)
    found = outcomes(X, 2, equivariant=True)
    assert len(found) == len(set(found)) == sum(len(outcomes(X, smaller)) for smaller in range(3))
    assert len(outcomes(X, 2, classical=True, equivariant=True)) == 5


def test_sampled_values_tell_polynomials_apart():
    """A sampled constant equals its polynomial and no other, and zero only if it is."""
    X = Fl(3)
    a, b = simple_roots(X)
    c = equivariant_terms(X.point, X.point, quantum=True)[X.point, (0, 0)]
    assert isinstance(c, Sampled)
    assert c == a * a * b + a * b * b
    assert c != a * a * b + 2 * a * b * b
    assert c != 0
    assert c == equivariant_terms(X.point, X.point, quantum=False)[X.point, (0, 0)]
    with pytest.raises(TypeError):
        hash(c)


def test_out_of_reach():
    """Constants with too many monomials, and varieties that localisation does not reach, are refused."""
    X = FlagVariety("E6/P1")
    with pytest.raises(OutOfReach, match="expected a constant of at most 130 monomials, got 20349"):
        equivariant_constant(Case(X, X.point, X.point, X.point, (0,)))
    with pytest.raises(OutOfReach, match="localisation stops at 1,000"):
        equivariant_terms(Fl(7).point, Fl(7).point, quantum=False)
