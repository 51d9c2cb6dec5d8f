"""Steps against the oracle's Chevalley products: the same supports."""

import pytest

from conjcheck import product
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.geometry.symmetries import seidel
from conjcheck.strategies.steps import home, ladder, steps

SPACES = [Gr(2, 5), Fl(4), Fl(1, 3, n=4), Fl(2, 3, n=5)]


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_steps_are_the_terms_of_divisor_products(X):
    """For every class and every divisor."""
    for place, node in enumerate(X.marked):
        divisor = X.schubert(word=(node,))
        for u in X.classes:
            assert {(step.w, step.d) for step in steps(u) if place in step.divisors} == set(product(divisor, u))


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_a_ladder_leads_to_its_class(X):
    """The product of the divisors of ``ladder(v)`` contains ``sigma_v``, and there are ``v.length`` of them."""
    for v in X.classes:
        reached = {(X.identity, (0,) * len(X.marked))}
        for place in ladder(v):
            reached = {
                (step.w, tuple(x + y for x, y in zip(d, step.d, strict=True)))
                for w, d in reached
                for step in steps(w)
                if place in step.divisors
            }
        assert (v, (0,) * len(X.marked)) in reached
        assert len(ladder(v)) == v.length


@pytest.mark.parametrize("X", [*SPACES, FlagVariety("C3/P3"), FlagVariety("G2/B")], ids=str)
def test_home_is_the_first_class_of_the_seidel_orbit(X):
    """``v = g a`` with a the first of all ``h v``."""
    group = seidel(X)
    for v in X.classes:
        g, a = home(v)
        assert group.images[g, a.index] == v.index
        assert a.index == min(group.images[:, v.index])


def test_steps_of_other_types_obey_the_degree_axiom():
    """``l(u) + 1 = l(w) + sum d_i deg q_i`` on exceptional and symplectic varieties, and every divisor leads somewhere."""
    for name in ("G2/B", "C3/P2", "B3/P1,3", "E6/P1"):
        X = FlagVariety(name)
        for u in X.classes:
            assert {place for step in steps(u) for place in step.divisors} == set(range(len(X.marked)))
            for step in steps(u):
                assert u.length + 1 == step.w.length + sum(x * y for x, y in zip(step.d, X.q_degrees, strict=True))
