"""``flag_varieties``: the members within the bounds, all of them, the smallest first."""

import pytest
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.families import CompleteFlags, Grassmannians, PartialFlags, ProjectiveSpaces, StepFlags, Varieties
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.strategies import flag_varieties


@pytest.mark.parametrize(
    ("family", "first"),
    [
        (Grassmannians(), Gr(1, 2)),
        (CompleteFlags(), Gr(1, 2)),
        (StepFlags(2), Fl(3)),
        (PartialFlags(), Gr(1, 2)),
        (Varieties("Fl(1,3;4)", "Gr(2,4)", "Fl(3)"), Fl(3)),
        (Varieties("E6/P1", "G2/B"), FlagVariety("G2/B")),
    ],
)
def test_it_shrinks_to_the_smallest_variety_of_the_family(smallest, family, first):
    """Nothing against it, the result is the first member; so it is the first that satisfies a condition."""
    assert smallest(flag_varieties(family)) is first
    last = max(X.dim for X in drawable(family))
    expected = next(X for X in drawable(family) if X.dim == last)
    assert smallest(flag_varieties(family), lambda X: X.dim == last) is expected


def drawable(family):
    """The members that are drawn by default, in order."""
    return list(family.up_to(5)) if family.last_rank is None else list(family)[:3]


def test_every_member_within_the_bounds_is_drawn_and_no_other(drawn):
    """``min_n``, ``max_n`` and ``max_classes`` are inclusive."""
    expected = {X for X in PartialFlags().up_to(5) if X.n >= 4 and len(X.classes) <= 30}
    assert set(drawn(flag_varieties(PartialFlags(), min_n=4, max_n=5, max_classes=30), 300)) == expected
    assert set(drawn(flag_varieties(Varieties("E6/P1", "Gr(2,4)")))) == {FlagVariety("E6/P1"), Gr(2, 4)}
    assert {X.n for X in drawn(flag_varieties(ProjectiveSpaces(), min_n=7))} == {7}


def test_a_family_that_ends_without_saying_so_is_no_trap(drawn):
    """A filtered family of which nothing is left beyond some n ends the list, not the patience."""
    assert set(drawn(flag_varieties(Grassmannians().where(lambda X: X.n == 4), max_n=6))) == {Gr(1, 4), Gr(2, 4), Gr(3, 4)}


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"on": Gr(2, 4)}, r"expected a family for on, got on=FlagVariety\('Gr\(2,4\)'\); write on=Grassmannians\(\)"),
        ({"on": Grassmannians(), "min_n": 1}, "expected an integer of 2 or more for min_n, got min_n=1"),
        ({"on": Grassmannians(), "max_n": 4.0}, r"for max_n, got max_n=4.0 \(float\)"),
        ({"on": Grassmannians(), "max_n": True}, r"for max_n, got max_n=True \(bool\)"),
        ({"on": Grassmannians(), "min_n": 6, "max_n": 5}, "expected max_n of at least min_n=6, got max_n=5"),
        ({"on": Grassmannians(), "max_classes": 0}, "expected an integer of 1 or more for max_classes"),
        (
            {"on": CompleteFlags(), "min_n": 4, "max_classes": 23},
            "expected at least one variety of complete flag varieties with 4 <= n",
        ),
        ({"on": Varieties("Gr(2,4)"), "min_n": 5}, "expected max_n of at least min_n=5, got max_n=4"),
    ],
)
def test_wrong_arguments_are_refused_at_once(arguments, message):
    """The error comes from the call, before anything is drawn, and names the argument."""
    with pytest.raises(InvalidArgument, match=message):
        flag_varieties(**arguments)
