"""Polynomials in the simple roots, held against sympy."""

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from conjcheck import Fl, FlagVariety, RootPolynomial, simple_roots
from conjcheck.errors import NotationError
from conjcheck.geometry.polynomial import read_polynomial

X = Fl(4)
ROOTS = simple_roots(X)
SYMBOLS = sympy.symbols("alpha1:4")

polynomials = st.recursive(
    st.sampled_from([*range(3)]).map(lambda i: (ROOTS[i], SYMBOLS[i]))
    | st.integers(-3, 3).map(lambda n: (0 * ROOTS[0] + n, sympy.Integer(n))),
    lambda inner: st.tuples(st.sampled_from("+-*"), inner, inner).map(
        lambda t: {
            "+": (t[1][0] + t[2][0], t[1][1] + t[2][1]),
            "-": (t[1][0] - t[2][0], t[1][1] - t[2][1]),
            "*": (t[1][0] * t[2][0], t[1][1] * t[2][1]),
        }[t[0]]
    ),
    max_leaves=6,
)


@given(polynomials)
def test_arithmetic_is_that_of_sympy(pair):
    """Sums, differences and products are those of sympy, and a polynomial comes back from its sympy form."""
    ours, theirs = pair
    assert sympy.expand(ours.sympy() - theirs) == 0
    assert read_polynomial(theirs, 3) == ours
    assert bool(ours) == (sympy.expand(theirs) != 0)


@given(polynomials, st.tuples(*[st.integers(0, 100)] * 3))
def test_values_modulo_a_prime(pair, point):
    """A value modulo a prime is the residue of the value."""
    ours, theirs = pair
    assert ours.at(point, 101) == int(theirs.subs(dict(zip(SYMBOLS, point, strict=True)))) % 101


def test_equality_and_hash():
    """Equal polynomials are equal values; constants equal integers and hash like them."""
    a, b, _ = ROOTS
    assert (a + b) ** 2 == a * a + 2 * a * b + b**2
    assert a - a == 0
    assert hash(a - a + 5) == hash(5)
    assert a - a + 5 == 5
    assert {a + b: 1}[b + a] == 1
    assert a != b
    assert a != "alpha1"


def test_words():
    """Polynomials print with the roots of Bourbaki."""
    a, b, c = ROOTS
    assert str(2 * a * b - c**2 - 3) == "2 alpha1 alpha2 - alpha3^2 - 3"
    assert str(-a) == "-alpha1"
    assert str(a - a) == "0"
    assert repr(1 - a) == "-alpha1 + 1"


def test_shape():
    """Degree, homogeneity and positivity are read off the terms."""
    a, b, _ = ROOTS
    assert ((a * b + a).degree, (a * b + a).is_homogeneous, (a * b + a).is_positive) == (2, False, True)
    assert (a * b - a * a).is_homogeneous
    assert not (a * b - a * a).is_positive
    assert (0 * a).degree == 0
    assert (0 * a).is_positive


def test_refusals():
    """Polynomials of other ranks do not mix, and what is no polynomial with integer coefficients in the roots is not read."""
    with pytest.raises(NotationError, match="expected polynomials in 3 simple roots, got one in 8"):
        ROOTS[0] + simple_roots(FlagVariety("E8/P8"))[0]
    with pytest.raises(TypeError, match="expected a polynomial or an integer, got 'x'"):
        ROOTS[0] + "x"
    for answer in ("alpha1", None, 0.5, sympy.Symbol("x"), SYMBOLS[0] / 2, 1 / SYMBOLS[0], simple_roots(Fl(3))[0]):
        assert read_polynomial(answer, 3) is None
    assert read_polynomial(sympy.Integer(4), 3) == 4
    assert isinstance(read_polynomial(7, 3), RootPolynomial)
