"""Lists of spaces in few words: never more than they hold, never less."""

from hypothesis import given
from hypothesis import strategies as st

from conjcheck import (
    CompleteFlags,
    Fl,
    FlagVariety,
    Gr,
    Grassmannians,
    HomogeneousSpaces,
    LagrangianGrassmannians,
    OrthogonalGrassmannians,
    PartialFlags,
    ProjectiveSpaces,
    StepFlags,
)
from conjcheck.report.runs import Run, runs

POOL = tuple(PartialFlags().up_to(5)) + tuple(X for X in HomogeneousSpaces("BCDG").up_to(3))


def told(spaces):
    """The runs as tuples, the others by name."""
    return [
        (run.words.split(",")[0], run.variable, run.first, run.last, run.from_start) if isinstance(run, Run) else run.name
        for run in runs(spaces)
    ]


@given(st.sets(st.sampled_from(POOL)))
def test_exactly_what_is_there(spaces):
    """Runs and single spaces together are the list, no more and no less; runs have at least three members."""
    found = runs(spaces)
    members = [run.members if isinstance(run, Run) else {run} for run in found]
    assert set().union(*members) == spaces
    assert all(len(run.members) >= 3 for run in found if isinstance(run, Run))
    singles = [X for X in found if not isinstance(X, Run)]
    assert singles == sorted(singles)


@given(st.sets(st.sampled_from(POOL)))
def test_a_run_is_the_whole_family_in_its_range(spaces):
    """What a run claims, a family enumerated anew from its words, is all among the spaces."""
    makers = {
        "Grassmannians": Grassmannians(),
        "projective spaces": ProjectiveSpaces(),
        "two-step flag varieties": StepFlags(2),
        "three-step flag varieties": StepFlags(3),
        "partial flag varieties": PartialFlags(),
        "varieties": HomogeneousSpaces(),
        "Lagrangian Grassmannians": LagrangianGrassmannians(),
    }
    for run in runs(spaces):
        if not isinstance(run, Run):
            continue
        family = makers.get(run.words.split(",")[0])
        if run.words == "complete flag varieties":
            family = CompleteFlags("ABCDEFG") if run.variable == "rank" else CompleteFlags()
        if family is None:
            continue
        shift = 0 if run.variable == "rank" or "Lagrangian" in run.words else 1
        first = 1 if run.from_start else run.first - shift
        claimed = {X for rank in range(first, run.last - shift + 1) for X in family.of_rank(rank)}
        assert claimed == run.members <= spaces


def test_families():
    """Families up to some n are recognised, the largest first; what is left over is listed."""
    assert told(Grassmannians().up_to(7)) == [("Grassmannians", "n", 2, 7, True)]
    assert told(CompleteFlags().up_to(5)) == [("complete flag varieties", "n", 2, 5, True)]
    assert told(PartialFlags().up_to(4)) == [("partial flag varieties", "n", 2, 4, True)]
    assert told(HomogeneousSpaces().up_to(4)) == [("varieties", "rank", 1, 3, True)]
    assert told([*Grassmannians().up_to(4), Fl(4)]) == [("Grassmannians", "n", 2, 4, True), "Fl(4)"]
    assert told(X for X in Grassmannians().up_to(6) if X.n > 3) == [("Grassmannians", "n", 4, 6, False)]
    assert told(OrthogonalGrassmannians().up_to(5)) == [("maximal orthogonal Grassmannians", "n", 2, 4, True)]


def test_one_missing():
    """One space missing breaks the family there."""
    spaces = [X for X in Grassmannians().up_to(6) if X is not Gr(3, 5)]
    left = ["Gr(1,5)", "Gr(4,5)", "Gr(2,5)"]
    assert told(spaces) == [("Grassmannians", "n", 2, 4, True), ("Grassmannians", "n", 6, 6, False), *left]


def test_few():
    """Two spaces or fewer are named; none at all is nothing."""
    assert runs([]) == []
    assert told([Fl(3), Gr(1, 2)]) == ["Gr(1,2)", "Fl(3)"]
    assert told([FlagVariety("E8/P8")]) == ["E8/P8"]
