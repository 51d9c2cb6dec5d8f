"""Families: they list what they promise, in the one order, and no more."""

from itertools import combinations, islice

import pytest

from conjcheck.errors import DeclarationError, NotationError
from conjcheck.geometry.families import CompleteFlags, Grassmannians, PartialFlags, ProjectiveSpaces, StepFlags, Varieties
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr


def everything(n):
    """All flag varieties of type A inside C^2, ..., C^n."""
    return {Fl(*steps, n=m) for m in range(2, n + 1) for size in range(1, m) for steps in combinations(range(1, m), size)}


@pytest.mark.parametrize(
    ("family", "belongs"),
    [
        (Grassmannians(), lambda X: X.is_grassmannian),
        (ProjectiveSpaces(), lambda X: X.steps == (1,)),
        (CompleteFlags(), lambda X: X.is_complete),
        (StepFlags(1), lambda X: len(X.steps) == 1),
        (StepFlags(2), lambda X: len(X.steps) == 2),
        (StepFlags(3), lambda X: len(X.steps) == 3),
        (PartialFlags(), lambda X: True),
        (Grassmannians().where(lambda X: X.n == 2 * X.steps[0]), lambda X: X.is_grassmannian and X.n == 2 * X.steps[0]),
    ],
)
def test_families_hold_what_they_say_in_order(family, belongs):
    """``up_to(6)`` is the sorted list of the members with n <= 6, ``of_rank`` its slices, ``in`` agrees, iteration starts
    the same.
    """
    expected = sorted(X for X in everything(6) if belongs(X))
    assert list(family.up_to(6)) == expected
    assert [X for rank in range(1, 6) for X in family.of_rank(rank)] == expected
    assert list(islice(family, len(expected))) == expected
    assert all((X in family) == belongs(X) for X in everything(5))
    assert "Gr(2,4)" not in family


def test_up_to_n_means_inside_c_n():
    """``up_to(3)`` has rank at most 2."""
    assert [X.name for X in PartialFlags().up_to(3)] == ["Gr(1,2)", "Gr(1,3)", "Gr(2,3)", "Fl(3)"]
    assert list(PartialFlags().up_to(1)) == []


def test_explicit_lists_are_sorted_finite_and_without_doubles():
    """``Varieties`` takes names and objects and ends."""
    family = Varieties("Fl(1,3;4)", Gr(2, 4), "A3/P2", FlagVariety("B2/B"))
    assert [X.name for X in family] == ["B2/B", "Gr(2,4)", "Fl(1,3;4)"]
    assert str(family) == family.name == "B2/B, Gr(2,4), Fl(1,3;4)"
    assert [X.name for X in family.up_to(3)] == ["B2/B"]
    assert family.of_rank(4) == []
    assert family.last_rank == 3


def test_names():
    """The names say what a family holds; ``where`` adds its words, or the name of the predicate."""

    def even(X):
        return X.n % 2 == 0

    assert str(Grassmannians()) == "Grassmannians"
    assert str(ProjectiveSpaces()) == "projective spaces"
    assert str(CompleteFlags()) == "complete flag varieties"
    assert str(StepFlags(2)) == "2-step flag varieties"
    assert str(PartialFlags()) == "partial flag varieties"
    assert str(Grassmannians().where(even, words="n even")) == "Grassmannians where n even"
    assert str(Grassmannians().where(even)) == "Grassmannians where even"
    assert str(Grassmannians().where(lambda X: X.n % 2 == 0)) == "Grassmannians where a predicate"


def test_where_can_be_repeated():
    """Two predicates hold both."""
    family = Grassmannians().where(lambda X: X.n == 4).where(lambda X: X.steps[0] > 1)
    assert family.of_rank(3) == [Gr(3, 4), Gr(2, 4)]


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: StepFlags(0), "expected a number of steps of 1 or more, got m=0"),
        (lambda: StepFlags("2"), "expected a number of steps of 1 or more, got m='2'"),
        (lambda: Varieties(), "expected at least one flag variety, got none"),
        (lambda: Grassmannians().where("n > 3"), "expected a function of one flag variety, got predicate='n > 3'"),
    ],
)
def test_refusals(call, message):
    """A family that cannot be is refused with the argument named."""
    with pytest.raises(DeclarationError) as error:
        call()
    assert str(error.value) == message


def test_lists_refuse_names_that_denote_nothing():
    """``Varieties`` passes on what is wrong with a name."""
    with pytest.raises(NotationError, match=r"got 'Gr\[2,4\]'"):
        Varieties("Gr[2,4]")
