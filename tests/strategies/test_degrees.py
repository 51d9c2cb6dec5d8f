"""``degrees``: the right total, every degree, the smallest first."""

from itertools import product

import pytest
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.case import degrees_of_total
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.strategies import degrees

SPACES = [Gr(2, 4), Fl(1, 3, n=4), Fl(1, 2, n=4), Fl(1, 2, 5, n=6), FlagVariety("G2/B")]


def size(d):
    """The order of degrees."""
    return sum(d), d


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_every_degree_of_a_total_is_drawn(X, drawn):
    """``total=`` gives the degrees of that total, all of them; ``max_total=`` those of the smaller totals too."""
    for total in (0, 6, 9):
        exact = set(degrees_of_total(X, total))
        if exact:
            assert set(drawn(degrees(X, total=total), 60)) == exact
        upper = {d for t in range(total + 1) for d in degrees_of_total(X, t)}
        examples = drawn(degrees(X, max_total=total), 150)
        assert set(examples) <= upper
        assert len(set(examples)) > 0.6 * len(upper)


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_shrinking_ends_at_the_smallest_degree(X, smallest):
    """To 0 below a bound, to the fewest units of a total, and to the unit vector when one entry must be positive."""
    assert smallest(degrees(X, max_total=12)) == (0,) * len(X.marked)
    for total in range(13):
        if degrees_of_total(X, total):
            assert size(smallest(degrees(X, total=total))) == min(map(size, degrees_of_total(X, total)))
    for k in range(len(X.marked)):
        unit = tuple(int(k == j) for j in range(len(X.marked)))
        assert smallest(degrees(X, max_total=12), lambda d, k=k: d[k] > 0) == unit


def test_large_degrees_cost_no_enumeration(drawn):
    """``Fl(8)`` has 1.3 million degrees of total 56; none of them is listed."""
    for d in drawn(degrees(Fl(8), total=56), 20):
        assert sum(2 * x for x in d) == 56
    degrees_of_total.cache_clear()
    assert degrees_of_total.cache_info().currsize == 0
    drawn(degrees(Fl(8), max_total=56), 20)
    assert degrees_of_total.cache_info().currsize == 0


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({}, "expected exactly one of total= and max_total=, got total=None and max_total=None"),
        ({"total": 3, "max_total": 3}, "expected exactly one of total= and max_total=, got total=3 and max_total=3"),
        ({"total": 5}, r"expected a sum of the degrees \(2, 2\) of the q_i on Fl\(3\), got total=5"),
        ({"total": -2}, "expected an integer of 0 or more for total, got total=-2"),
        ({"max_total": 2.0}, r"for max_total, got max_total=2.0 \(float\)"),
    ],
)
def test_wrong_arguments_are_refused_at_once(arguments, message):
    """The error names the arguments."""
    with pytest.raises(InvalidArgument, match=message):
        degrees(Fl(3), **arguments)


def test_a_total_that_is_no_sum_is_refused_and_every_sum_accepted():
    """Refusal and ``degrees_of_total`` agree for the totals up to 9 on every variety here."""
    for X, total in product(SPACES, range(10)):
        if degrees_of_total(X, total):
            degrees(X, total=total)
        else:
            with pytest.raises(InvalidArgument):
                degrees(X, total=total)
