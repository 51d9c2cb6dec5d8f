"""Families: they list what they promise, in the one order, and no more."""

from itertools import combinations, islice

import pytest

from conjcheck.errors import DeclarationError, NotationError
from conjcheck.geometry import families
from conjcheck.geometry.cartan import CartanType, positive_roots
from conjcheck.geometry.families import (
    Adjoint,
    Cominuscule,
    CompleteFlags,
    Grassmannians,
    HomogeneousSpaces,
    IsotropicGrassmannians,
    LagrangianGrassmannians,
    Minuscule,
    OrthogonalGrassmannians,
    PartialFlags,
    ProjectiveSpaces,
    StepFlags,
    Varieties,
)
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr
from conjcheck.geometry.weyl import number_of_cosets


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


RANKS = {"A": range(1, 6), "B": range(2, 6), "C": range(2, 6), "D": range(4, 6), "E": (), "F": (4,), "G": (2,)}
EVERYTHING = {
    FlagVariety(f"{letter}{rank}/P{','.join(map(str, marked))}")
    for letter, ranks in RANKS.items()
    for rank in ranks
    for size in range(1, rank + 1)
    for marked in combinations(range(1, rank + 1), size)
}


def highest(X):
    """The highest root of the type, and the coroot of greatest height."""
    pairs = positive_roots(X.kind)
    return pairs[-1][0], max((coroot for _, coroot in pairs), key=sum)


def adjoint(X):
    """Whether the marked nodes are those not orthogonal to the highest root: its product with the other coroots is 0, theirs positive."""
    root, _ = highest(X)
    unit = [tuple(int(i == j) for i in range(X.rank)) for j in range(X.rank)]
    roots = {alpha for alpha, _ in positive_roots(X.kind)}
    lowered = [tuple(a - b for a, b in zip(root, unit[j], strict=True)) for j in range(X.rank)]
    return X.marked == tuple(j + 1 for j in range(X.rank) if lowered[j] in roots or not any(lowered[j]))


@pytest.mark.parametrize(
    ("family", "belongs"),
    [
        (Cominuscule(), lambda X: len(X.marked) == 1 and highest(X)[0][X.marked[0] - 1] == 1),
        (Minuscule(), lambda X: len(X.marked) == 1 and highest(X)[1][X.marked[0] - 1] == 1),
        (Adjoint(), adjoint),
        (IsotropicGrassmannians(), lambda X: X.kind.letter in "BCD" and len(X.marked) == 1),
        (LagrangianGrassmannians(), lambda X: X.name.startswith("LG(")),
        (OrthogonalGrassmannians(), lambda X: X.is_maximal_isotropic and X.kind.letter != "C"),
        (CompleteFlags("ABCDEFG"), lambda X: X.is_complete),
        (CompleteFlags(types="GDA"), lambda X: X.is_complete and X.kind.letter in "ADG"),
        (HomogeneousSpaces(), lambda X: True),
        (HomogeneousSpaces("DF", most_classes=200), lambda X: X.kind.letter in "DF" and X.number_of_classes <= 200),
        (HomogeneousSpaces(types="B").where(lambda X: len(X.marked) == 2), lambda X: X.kind.letter == "B" and len(X.marked) == 2),
    ],
    ids=str,
)
def test_families_of_all_types_hold_what_they_say_in_order(family, belongs):
    """Up to rank 5: the members among all G/P, sorted, once each; ``in`` agrees."""
    expected = sorted(X for X in EVERYTHING if belongs(X))
    assert list(family.up_to(6)) == expected
    assert all((X in family) == belongs(X) for X in EVERYTHING if X.rank <= 3)


