"""The survey: exhaustive, in the one order, honest about how far it got."""

import itertools
from time import perf_counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from planted import SMALL, as_case, cases_of, key_of, rule_by_cases, rule_by_rows, smaller_than, truth

from conjcheck import CompleteFlags, Fl, FlagVariety, Gr, Grassmannians, PartialFlags, ProjectiveSpaces, Row, Varieties, candidate
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import Examination
from conjcheck.testing.survey import Coverage, in_reach, survey

SPACES = [X for X in SMALL if X is not Fl(4)]


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_everything_is_compared(kind):
    """A true rule on a finite family is compared at every case: the numbers are those of an independent count."""
    done = survey(Comparer(kind()), budget=60.0)
    assert done.finding is None
    assert not done.ran_out
    coverage = done.coverage
    assert coverage.whole_family
    assert [space.X for space in coverage.spaces] == sorted(SMALL, key=lambda X: (X.n, len(X.steps), X.dim, X.steps))
    for space in coverage.spaces:
        size = len(space.X.classes) ** 2
        assert (space.complete, space.rows_seen, space.rows) == (True, size, size)
        assert space.cases == len(cases_of(space.X))
        assert space.nonzero == sum(map(len, truth(space.X).values()))
    assert (coverage.cases, coverage.nonzero) == (sum(len(cases_of(X)) for X in SMALL), coverage.nonzero)
    assert next(s.nonzero for s in coverage.spaces if s.X is Fl(4)) == 1168


def test_the_order():
    """Cases are compared in the one order: across spaces, rows and outcomes every key is above the one before."""
    asked = []
    tables = {X: truth(X) for X in SPACES}

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v, w, d):
        asked.append((X, u, v, w, d))
        return tables[X][u, v].get((w, d), 0)

    survey(Comparer(rule), budget=60.0)
    keys = list(map(key_of, asked))
    assert all(a < b for a, b in itertools.pairwise(keys))
    assert set(asked) == {case for X in SPACES for case in cases_of(X)}


@settings(max_examples=60, deadline=None)
@given(
    faults=st.sampled_from(SPACES).flatmap(lambda X: st.lists(st.sampled_from(cases_of(X)), min_size=1, max_size=3)),
    more=st.lists(st.sampled_from([case for X in SPACES for case in cases_of(X)]), max_size=2),
    kind=st.sampled_from([rule_by_cases, rule_by_rows]),
)
def test_planted_faults(faults, more, kind):
    """Wherever faults are planted, the survey ends at the smallest of them, and has compared exactly the rows before it."""
    smallest = min(faults + more, key=key_of)
    done = survey(Comparer(kind(faults + more, on=SPACES)), budget=60.0)
    assert done.finding.where == as_case(smallest)
    assert done.finding.status == "refuted"
    assert done.finding.rule == done.finding.oracle + 1 == truth(smallest[0])[smallest[1:3]].get(smallest[3:], 0) + 1
    first_of_row = next(case for case in cases_of(smallest[0]) if case[:3] == smallest[:3])
    assert done.coverage.cases == smaller_than(first_of_row, SPACES)
    assert not done.ran_out
    assert not done.coverage.whole_family


@settings(max_examples=40, deadline=None)
@given(fault=st.sampled_from(cases_of(Fl(4))), kind=st.sampled_from([rule_by_cases, rule_by_rows]))
def test_planted_fault_on_complete_flags(fault, kind):
    """The same on Fl(4), 35,855 cases."""
    assert survey(Comparer(kind([fault])), budget=60.0).finding.where == as_case(fault)


OTHER_TYPES = tuple(map(FlagVariety, ["Gr(1,2)", "B2/P1", "C2/P1", "G2/P2", "B2/B", "A3/P2", "B3/P3"]))


@settings(max_examples=40, deadline=None)
@given(
    fault=st.sampled_from([case for X in OTHER_TYPES for case in cases_of(X)]), kind=st.sampled_from([rule_by_cases, rule_by_rows])
)
def test_planted_fault_in_other_types(fault, kind):
    """The same on flag varieties of other types, mixed: found at exactly that case, minimal, with the true number of smaller cases."""
    outcome = Examination(kind([fault], on=OTHER_TYPES)).survey()
    assert (outcome.status, outcome.finding.where) == ("refuted", as_case(fault))
    assert outcome.minimum.certified
    assert outcome.minimum.below == smaller_than(fault, OTHER_TYPES)


@settings(max_examples=25, deadline=None)
@given(fault=st.sampled_from(cases_of(Fl(3)) + cases_of(Gr(2, 4))), status=st.sampled_from(["crashed", "not-a-count", "unstable"]))
def test_planted_trouble(fault, status):
    """Any other trouble at one single case is found at exactly that case."""
    answers = {
        "crashed": lambda: 1 // 0,
        "not-a-count": lambda: -1,
        "unstable": lambda numbers=itertools.count(7): next(numbers),  # noqa: B008
    }
    tables = {X: truth(X) for X in SPACES}

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v, w, d):
        return answers[status]() if (X, u, v, w, d) == fault else tables[X][u, v].get((w, d), 0)

    finding = survey(Comparer(rule), budget=60.0).finding
    assert (finding.status, finding.where) == (status, as_case(fault))


