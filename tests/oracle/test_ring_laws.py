"""The laws that hold on every flag variety, on spaces and classes drawn at random: none of them knows how the oracle computes."""

from cmath import exp, pi
from itertools import combinations, pairwise
from math import prod

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import Fl, Gr, constant, product
from conjcheck.oracle.comparison import RecursionEngine

steps_of = st.integers(2, 5).flatmap(lambda n: st.tuples(st.just(n), st.sets(st.integers(1, n - 1), min_size=1)))
varieties = steps_of.map(lambda pair: Fl(*sorted(pair[1]), n=pair[0]))
larger = st.sampled_from([Fl(6), Fl(1, 3, 5, n=6), Fl(2, 4, n=6), Fl(3, 4, n=7), Gr(3, 7), Fl(1, 6, n=7), Gr(4, 8)])


def several(count, spaces=varieties):
    """Tuples of classes of one variety."""
    return spaces.flatmap(lambda X: st.tuples(*[st.sampled_from(X.classes)] * count))


def weight(X, d):
    return sum(a * b for a, b in zip(d, X.q_degrees, strict=True))


def element(*classes):
    """The element of QH*(X) that is one Schubert class."""
    return {(u, (0,) * len(u.variety.marked)): 1 for u in classes}


@settings(deadline=None)
@given(several(2, varieties | larger))
def test_constants_are_positive_and_obey_the_degree_axiom(pair):
    """Law 1: every term is a positive int, and ``l(u) + l(v) = l(w) + sum d_i deg q_i``."""
    u, v = pair
    X = u.variety
    found = product(u, v)
    assert found, "no quantum product of Schubert classes vanishes (Fulton, Woodward 2004, Corollary 9.3, from memory)"
    for (w, d), count in found.items():
        assert type(count) is int
        assert count > 0
        assert w.variety is X
        assert min(d) >= 0
        assert u.length + v.length == w.length + weight(X, d)


@settings(deadline=None)
@given(several(1, varieties | larger))
def test_the_class_of_length_zero_is_the_unit(single):
    """Law 1: ``1 * sigma_u = sigma_u``."""
    (u,) = single
    assert product(u.variety.identity, u) == product(u, u.variety.identity) == element(u)


@settings(deadline=None)
@given(several(2, varieties | larger))
def test_products_commute(pair):
    """Law 1."""
    u, v = pair
    assert product(u, v) == product(v, u)


def test_products_associate(times):
    """Law 1, by full bilinear extension: ``(u * v) * w = u * (v * w)``."""

    @settings(deadline=None)
    @given(several(3))
    def check(triple):
        u, v, w = map(element, triple)
        assert times(times(u, v), w) == times(u, times(v, w))

    check()


@settings(deadline=None)
@given(several(3), st.data())
def test_three_insertions_are_symmetric(triple, data):
    """Law 2: ``N_{u,v}^{w,d} = N_{u,w^vee}^{v^vee,d}``, for a term that occurs and for an arbitrary case."""
    u, v, w = triple
    terms = list(product(u, v))
    w, d = data.draw(st.sampled_from([*terms, (w, tuple(0 for _ in u.variety.marked))]))
    assert constant(u, v, w, d) == constant(u, w.dual, v.dual, d) == constant(v, w.dual, u.dual, d)


@settings(deadline=None)
@given(several(2, varieties | larger))
def test_whole_rows_are_symmetric(pair):
    """Law 2 for rows: ``sigma_u * sigma_v`` has at ``(w, d)`` what ``sigma_u * sigma_{w^vee}`` has at ``(v^vee, d)``."""
    u, v = pair
    for (w, d), count in list(product(u, v).items())[:10]:
        assert product(u, w.dual)[v.dual, d] == count


@settings(deadline=None)
@given(varieties)
def test_poincare_duality(X):
    """Law 2: the coefficient of ``[pt]`` at q = 0 in ``sigma_u * sigma_v`` is 1 for ``v = u^vee``, else 0."""
    zero = (0,) * len(X.marked)
    for u in X.classes[:12]:
        for v in X.of_length(X.dim - u.length):
            assert product(u, v).get((X.point, zero), 0) == (v is u.dual)


