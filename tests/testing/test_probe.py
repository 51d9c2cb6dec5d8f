"""The random search: what it draws, what it counts, when it ends."""

import time
from fractions import Fraction

import pytest
from hypothesis import settings
from planted import rule_by_cases, rule_by_rows, truth

from conjcheck import CompleteFlags, Fl, Gr, Grassmannians, PartialFlags, ProjectiveSpaces, Row, Varieties, candidate
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import Examination
from conjcheck.testing.finding import Finding, Found
from conjcheck.testing.probe import ProbeCount, gravest, probe_levels, run_probe

SPACES = [Gr(2, 4), Fl(3), Fl(1, 2, n=4)]


def drawn(rule=None, seed=1, spaces=SPACES, check=None, count=None):
    """The rows and free integers that a search draws."""
    seen = []

    def note(row, choice):
        seen.append((row, choice))
        if check:
            check(row)

    run_probe(note, spaces, Comparer(rule or rule_by_rows()), count or ProbeCount(), seed=seed)
    return seen


def test_the_seed_decides():
    """One seed gives the same draws twice; another seed gives others."""
    first = drawn(seed=7)
    assert drawn(seed=7) == first
    assert drawn(seed=8) != first
    assert len(first) == settings().max_examples


def test_where_it_draws():
    """Rows come from the spaces given, from each of them, and with different free integers."""
    seen = drawn()
    assert {row.X for row, _ in seen} == set(SPACES)
    assert len({choice for _, choice in seen}) > 10
    assert len({row for row, _ in seen}) > 30


def test_premise_and_ring():
    """Only rows inside a premise on rows are drawn, and in the classical ring only rows with terms of degree 0."""

    @candidate(on=Varieties(*SPACES), premise=lambda X, u, v: u.length == 2)
    def thin(X, u, v):
        return {}

    @candidate(on=Varieties(*SPACES), ring="classical")
    def classical(X, u, v):
        return {}

    assert {row.u.length for row, _ in drawn(thin)} == {2}
    assert all(row.u.length + row.v.length <= row.X.dim for row, _ in drawn(classical))


def test_nothing_inside_the_premise():
    """A premise that holds nowhere ends the search quietly: nothing was counted."""

    @candidate(on=Varieties(*SPACES), premise=lambda X, u, v: False)
    def nowhere(X, u, v):
        return {}

    assert drawn(nowhere) == []


def test_premise_that_raises():
    """Where the premise raises the row is drawn, so that the check meets the error."""

    @candidate(on=Varieties("Fl(3)"), premise=lambda X, u, v: 1 // 0)
    def broken(X, u, v):
        return {}

    assert drawn(broken, spaces=[Fl(3)])


def test_it_raises_the_finding():
    """What the check raises comes out, with a row that fails; often-failing rules are found at once."""
    examination = Examination(rule_by_rows())
    wrong = candidate(on=Varieties(*SPACES))(_empty)
    examination = Examination(wrong)
    count = ProbeCount()
    with pytest.raises(Found) as caught:
        run_probe(examination.probe_check(count), SPACES, examination.comparer, count, seed=1)
    assert caught.value.finding.status == "refuted"
    assert count.failed
    assert caught.value.finding.row == Row(Fl(3), Fl(3).identity, Fl(3).identity)


def _empty(X, u, v):
    return {}


def test_several_kinds_of_failure():
    """If a search meets failures of several kinds, the refutation is reported, not the crash."""
    tables = {X: truth(X) for X in SPACES}

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v):
        if u.length < 2:
            raise ValueError("short")
        return tables[X][u, v] if v.length < 2 else {}

    examination = Examination(rule)
    count = ProbeCount()
    with pytest.raises(Found) as caught:
        run_probe(examination.probe_check(count), SPACES, examination.comparer, count, seed=3)
    assert caught.value.finding.status == "refuted"


def test_gravest():
    """Of many findings the one with the first status counts, then the smallest row; other exceptions are none."""
    small, large = Row(Fl(3), Fl(3).identity, Fl(3).point), Row(Fl(3), Fl(3).point, Fl(3).point)
    crash, far, near = (Found(Finding(*args)) for args in (("crashed", small), ("refuted", large), ("refuted", small)))
    group = ExceptionGroup("", [crash, ExceptionGroup("", [far, ValueError()]), near])
    assert gravest(group) is near
    assert gravest(crash) is crash
    assert gravest(ExceptionGroup("", [ValueError()])) is None
    assert gravest(KeyboardInterrupt()) is None