def test_families_by_hand():
    """The classification, by name (standard): E, F and G occur at their ranks only; families of these types alone end."""

    def names(family, rank, letters="ABCDEFG"):
        return [X.name for X in family.of_rank(rank) if X.kind.letter in letters]

    assert names(Cominuscule(), 3) == ["Gr(1,4)", "Gr(3,4)", "Gr(2,4)", "Q^5", "LG(3,6)"]
    assert names(Minuscule(), 3) == ["Gr(1,4)", "Gr(3,4)", "Gr(2,4)", "IG(1,6)", "OG(3,7)"]
    assert names(Cominuscule(), 5, "D") == names(Minuscule(), 5, "D") == ["Q^8", "D5/P4", "OG(5,10)"]
    for family in (Cominuscule(), Minuscule()):
        assert names(family, 6, "EFG") == ["E6/P1", "E6/P6"]
        assert names(family, 7, "EFG") == ["E7/P7"]
        assert names(family, 8, "EFG") == names(family, 4, "EFG") == names(family, 2, "EFG") == []
    assert names(Adjoint(), 1) == ["Gr(1,2)"]
    assert names(Adjoint(), 2) == ["OG(2,5)", "IG(1,4)", "G2/P2", "Fl(3)"]
    assert names(Adjoint(), 3) == ["IG(1,6)", "OG(2,7)", "Fl(1,3;4)"]
    assert [*names(Adjoint(), 6, "EFG"), *names(Adjoint(), 7, "EFG"), *names(Adjoint(), 8, "EFG")] == ["E6/P2", "E7/P1", "E8/P8"]
    assert names(Adjoint(), 9, "EFG") == []
    assert [X.name for X in CompleteFlags("EFG")] == ["G2/B", "F4/B", "E6/B", "E7/B", "E8/B"]
    assert [X.name for X in HomogeneousSpaces("G")] == ["G2/P1", "G2/P2", "G2/B"]
    assert len(list(HomogeneousSpaces("EFG", most_classes=10**9))) == 3 + 15 + 63 + 127 + 255
    assert CompleteFlags("AE").last_rank is None
    assert CompleteFlags("A").of_rank(3) == CompleteFlags().of_rank(3) == [Fl(4)]


def test_a_rank_is_cheap(monkeypatch):
    """Rank 16 has 4 * 65,535 G/P; the listing counts the classes of those it lists and of at most 15 others for each of them."""
    counted = []
    monkeypatch.setattr(families, "number_of_cosets", lambda kind, marked: counted.append(marked) or number_of_cosets(kind, marked))
    found = HomogeneousSpaces().of_rank(16)
    assert len(found) < len(counted) <= 4 * 16 + 15 * len(found) < 2_000
    assert {X.kind for X in found} == {CartanType(letter, 16) for letter in "ABCD"}
    assert max(X.number_of_classes for X in found) <= 50_000
    assert FlagVariety("A16/P1,2,16") in found
    assert FlagVariety("OG(16,33)") not in found


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
    assert str(CompleteFlags("A")) == "complete flag varieties"
    assert str(CompleteFlags("GA")) == "complete flag varieties of types A, G"
    assert str(HomogeneousSpaces("C")) == "homogeneous spaces G/P of type C with at most 50,000 classes"
    assert str(HomogeneousSpaces(most_classes=9)) == "homogeneous spaces G/P of all types with at most 9 classes"
    assert str(Cominuscule()) == "cominuscule varieties"
    assert str(Minuscule()) == "minuscule varieties"
    assert str(Adjoint()) == "adjoint varieties"
    assert str(IsotropicGrassmannians()) == "isotropic Grassmannians"
    assert str(LagrangianGrassmannians()) == "Lagrangian Grassmannians"
    assert str(OrthogonalGrassmannians()) == "maximal orthogonal Grassmannians"
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
        (lambda: CompleteFlags(""), "expected Cartan letters such as 'ABCD', got types=''"),
        (lambda: CompleteFlags(["A"]), "expected Cartan letters such as 'ABCD', got types=['A']"),
        (lambda: HomogeneousSpaces("ABX"), "expected different Cartan letters out of ABCDEFG, got 'X' as letter 3 in types='ABX'"),
        (
            lambda: HomogeneousSpaces("ABA"),
            "expected different Cartan letters out of ABCDEFG, got 'A' a second time in types='ABA'",
        ),
        (lambda: HomogeneousSpaces(most_classes=1), "expected a number of classes of 2 or more, got most_classes=1"),
        (lambda: HomogeneousSpaces(most_classes=2.5), "expected a number of classes of 2 or more, got most_classes=2.5"),
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