@settings(deadline=None)
@given(several(2, varieties | larger))
def test_the_automorphism_of_the_diagram(pair):
    """Law 3: ``w -> w0 w w0`` takes ``Fl(k; n)`` to ``Fl(n - k; n)`` and reverses degrees."""
    u, v = pair
    X = u.variety
    n = X.n
    Y = Fl(*(n - k for k in reversed(X.steps)), n=n)

    def turned(w):
        return Y.schubert(permutation=[n + 1 - x for x in reversed(w.permutation)])

    expected = {(turned(w), d[::-1]): count for (w, d), count in product(u, v).items()}
    assert product(turned(u), turned(v)) == expected


def rotated(u, i):
    """``v_i u`` on G/P and the exponent of q: every value lowered by i modulo n; ``omega_i^vee - u^{-1} omega_i^vee`` on the
    steps.
    """
    X = u.variety
    values = [(x - 1 - i) % X.n + 1 for x in u.permutation]
    cuts = [0, *X.steps, X.n]
    line = [x for a, b in pairwise(cuts) for x in sorted(values[a:b])]
    return X.schubert(permutation=line), tuple(min(k, i) - sum(x <= i for x in u.permutation[:k]) for k in X.steps)


@pytest.mark.parametrize("multiply", [product, RecursionEngine().direct_row], ids=["product", "direct"])
def test_seidel_elements_multiply_by_relabelling(multiply):
    """Law 4 (Seidel 1997; Chaput, Manivel, Perrin 2009): ``sigma_{v_i} * sigma_w = q^(omega_i^vee - w^-1 omega_i^vee)
    sigma_{v_i w}``.
    """

    @settings(deadline=None)
    @given(several(1, varieties | st.sampled_from([Fl(6), Fl(2, 4, n=6)])), st.data())
    def check(single, data):
        (u,) = single
        X = u.variety
        i = data.draw(st.integers(0, X.n - 1))
        special, nothing = rotated(X.identity, i)
        assert not any(nothing)
        image, d = rotated(u, i)
        assert multiply(special, u) == {(image, d): 1}

    check()


@settings(deadline=None)
@given(several(2), st.data())
def test_seidel_symmetry_of_all_constants(pair, data):
    """Law 4: rotating u and v independently relabels the product: ``q^(a + b) (gu) * (hv) = S_g * S_h * (u * v)``."""
    u, v = pair
    X = u.variety
    i, j = data.draw(st.integers(0, X.n - 1)), data.draw(st.integers(0, X.n - 1))
    (image, a), (partner, b) = rotated(u, i), rotated(v, j)
    expected = {}
    for (w, d), count in product(u, v).items():
        once, e = rotated(w, j)
        twice, f = rotated(once, i)
        expected[twice, tuple(x + y + z - s - t for x, y, z, s, t in zip(d, e, f, a, b, strict=True))] = count
    assert product(image, partner) == expected


@settings(deadline=None)
@given(st.integers(2, 5).flatmap(lambda n: st.tuples(*[st.sampled_from(Fl(n).classes)] * 2)))
def test_fl_n_sits_in_fl_n_plus_1(pair):
    """Law 5: the constants with d = 0 are stable: appending the fixed point n + 1 changes none, and adds none inside ``S_n``."""
    u, v = pair
    n = u.variety.n
    Y = Fl(n + 1)
    big_u, big_v = (Y.schubert(permutation=(*w.permutation, n + 1)) for w in (u, v))
    small = {(*w.permutation, n + 1): count for (w, d), count in product(u, v).items() if not any(d)}
    big = {w.permutation: count for (w, d), count in product(big_u, big_v).items() if not any(d) and w.permutation[-1] == n + 1}
    assert small == big


