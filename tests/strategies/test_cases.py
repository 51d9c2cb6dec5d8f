"""``cases``: each kind keeps its word, and inside the axiom most constants are not 0."""

import pytest
from hypothesis.errors import InvalidArgument

from conjcheck import constant
from conjcheck.geometry.case import Case
from conjcheck.geometry.families import CompleteFlags, Grassmannians, PartialFlags, StepFlags, Varieties
from conjcheck.geometry.flag_variety import Gr
from conjcheck.strategies import cases

FAMILIES = [Grassmannians(), CompleteFlags(), StepFlags(2), Varieties("C3/P2", "G2/B", "E6/P1")]


@pytest.mark.parametrize("family", FAMILIES, ids=str)
def test_every_case_is_valid_and_of_its_kind(family, drawn):
    """Inside obeys the degree axiom, outside breaks it; all are cases of members of the family."""
    for kind in ("inside", "near", "outside"):
        examples = drawn(cases(family, kind=kind), 80)
        assert all(isinstance(case, Case) and case.X in family and min(case.d) >= 0 for case in examples)
        if kind != "near":
            assert {case.obeys_degree_axiom for case in examples} == {kind == "inside"}


def test_near_cases_differ_from_an_inside_case_in_one_thing(drawn):
    """Some obey the axiom and some do not; those that do not are off by one unit of one q."""
    examples = drawn(cases(CompleteFlags(), kind="near", min_n=3), 150)
    gaps = [
        case.u.length + case.v.length - case.w.length - sum(x * y for x, y in zip(case.d, case.X.q_degrees, strict=True))
        for case in examples
    ]
    assert set(gaps) == {-2, 0, 2}
    assert sum(gap == 0 for gap in gaps) > 25


def test_an_odd_total_is_no_trouble_for_a_single_class_per_length(drawn):
    """On projective spaces there is no neighbour and no other node: every near case is off by one unit of q."""
    for case in drawn(cases(Varieties("P^3"), kind="near")):
        assert not case.obeys_degree_axiom


def test_cases_shrink_to_the_smallest_question(smallest):
    """Of each kind: on the smallest variety, 1 * 1, and the smallest outcome there."""
    assert smallest(cases(PartialFlags())) == Case.parse("Gr(1,2): () * () -> ()")
    assert smallest(cases(PartialFlags(), kind="near")) == Case.parse("Gr(1,2): () * () -> (), q^(1)")
    assert smallest(cases(PartialFlags(), kind="outside")) == Case.parse("Gr(1,2): () * () -> (1)")


def test_cases_shrink_under_conditions(smallest):
    """The first quantum term of all is pt * pt = q on P^1; on ``Fl(3)`` a divisor times pt is the first with a q1 q2."""
    assert smallest(cases(PartialFlags()), lambda case: any(case.d)) == Case.parse("Gr(1,2): (1) * (1) -> (), q^(1)")
    found = smallest(cases(Varieties("Fl(3)")), lambda case: min(case.d) > 0)
    assert (found.u.length, found.v.length, found.w.length, found.d) == (1, 3, 0, (1, 1))
    wrong = smallest(cases(Varieties("Gr(2,4)"), kind="outside"), lambda case: case.u is Gr(2, 4).point)
    assert wrong == Case.parse("Gr(2,4): (2,2) * () -> ()")


def test_a_premise_holds_for_the_row(drawn):
    """As for rows."""
    examples = drawn(cases(Varieties("Gr(2,5)"), premise=lambda X, u, v: len(v.partition) == 1))
    assert {len(case.v.partition) for case in examples} == {1}


@pytest.mark.parametrize(
    ("name", "nonzero", "quantum"),
    [
        ("Fl(4)", 0.70, 0.45),  # 5.4 % nonzero with outcomes drawn evenly
        ("Fl(5)", 0.45, 0.30),  # 0.8 %
        ("Fl(6)", 0.30, 0.22),  # 0.1 %
        ("Fl(1,3;5)", 0.80, 0.45),  # 12 %
        ("Gr(3,6)", 0.80, 0.40),  # 51 %
    ],
)
def test_inside_the_axiom_many_constants_are_not_zero(drawn, name, nonzero, quantum):
    """At least this share asks for a nonzero constant, and this one for a nonzero constant of positive degree (computed)."""
    examples = drawn(cases(Varieties(name)), 200)
    values = [constant(case.u, case.v, case.w, case.d) for case in examples]
    assert sum(map(bool, values)) >= nonzero * len(values)
    assert sum(value > 0 and any(case.d) for case, value in zip(examples, values, strict=True)) >= quantum * len(values)


def test_near_and_outside_the_axiom_constants_are_zero(drawn):
    """Always outside; on ``Fl(4)`` and ``Fl(5)`` nearly always nearby."""
    for name in ("Fl(4)", "Fl(5)"):
        outside = drawn(cases(Varieties(name), kind="outside"), 100)
        assert not any(constant(case.u, case.v, case.w, case.d) for case in outside)
        near = drawn(cases(Varieties(name), kind="near"), 100)
        assert sum(constant(case.u, case.v, case.w, case.d) == 0 for case in near) > 0.9 * len(near)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"kind": "far"}, "expected kind to be one of 'inside', 'near', 'outside', got kind='far'"),
        ({"kind": None}, "expected kind to be one of 'inside', 'near', 'outside', got kind=None"),
        ({"on": None}, "expected a family for on, got on=None"),
        ({"premise": 1}, "for premise, got premise=1"),
    ],
)
def test_wrong_arguments_are_refused_at_once(arguments, message):
    """The error names the argument."""
    with pytest.raises(InvalidArgument, match=message):
        cases(**{"on": Grassmannians(), **arguments})
