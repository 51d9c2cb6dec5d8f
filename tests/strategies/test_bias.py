"""Depth of classes: what it is, and that it tells where the large coefficients are."""

import numpy as np
import pytest

from conjcheck import product
from conjcheck.geometry.families import PartialFlags
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.geometry.symmetries import seidel
from conjcheck.strategies.bias import depths


@pytest.mark.parametrize("X", [Gr(2, 5), Fl(4), Fl(1, 3, n=5), FlagVariety("C3/P2")], ids=str)
def test_depth_is_the_least_length_in_the_seidel_orbit(X):
    """It is constant along orbits, at most the length, and 0 exactly for the Seidel classes."""
    depth, group = depths(X), seidel(X)
    assert all((depth[images] == depth).all() for images in group.images)
    assert all(depth[u.index] <= u.length for u in X.classes)
    assert set(np.flatnonzero(depth == 0)) == set(group.units)


@pytest.mark.parametrize("X", [Fl(4), Gr(3, 6)], ids=str)
def test_depth_zero_means_one_term(X):
    """A product with a Seidel class is one term with coefficient 1."""
    for index in np.flatnonzero(depths(X) == 0):
        for v in X.classes:
            assert list(product(X.classes[index], v).values()) == [1]


def test_without_bias_on_few_classes_no_coefficient_is_missed():
    """The varieties of type A with fewer than 20 classes and n <= 6 have coefficients 0 and 1 only."""
    small = [X for X in PartialFlags().up_to(6) if len(X.classes) < 20]
    assert [X.name for X in small if not X.is_grassmannian] == ["Fl(3)", "Fl(1,2;4)", "Fl(1,3;4)", "Fl(2,3;4)"]
    assert all(max(product(u, v).values()) == 1 for X in small for u in X.classes for v in X.classes)


def test_the_largest_depth_has_the_coefficients_above_one():
    """On ``Gr(3,6)`` the rows with a coefficient of 2 or more are those of two classes of depth 3."""
    X = Gr(3, 6)
    depth = depths(X)
    for u in X.classes:
        for v in X.classes:
            assert (max(product(u, v).values()) > 1) == (depth[u.index] == depth[v.index] == 3)
