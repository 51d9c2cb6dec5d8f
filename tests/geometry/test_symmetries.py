"""Seidel elements and diagram automorphisms as relabellings: formulas of type A, group laws, orbits."""

import itertools
from collections import Counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import product
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.geometry.symmetries import count_row_orbits, diagram_images, orbit_of_case, seidel

SPACES = [Gr(1, 2), Gr(2, 4), Gr(2, 5), Fl(3), Fl(4), Fl(1, 3, n=4), Fl(1, 2, n=4), Fl(2, 3, n=5)]
OTHERS = [FlagVariety(name) for name in ("B2/B", "B3/P2", "C3/P1,3", "D4/B", "D5/P5", "E6/P1", "G2/B")]


@st.composite
def varieties(draw, most=6):
    """Flag varieties of type A."""
    n = draw(st.integers(2, most))
    return Fl(*sorted(draw(st.sets(st.integers(1, n - 1), min_size=1))), n=n)


def block_sorted(w, X):
    """The minimal representative of a permutation."""
    cuts = [0, *X.steps, X.n]
    return tuple(x for a, b in itertools.pairwise(cuts) for x in sorted(w[a:b]))


@settings(deadline=None)
@given(varieties())
def test_seidel_elements_of_type_a_rotate_the_values(X):
    """``v_i`` lowers every value by i modulo n, and q takes the exponent ``#{p <= k: p <= i} - #{p <= k: w(p) <= i}`` at step k.

    Formula of the exponent: ``omega_i^vee - w^{-1} omega_i^vee`` paired with ``omega_k``.
    """
    group = seidel(X)
    assert len(group.units) == X.n
    for i in range(X.n):
        for u in X.classes:
            moved = [(x - 1 - i) % X.n + 1 for x in u.permutation]
            assert X.classes[group.images[i, u.index]].permutation == block_sorted(moved, X)
            exponents = [min(k, i) - sum(x <= i for x in u.permutation[:k]) for k in X.steps]
            assert group.shifts[i, u.index].tolist() == exponents


@pytest.mark.parametrize("X", [*SPACES, *OTHERS], ids=str)
def test_seidel_elements_form_a_group_that_keeps_degrees(X):
    """``table`` is a commutative group, ``images`` an action of it, and ``S_g * sigma_u = q^shift sigma_{g u}`` keeps the
    degree.
    """
    group = seidel(X)
    size = len(group.units)
    assert group.images[0].tolist() == list(range(len(X.classes)))
    assert not group.shifts[0].any()
    assert (group.table == group.table.T).all()
    for g in range(size):
        assert sorted(group.images[g].tolist()) == list(range(len(X.classes)))
        assert group.table[g, group.inverse(g)] == 0
        assert group.units[g] == group.images[g, 0]
        assert (group.shifts[g] >= 0).all()
        unit = X.classes[group.units[g]]
        for u in X.classes:
            image = X.classes[group.images[g, u.index]]
            assert unit.length + u.length == image.length + sum(
                a * b for a, b in zip(group.shifts[g, u.index], X.q_degrees, strict=True)
            )
        for h in range(size):
            product = group.table[g, h]
            assert (group.images[g][group.images[h]] == group.images[product]).all()
            # S_g * (S_h * u) = S_g * S_h * u, with the exponent of S_g * S_h taken off.
            both = group.shifts[h] + group.shifts[g][group.images[h]]
            assert (both == group.shifts[product] + group.shifts[g, group.units[h]]).all()


@pytest.mark.parametrize(
    ("name", "size"), [("B3/B", 2), ("C3/B", 2), ("D4/B", 4), ("D5/P1", 4), ("E6/P1", 3), ("E7/P7", 2), ("G2/B", 1), ("F4/P1", 1)]
)
def test_order_of_the_seidel_group(name, size):
    """It is the fundamental group of the adjoint group."""
    assert len(seidel(FlagVariety(name)).units) == size


@settings(deadline=None)
@given(varieties())
def test_the_automorphism_of_type_a(X):
    """``w -> w0 w w0`` goes to ``Fl(n - k; n)`` and reverses degrees; partitions are transposed."""
    if X.n == 2:
        assert diagram_images(X) == []
        return
    ((Y, images, places),) = diagram_images(X)
    assert Y is Fl(*(X.n - k for k in reversed(X.steps)), n=X.n)
    assert places == tuple(reversed(range(len(X.steps))))
    for u in X.classes:
        image = Y.classes[images[u.index]]
        assert image.permutation == tuple(X.n + 1 - x for x in reversed(u.permutation))
        if X.is_grassmannian:
            assert image.partition == tuple(sum(part > j for part in u.partition) for j in range(max(u.partition, default=0)))