def test_counts():
    """Rows are counted with repetitions and without, cases and nonzero cases are summed."""
    examination, count = Examination(rule_by_cases(on=SPACES)), ProbeCount()
    run_probe(examination.probe_check(count), SPACES, examination.comparer, count, seed=1)
    seen = [row for row, _ in drawn(rule_by_cases(on=SPACES))]
    assert (count.rows, count.distinct, count.sampled) == (len(seen), len(set(seen)), 0)
    assert count.nonzero == sum(len(truth(row.X)[row.u, row.v]) for row in seen)
    assert count.cases > count.nonzero


@pytest.mark.parametrize("rows", [1, 2, 100, 5000])
def test_the_bound(rows):
    """The bound is the largest share p with (1 - p)^rows >= 1/20; without a row everything is possible."""
    count = ProbeCount()
    assert count.bound == 1
    count.rows = rows
    for step, expected in ((-1e-9, True), (1e-9, False)):
        share = Fraction(count.bound) + Fraction(step)
        assert ((1 - share) ** rows >= Fraction(1, 20)) is expected


def test_the_deadline():
    """After the deadline rows pass unchecked; after a failure the deadline does not count any more."""
    calls = []

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v):
        calls.append(u)
        return {}

    examination = Examination(rule)
    count = ProbeCount(deadline=0.0)
    run_probe(examination.probe_check(count), SPACES, examination.comparer, count, seed=1)
    assert calls == []
    assert (count.rows, count.failed) == (0, False)
    count.failed = True
    with pytest.raises(Found):
        examination.probe_check(count)(Row(Fl(3), Fl(3).point, Fl(3).point), 0)


class EndsAt(ProbeCount):
    """A count whose time is up at a given question."""

    left = 0

    def time_is_up(self):
        self.left -= 1
        if self.left < 0:
            self.deadline = 0.0
        return super().time_is_up()


@pytest.mark.parametrize("seed", [0, 1])
def test_time_may_be_up_at_any_moment(seed):
    """Wherever in the search the time ends, between rows or while a row is being drawn, the search ends quietly."""

    @candidate(on=Varieties("Fl(4)"), premise=lambda X, u, v: u is X.identity)
    def unit(X, u, v):
        return {(v, (0, 0, 0)): 1}

    examination = Examination(unit)
    for questions in range(0, 400, 20):
        count = EndsAt()
        count.left = questions
        run_probe(examination.probe_check(count), [Fl(4)], examination.comparer, count, seed=seed)
        assert not count.failed


def test_a_slow_call_is_made_once():
    """A rule that never ends costs one call limit in the search, not one per example."""
    calls = []

    @candidate(on=Varieties(*SPACES))
    def rule(X, u, v):
        calls.append((u, v))
        time.sleep(60)

    examination = Examination(rule, call_limit=0.15)
    count = ProbeCount()
    began = time.perf_counter()
    with pytest.raises(Found) as caught:
        run_probe(examination.probe_check(count), SPACES, examination.comparer, count, seed=1)
    assert caught.value.finding.status == "too-slow"
    assert len(calls) == 1
    assert time.perf_counter() - began < 20


def levels_of(family, most_classes=5_040):
    """The levels as names."""
    return [(n, [X.name for X in spaces]) for n, spaces in probe_levels(candidate(on=family)(_empty), most_classes)]


def test_levels():
    """At most three n, rising, with spaces of 20 classes or more and not too many: the smallest, the middle, the largest."""
    assert levels_of(CompleteFlags()) == [(4, ["Fl(4)"]), (6, ["Fl(6)"]), (7, ["Fl(7)"])]
    assert levels_of(CompleteFlags(), 800) == [(4, ["Fl(4)"]), (5, ["Fl(5)"]), (6, ["Fl(6)"])]
    assert levels_of(Varieties("Gr(1,3)", "Fl(3)")) == []
    for family in (Grassmannians(), PartialFlags(), ProjectiveSpaces()):
        levels = probe_levels(candidate(on=family)(_empty), 800)
        assert [n for n, _ in levels] == sorted({n for n, _ in levels})
        assert len(levels) <= 3
        assert all(X.n == n and 20 <= len(X.classes) <= 800 and X in family for n, spaces in levels for X in spaces)


def test_the_end_of_the_time_is_no_failure(capsys):
    """A search without a seed whose time is up while a row is drawn prints nothing: there is no failure to be reproduced."""

    @candidate(on=Varieties("Fl(4)"), premise=lambda X, u, v: u is X.identity)
    def unit(X, u, v):
        return {(v, (0, 0, 0)): 1}

    examination = Examination(unit)
    for questions in (0, 30, 150):
        count = EndsAt()
        count.left = questions
        run_probe(examination.probe_check(count), [Fl(4)], examination.comparer, count)
        assert count.timed_out
    assert capsys.readouterr().out == ""
