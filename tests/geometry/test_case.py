"""Cases and rows: text and back, the total order, complete lists of rows and outcomes, refusals."""

import pickle
from itertools import product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck.errors import DifferentVarieties, NotationError
from conjcheck.geometry.case import (
    Case,
    Row,
    count_cases,
    degrees_of_total,
    outcomes,
    parse_class,
    place_of_row,
    read_degree,
    rows,
)
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr


@st.composite
def varieties(draw, most=5):
    """Flag varieties, of type A or not."""
    n = draw(st.integers(2, most))
    steps = sorted(draw(st.sets(st.integers(1, n - 1), min_size=1)))
    others = ["B2/B", "C3/P1,3", "D4/P3", "D4/P3,4", "LG(4,8)", "OG(3,7)", "OG(4,8)", "IG(2,6)", "Q^6", "G2/B", "E6/P1"]
    return draw(st.sampled_from([Fl(*steps, n=n), Gr(4, 10), *map(FlagVariety, others)]))


@st.composite
def cases(draw):
    """Any cases, also ones that break the degree axiom."""
    X = draw(varieties())
    u, v, w = (draw(st.sampled_from(X.classes)) for _ in range(3))
    return Case(X, u, v, w, tuple(draw(st.integers(0, 12)) for _ in X.marked))


SMALL = [Gr(1, 2), Gr(2, 4), Fl(3), Fl(1, 3, n=4), Fl(1, 2, n=4), Fl(2, 3, n=4), FlagVariety("B2/B"), FlagVariety("G2/P1")]


@settings(deadline=None)
@given(cases())
def test_text_of_cases_and_rows_parses_back(case):
    """``Case.parse(str(case)) == case``, the same for rows, and ``repr`` is that call."""
    assert Case.parse(str(case)) == case
    assert eval(repr(case)) == case
    assert Row.parse(str(case.row)) == case.row
    assert eval(repr(case.row)) == case.row
    assert pickle.loads(pickle.dumps(case)) == case
    assert pickle.loads(pickle.dumps(case)).u is case.u
    assert hash(Case.parse(str(case))) == hash(case)


@pytest.mark.parametrize(
    ("text", "canonical"),
    [
        ("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)", "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)"),
        ("A3/P2:[2413]*<1.3.2>->(2) , q^( 1 )", "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)"),
        ("Gr(2,4): (2, 1) * (2, 1) -> (1, 1), q^(1)", "Gr(2,4): (2,1) * (2,1) -> (1,1), q^(1)"),
        ("Gr(2,4): (1) * () -> (1)", "Gr(2,4): (1) * () -> (1), q^(0)"),
        ("Fl(1,3;4): [2143] * [3241] -> [4123], q^(1,0)", "Fl(1,3;4): [2143] * [3241] -> [4123], q^(1,0)"),
        ("B2/B: <1.2> * <> -> <1.2>, q^(0, 0)", "B2/B: [2.-1] * [1.2] -> [2.-1], q^(0,0)"),
        ("G2/B: <1.2> * <> -> <1.2>, q^(0, 0)", "G2/B: <1.2> * <> -> <1.2>, q^(0,0)"),
        ("C3/P3: (3, 1) * <3> -> [ 2 . -3 . -1 ], q^( 0 )", "LG(3,6): (3,1) * (1) -> (3,1), q^(0)"),
        ("OG(3, 7): (2,0) * () -> <2.3>", "OG(3,7): (2) * () -> (2), q^(0)"),
        ("IG(2,6):[-2.-1.3]*[1.-3.2]->[1.2.3],q^(1)", "IG(2,6): [-2.-1.3] * [1.-3.2] -> [1.2.3], q^(1)"),
        ("B3/P1: <2.1> * <> -> [3.1.2], q^(2)", "Q^5: [3.1.2] * [1.2.3] -> [3.1.2], q^(2)"),
        ("P^9: [2.1.3.4.5.6.7.8.9.10] * (1) -> (1,0), q^(12)", "Gr(1,10): (1) * (1) -> (1), q^(12)"),
    ],
)
def test_what_a_person_writes(text, canonical):
    """Any name, any notation of the space, spaces at will; the degree may be left out when it is 0."""
    assert str(Case.parse(text)) == canonical


def test_the_degree_axiom():
    """``l(u) + l(v) = l(w) + sum d_i deg q_i``."""
    assert Case.parse("Fl(1,2;4): [4312] * [4312] -> [3124], q^(1,2)").obeys_degree_axiom
    assert not Case.parse("Fl(1,2;4): [4312] * [4312] -> [3124], q^(2,1)").obeys_degree_axiom
    assert not Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(2)").obeys_degree_axiom


@settings(deadline=None)
@given(cases(), cases())
def test_smaller_is_one_total_order(one, other):
    """Exactly one of <, ==, > holds, and it is the order of the tuple written out in the design: X, then the row, then (d, w)."""

    def key(case):
        X, u, v = case.X, case.u, case.v
        place = {w: i for i, w in enumerate(X.classes)}
        space = (X.rank, len(X.marked), X.dim, X.kind.letter, X.marked)
        return (*space, u.length + v.length, u.length, place[u], place[v], sum(case.d), case.d, place[case.w])

    assert (one < other) == (key(one) < key(other))
    assert (one < other) + (other < one) + (one == other) == 1
    assert (one.row < other.row) == (key(one)[:9] < key(other)[:9])