@settings(deadline=None)
@given(st.integers(2, 5).flatmap(lambda n: st.tuples(st.just(n), st.sets(st.integers(1, n - 1), min_size=1))), st.data())
def test_the_classical_ring_of_g_p_sits_in_that_of_g_b(pair, data):
    """The pull-back ``H*(G/P) -> H*(G/B)`` sends ``sigma_w`` to ``sigma_w``: constants with d = 0 are those of the complete
    flags.
    """
    n, steps = pair
    X = Fl(*sorted(steps), n=n)
    u, v = data.draw(st.sampled_from(X.classes)), data.draw(st.sampled_from(X.classes))
    above = product(Fl(n).schubert(permutation=u.permutation), Fl(n).schubert(permutation=v.permutation))
    assert {w.permutation: count for (w, d), count in product(u, v).items() if not any(d)} == {
        w.permutation: count for (w, d), count in above.items() if not any(d)
    }


def alternant(points, exponents):
    """The determinants ``det(x_i^e_j)`` for many tuples of points, ``(J, k) -> (J,)``."""
    return np.linalg.det(points[:, :, None] ** np.array(exponents)[None, None, :])


def roots_of_unity(k, n):
    """All k-subsets of the n-th roots of ``(-1)^(k-1)``, ``(binomial, k)``."""
    shift = (k - 1) % 2 / 2
    return np.array([[exp(2j * pi * (t + shift) / n) for t in subset] for subset in combinations(range(n), k)])


def schur_values(X, points):
    """``s_l(x_J)`` for all classes of a Grassmannian, by the bialternant formula, ``(classes, J)``."""
    k = X.steps[0]
    below = alternant(points, range(k - 1, -1, -1))
    shapes = [(*u.partition, *[0] * k)[:k] for u in X.classes]
    return np.array([alternant(points, [part + k - 1 - i for i, part in enumerate(shape)]) / below for shape in shapes])


@pytest.mark.parametrize("X", [Gr(k, n) for n in range(2, 8) for k in range(1, n)], ids=str)
def test_bertram_vafa_intriligator_in_floating_point(X):
    """Law 6 at q = 1 over the complex numbers; the reference is numeric, hence the tolerance 1e-6 on integers."""
    k, n = X.steps[0], X.n
    points = roots_of_unity(k, n)
    values = schur_values(X, points)
    measure = np.array([prod(abs(a - b) ** 2 for a, b in combinations(row, 2)) for row in points]) / n**k
    expected = np.einsum("aj,bj,cj,j->abc", values, values, values.conj(), measure)
    found = np.zeros(expected.shape)
    for u in X.classes:
        for v in X.classes:
            for (w, _), count in product(u, v).items():
                found[u.index, v.index, w.index] += count
    assert np.abs(found - expected).max() < 1e-6


@pytest.mark.parametrize("X", [Gr(1, 4), Gr(2, 4), Gr(2, 5), Gr(3, 6), Gr(2, 7)], ids=str)
def test_spectrum_of_the_first_chern_class(X):
    """Law 6: the eigenvalues of ``c_1 *`` at q = 1 are n times the sums of the sets J, compared through power sums (traces)."""
    (divisor,) = X.of_length(1)
    matrix = np.zeros((len(X.classes),) * 2, dtype=object)
    for u in X.classes:
        for (w, _), count in product(divisor, u).items():
            matrix[w.index, u.index] += X.n * count
    eigenvalues = X.n * roots_of_unity(X.steps[0], X.n).sum(axis=1)
    power = np.eye(len(X.classes), dtype=object)
    for exponent in range(1, 2 * X.n + 1):
        power = power @ matrix
        assert abs(np.trace(power) - (eigenvalues**exponent).sum()) < 1e-6 * float(X.n * X.steps[0]) ** exponent


@settings(deadline=None)
@given(several(2))
def test_degrees_of_a_product_have_one_smallest(pair):
    """Among the powers of q in a product of Schubert classes one divides all others (G/B: Postnikov, Quantum Bruhat graph
    and Schubert polynomials, Proc. AMS 133 (2005); G/P: Buch, Chung, Li, Mihalcea 2020; both from memory)."""
    degrees = {d for _, d in product(*pair)}
    least = tuple(map(min, zip(*degrees, strict=True)))
    assert least in degrees