def test_budget():
    """A survey without time says that it ran out, and that it has compared nothing."""
    done = survey(Comparer(rule_by_cases()), budget=0.0)
    assert done.ran_out
    assert done.finding is None
    assert (done.coverage.rows, done.coverage.cases, done.coverage.whole_family) == (0, 0, False)


def test_goes_on_where_it_stopped():
    """A survey that is continued asks nothing twice and ends with the same account as one in one go."""
    asked = []
    tables = {X: truth(X) for X in SPACES}

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v):
        asked.append((u, v))
        return tables[X][u, v]

    comparer, coverage, parts = Comparer(rule), Coverage(), 0
    while not coverage.whole_family:
        survey(comparer, budget=0.002, coverage=coverage)
        parts += 1
    assert parts > 1
    assert len(asked) == len(set(asked)) == sum(len(X.classes) ** 2 for X in SPACES)
    assert coverage.cases == sum(len(cases_of(X)) for X in SPACES)
    assert coverage.budget == pytest.approx(0.002 * parts)


def test_stops_before_a_row():
    """``stop_before`` ends the survey before that row: what lies below it is complete, nothing else was asked."""
    X = Fl(3)
    row = Row(X, X.point, X.classes[3])
    asked = []
    tables = {Y: truth(Y) for Y in SPACES}

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v):
        asked.append(Row(X, u, v))
        return tables[X][u, v]

    done = survey(Comparer(rule), budget=60.0, stop_before=row)
    assert not done.ran_out
    assert not done.coverage.whole_family
    below = {Row(*case[:3]) for Y in SPACES for case in cases_of(Y) if Row(*case[:3]).sort_key < row.sort_key}
    assert set(asked) == below
    assert done.coverage.cases == smaller_than((X, row.u, row.v, X.identity, (0, 0)), SPACES)


def test_premise_counts():
    """Rows and cases outside the premise are passed, not counted."""
    tables = truth(Fl(3))

    @candidate(on=Varieties("Fl(3)"), premise=lambda X, u, v: u.length == 1)
    def rule(X, u, v):
        return tables[u, v]

    (space,) = survey(Comparer(rule), budget=60.0).coverage.spaces
    inside = [case for case in cases_of(Fl(3)) if case[1].length == 1]
    assert (space.rows_seen, space.rows, space.cases) == (36, 12, len(inside))
    assert space.complete


def test_spaces_out_of_reach():
    """Spaces that no engine covers are named as skipped, and then the family is not called complete."""
    found = survey(Comparer(rule_by_rows(on=(Gr(1, 2),))), budget=60.0)
    assert found.coverage.whole_family
    tables = truth(Gr(1, 2))

    @candidate(on=Varieties("Gr(1,2)", "Fl(9)", "E8/B"))
    def rule(X, u, v):
        return tables[u, v]

    done = survey(Comparer(rule), budget=60.0)
    assert {X.name for X in done.coverage.skipped} == {"Fl(9)", "E8/B"}
    assert not done.coverage.whole_family
    assert [space.X for space in done.coverage.spaces] == [Gr(1, 2)]


def test_finite_families_of_large_n():
    """A finite family is gone through to its last space, however large its n; nothing is called complete that was not compared."""
    asked = set()

    @candidate(on=Varieties("Gr(1,2)", "Gr(1,13)", "Gr(1,20)"))
    def rule(X, u, v):
        asked.add(X)
        total = u.length + v.length
        return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}

    done = survey(Comparer(rule), budget=60.0)
    assert done.finding is None
    assert asked == {Gr(1, 2), Gr(1, 13), Gr(1, 20)}
    assert done.coverage.whole_family
    assert [space.rows for space in done.coverage.spaces] == [4, 169, 400]


@pytest.mark.parametrize(
    "family",
    [Grassmannians().where(lambda X: False, words="nothing"), CompleteFlags().where(lambda X: X.n > 8, words="too large")],
    ids=str,
)
def test_a_family_with_nothing_in_reach(family):
    """A family without a space in reach ends the survey within its budget, with nothing compared."""

    @candidate(on=family)
    def rule(X, u, v):
        return {}

    began = perf_counter()
    done = survey(Comparer(rule), budget=1.0)
    assert perf_counter() - began < 20
    assert done.finding is None
    assert (done.coverage.spaces, done.coverage.rows, done.coverage.whole_family) == ([], 0, False)


def test_in_reach():
    """Spaces come in the order of the family; infinite families end where the engines do."""

    def names(family, count):
        return [X.name for X in itertools.islice(in_reach(candidate(on=family)(_nothing)), count)]

    assert names(CompleteFlags(), 100) == ["Gr(1,2)", *(f"Fl({n})" for n in range(3, 9))]
    assert names(PartialFlags(), 247) == [X.name for X in PartialFlags().up_to(8)]
    assert names(ProjectiveSpaces(), 30) == [f"Gr(1,{n})" for n in range(2, 32)]


def _nothing(X, u, v):
    return {}