def test_triality():
    """D4 has five automorphisms beside the identity; they move ``Q^6 = D4/P1`` to ``D4/P3`` and ``OG(4,8) = D4/P4`` and keep lengths."""
    X = FlagVariety("D4/P1")
    found = diagram_images(X)
    assert Counter(Y.name for Y, _, _ in found) == {"Q^6": 1, "D4/P3": 2, "OG(4,8)": 2}
    for Y, images, _ in found:
        assert [Y.classes[i].length for i in images] == [u.length for u in X.classes]


@st.composite
def cases(draw):
    """Cases on small spaces that obey the degree axiom, so that they may be nonzero."""
    X = draw(st.sampled_from([X for X in SPACES if len(X.classes) <= 12]))
    u, v, w = (draw(st.sampled_from(X.classes)) for _ in range(3))
    return Case(X, u, v, w, tuple(draw(st.integers(0, 2)) for _ in X.marked))


@settings(deadline=None)
@given(cases())
def test_orbits_of_cases_are_classes_of_an_equivalence(case):
    """A case is in its orbit, its orbit is that of each of its members, and the degree axiom holds for all or for none."""
    found = orbit_of_case(case)
    assert case in found
    assert {other.obeys_degree_axiom for other in found} == {case.obeys_degree_axiom}
    assert all(orbit_of_case(other) == found for other in sorted(found)[:3])


@settings(deadline=None)
@given(cases())
def test_classical_orbits_stay_classical(case):
    """Without Seidel elements an orbit is smaller, holds the case, and keeps ``sum d_i``: a classical case meets classical
    ones only.
    """
    found = orbit_of_case(case, seidel_too=False)
    assert case in found
    assert found <= orbit_of_case(case)
    assert {sum(other.d) for other in found} == {sum(case.d)}
    assert all(orbit_of_case(other, seidel_too=False) == found for other in sorted(found)[:3])


def test_orbits_hold_swapped_and_dual_cases():
    """Law 2 by hand on ``Gr(2,4)``: the orbit holds the factors exchanged, and ``(u, w^vee; v^vee)``."""
    case = Case.parse("Gr(2,4): (1) * (2,1) -> (2,2), q^(0)")
    found = orbit_of_case(case, seidel_too=False)
    assert Case.parse("Gr(2,4): (2,1) * (1) -> (2,2), q^(0)") in found
    assert Case.parse("Gr(2,4): (1) * () -> (1), q^(0)") in found
    assert Case.parse("Gr(2,4): () * (1) -> (1), q^(0)") in found


def test_seidel_orbits_by_hand():
    """On P^1 all nonzero constants are one orbit: 1 * 1 = 1, 1 * p = p, p * 1 = p, p * p = q."""
    names = ["() * () -> (), q^(0)", "(1) * () -> (1), q^(0)", "() * (1) -> (1), q^(0)", "(1) * (1) -> (), q^(1)"]
    expected = {Case.parse(f"Gr(1,2): {name}") for name in names}
    assert all(orbit_of_case(case) == expected for case in expected)


def test_how_much_symmetry_saves():
    """The 45 nonzero constants of ``Fl(3)`` are two orbits: 27 with a Seidel class (123, 231, 312) among the factors, one in
    each of the 27 rows, and the two terms in each of the 9 rows without."""
    X = Fl(3)
    left = {Case(X, u, v, w, d) for u in X.classes for v in X.classes for (w, d) in product(u, v)}
    assert len(left) == 45
    sizes = []
    while left:
        found = orbit_of_case(min(left))
        assert found <= left
        left -= found
        sizes.append(len(found))
    assert sorted(sizes) == [18, 27]


@pytest.mark.parametrize("name", ["Gr(2,4)", "Fl(3)", "Gr(2,5)", "LG(2,4)", "Q^3"])
def test_rows_of_one_orbit_have_products_of_one_shape(name):
    """What acts on products moves classes and shifts degrees: rows whose products differ in their coefficients lie in different orbits."""
    X = FlagVariety(name)
    by_shape = {}
    for u in X.classes:
        for v in X.classes:
            by_shape.setdefault(tuple(sorted(product(u, v).values())), []).append(Row(X, u, v))
    everything = [row for group in by_shape.values() for row in group]
    apart = [count_row_orbits(group) for group in by_shape.values()]
    assert count_row_orbits(everything) == (sum(count for count, _ in apart), True)
    assert count_row_orbits(everything)[0] < count_row_orbits(everything, seidel_too=False)[0] < len(everything)


def test_row_orbits_by_hand():
    """On P^2 all nine rows are one orbit; swapping alone leaves six of them, and without time there is at least one."""
    X = FlagVariety("Gr(1,3)")
    everything = [Row(X, u, v) for u in X.classes for v in X.classes]
    assert count_row_orbits(everything) == (1, True)
    assert count_row_orbits(everything, seidel_too=False, diagrams_too=False) == (6, True)
    assert count_row_orbits(everything, deadline=0.0) == (1, False)