@pytest.mark.parametrize("X", SMALL, ids=str)
def test_rows_are_complete_and_in_order(X):
    """Every pair of classes once, in order."""
    listed = list(rows(X))
    assert listed == sorted(listed)
    assert {(row.u, row.v) for row in listed} == set(product(X.classes, repeat=2))
    assert len(listed) == len(X.classes) ** 2


@pytest.mark.parametrize("X", SMALL, ids=str)
def test_outcomes_are_complete_and_in_order(X):
    """For each total of lengths: all (w, d) that obey the degree axiom, found here in a plain box, once each, in the order
    of cases.
    """
    for total in range(-1, 2 * X.dim + 1):
        box = product(*(range(max(total, 0) // q + 1) for q in X.q_degrees))
        weights = {d: sum(a * b for a, b in zip(d, X.q_degrees, strict=True)) for d in box}
        expected = [(w, d) for d in weights for w in X.classes if w.length + weights[d] == total]
        assert list(outcomes(X, total)) == sorted(expected, key=lambda pair: (sum(pair[1]), pair[1], pair[0].index))
        assert list(outcomes(X, total, classical=True)) == [(w, (0,) * len(X.marked)) for w in X.of_length(total)]
        assert count_cases(X, total) == len(expected)
        assert count_cases(X, total, classical=True) == len(X.of_length(total))


def test_outcomes_of_a_row_follow_each_other_as_cases():
    """The outcomes of one row, made into cases, are sorted by "smaller"."""
    X = Fl(1, 2, n=4)
    u, v = X.point, X.classes[-3]
    made = [Case(X, u, v, w, d) for w, d in outcomes(X, u.length + v.length)]
    assert made == sorted(made)
    assert all(case.obeys_degree_axiom for case in made)


def test_number_of_outcomes_of_the_point_squared():
    """``count_cases`` counts without listing: the point squared on ``Fl(5)`` has the number of outcomes that a generating
    function gives.
    """
    X = Fl(5)
    series = [0] * 21
    series[0] = 1
    for step in X.q_degrees:  # 1/(1 - z^2)^4
        for i in range(step, 21):
            series[i] += series[i - step]
    expected = sum(series[20 - w.length] for w in X.classes)
    assert count_cases(X, 20) == len(outcomes(X, 20)) == expected


@settings(deadline=None)
@given(st.sampled_from(SMALL), st.integers(-2, 12))
def test_degrees_of_a_total(X, total):
    """All degrees of one total weight, by sum of entries, then lexicographically."""
    box = product(range(max(total, 0) + 1), repeat=len(X.marked))
    expected = [d for d in box if sum(a * b for a, b in zip(d, X.q_degrees, strict=True)) == total]
    assert list(degrees_of_total(X, total)) == sorted(expected, key=lambda d: (sum(d), d))


def test_rows_and_cases_cannot_be_changed():
    """They are frozen."""
    case = Case.parse("Gr(2,4): (1) * () -> (1)")
    with pytest.raises(AttributeError):
        case.u = case.v
    with pytest.raises(AttributeError):
        case.row.u = case.v


X, Y = Gr(2, 4), Gr(2, 5)


@pytest.mark.parametrize(
    ("call", "error", "message"),
    [
        (
            lambda: Row(X, (1,), X.point),
            NotationError,
            "expected a Schubert class of Gr(2,4) for u, got u=(1,); make one with X.schubert(...)",
        ),
        (
            lambda: Row(X, X.point, Y.identity),
            DifferentVarieties,
            "expected a Schubert class of Gr(2,4) for v, got sigma() of Gr(2,5)",
        ),
        (
            lambda: Case(X, X.point, X.point, Y.point, (1,)),
            DifferentVarieties,
            "expected a Schubert class of Gr(2,4) for w, got sigma(3,3) of Gr(2,5)",
        ),
        (
            lambda: Case(X, X.point, X.point, X.point, (1, 0)),
            NotationError,
            "expected 1 entries in d on Gr(2,4), one per marked node, got d=(1, 0)",
        ),
        (lambda: read_degree(X, (-1,)), NotationError, "expected entries of 0 or more in d, got entry 1 = -1 in d=(-1,)"),
        (lambda: read_degree(X, 1), NotationError, "expected a sequence of integers for d, got d=1; write a tuple such as (2, 1)"),
        (lambda: read_degree(X, (0.5,)), NotationError, "expected integers in d, got entry 1 = 0.5 of d=(0.5,)"),
        (lambda: Row.parse("Gr(2,4) (1)"), NotationError, "expected a row such as 'Gr(2,4): (2,1) * (1)', got 'Gr(2,4) (1)'"),
        (
            lambda: Case.parse("Gr(2,4): (1) * (1)"),
            NotationError,
            "expected a case such as 'Gr(2,4): (2,1) * (2,1) -> (2), q^(1)', got 'Gr(2,4): (1) * (1)'",
        ),
        (
            lambda: Case.parse("Gr(2,4): (1) * (1) -> (2), q^(-1)"),
            NotationError,
            "expected a class such as (2,1), [2143] or <1.3.2>, got '(2), q^(-1)'",
        ),
        (
            lambda: Case.parse("Fl(3): [132] * [132] -> [123], q^(1,,0)"),
            NotationError,
            "expected a class such as (2,1), [2143] or <1.3.2>, got '[123], q^(1,,0)'",
        ),
        (lambda: Case.parse(7), NotationError, "expected a case such as 'Gr(2,4): (2,1) * (2,1) -> (2), q^(1)', got 7"),
        (lambda: Row.parse(7), NotationError, "expected a row such as 'Gr(2,4): (2,1) * (1)', got 7"),
        (
            lambda: Row("Gr(2,4)", X.point, X.point),
            NotationError,
            "expected a flag variety for X, got X='Gr(2,4)'; make one with FlagVariety('Gr(2,4)')",
        ),
        (lambda: parse_class(X, "(2,,1)"), NotationError, "expected a class such as (2,1), [2143] or <1.3.2>, got '(2,,1)'"),
        (lambda: parse_class(X, None), NotationError, "expected a class such as (2,1), [2143] or <1.3.2>, got None"),
        (lambda: parse_class(X, "{2,1}"), NotationError, "expected a class such as (2,1), [2143] or <1.3.2>, got '{2,1}'"),
        (lambda: parse_class(X, "[1..2]"), NotationError, "expected a class such as (2,1), [2143] or <1.3.2>, got '[1..2]'"),
        (
            lambda: parse_class(X, "[-2.1.4.3]"),
            NotationError,
            "expected a permutation of 1..4, got entry 1 = -2 in permutation=(-2, 1, 4, 3)",
        ),
        (
            lambda: parse_class(FlagVariety("C3/B"), "[1-32]"),
            NotationError,
            "expected a class such as (3,1), [1.-3.2] or <1.3.2>, got '[1-32]'",
        ),
        (
            lambda: parse_class(FlagVariety("C3/B"), "[132]"),
            NotationError,
            "expected a signed permutation of 1..3 with dots, such as [1.-3.2], got '[132]'",
        ),
        (lambda: parse_class(FlagVariety("G2/B"), "1.2"), NotationError, "expected a class such as <1.3.2>, got '1.2'"),
        (
            lambda: parse_class(FlagVariety("G2/B"), "[1.2]"),
            NotationError,
            "expected word= on G2/B: only types B, C and D have signed=",
        ),
        (
            lambda: parse_class(FlagVariety("G2/B"), "(1)"),
            NotationError,
            "expected word= on G2/B: outside type A only LG(n,2n), OG(n,2n+1) and OG(n,2n) have partition=",
        ),
        (
            lambda: parse_class(X, "(3)"),
            NotationError,
            "expected a partition inside a box of 2 rows and 2 columns, got row 1 = 3 in partition=(3,)",
        ),
    ],
)
def test_refusals_name_the_offending_entry(call, error, message):
    """Each refusal says what was expected and what came instead."""
    with pytest.raises(error) as caught:
        call()
    assert str(caught.value) == message


@pytest.mark.parametrize("name", ["Gr(1,2)", "Gr(2,4)", "Fl(1,3;4)", "B2/B", "Fl(4)", "G2/P1"])
def test_rows_between_two_places(name):
    """``rows(X, first, last)`` is the slice of ``rows(X)``, whatever the two places are."""
    X = FlagVariety(name)
    everything = list(rows(X))
    size = len(everything)
    assert size == X.number_of_classes**2
    assert everything == sorted(everything)
    assert list(rows(X, 3)) == everything[3:]
    places = range(size + 3) if size < 50 else [0, 1, 2, size // 3, size // 2, size - 2, size - 1, size, size + 5]
    for first in places:
        for last in places:
            assert list(rows(X, first, last)) == everything[first:last]


def test_one_row_far_away():
    """A single row of a space with 1,625,702,400 rows is found without passing the others."""
    X = FlagVariety("Fl(8)")
    (last,) = rows(X, X.number_of_classes**2 - 1)
    assert (last.u, last.v) == (X.point, X.point)
    (first,) = rows(X, 0, 1)
    assert (first.u, first.v) == (X.identity, X.identity)
    (middle,) = rows(X, X.number_of_classes**2 // 2, X.number_of_classes**2 // 2 + 1)
    assert middle.u.length + middle.v.length == X.dim


@pytest.mark.parametrize("name", ["Gr(1,2)", "Gr(2,5)", "Fl(4)", "LG(3,6)", "G2/P1"])
def test_the_place_of_a_row(name):
    """The place of a row is where it comes among all rows of its variety."""
    X = FlagVariety(name)
    assert [place_of_row(row) for row in rows(X)] == list(range(X.number_of_classes**2))
