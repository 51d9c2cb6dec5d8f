"""From any failure to the smallest, and never a word too many about how small it is."""

import itertools
import time
from collections import Counter

import pytest
from hypothesis import event, example, given, settings
from hypothesis import strategies as st
from planted import (
    SMALL,
    as_case,
    cases_of,
    key_of,
    outcomes_of,
    plain_rows,
    rule_by_cases,
    rule_by_rows,
    smaller_than,
    truth,
)

from conjcheck import Case, CompleteFlags, Fl, Gr, Grassmannians, Row, Varieties, candidate, claim, product
from conjcheck.errors import EnginesDisagree
from conjcheck.geometry.symmetries import orbit_of_case
from conjcheck.oracle import ENGINES
from conjcheck.report.text import text_report
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import confirm, descend, layer_of, minimise
from conjcheck.testing.survey import Coverage, survey

SPACES = [X for X in SMALL if X is not Fl(4)]
CASES = [case for X in SPACES for case in cases_of(X)]
TURNED = {
    (1, 2, 3): (1, 2, 3),
    (2, 1, 3): (1, 3, 2),
    (1, 3, 2): (2, 1, 3),
    (2, 3, 1): (3, 1, 2),
    (3, 1, 2): (2, 3, 1),
    (3, 2, 1): (3, 2, 1),
}
"""The diagram automorphism of Fl(3): conjugation by the longest element."""
KINDS = st.sampled_from([rule_by_cases, rule_by_rows])

FAULTS = st.one_of(
    st.lists(st.sampled_from(CASES), min_size=1, max_size=4, unique=True),
    st.sampled_from([(Fl(3), 4), (Gr(2, 4), 4), (Fl(1, 2, n=4), 5)]).flatmap(
        lambda place: st.lists(
            st.sampled_from([case for case in cases_of(place[0]) if case[1].length + case[2].length == place[1]]),
            min_size=2,
            max_size=4,
            unique=True,
        )
    ),
)
"""Faults anywhere, and faults that lie close together, often in one row."""


def minimality(below):
    """What a certified outcome says."""
    words = {0: "there is no smaller case", 1: "the one smaller case agrees"}
    return f"minimal: {words.get(below, f'all {below:,} smaller cases agree')}"


def reported(case):
    """The finding that a probe or a replay would come with."""
    true = truth(case[0])[case[1:3]].get(case[3:], 0)
    return Finding("refuted", as_case(case), true + 1, true, f"the rule gives {true + 1}, the oracle {true}")


@settings(max_examples=80, deadline=None)
@given(faults=FAULTS, kind=KINDS)
def test_from_any_failure_to_the_smallest(faults, kind):
    """From any of several planted faults the minimiser ends at the smallest, certified, with the true number of smaller cases."""
    smallest = min(faults, key=key_of)
    for start in faults:
        found = minimise(Comparer(kind(faults, on=SPACES)), reported(start), Coverage(), budget=60.0)
        assert found.finding.where == as_case(smallest)
        assert found.certified
        assert found.below == smaller_than(smallest, SPACES)
        assert found.reach == ""


@settings(max_examples=20, deadline=None)
@given(faults=st.lists(st.sampled_from(cases_of(Fl(4))), min_size=1, max_size=3, unique=True))
def test_the_same_on_complete_flags(faults):
    """The same on Fl(4), asked row by row."""
    smallest = min(faults, key=key_of)
    found = minimise(Comparer(rule_by_rows(faults)), reported(faults[-1]), Coverage(), budget=60.0)
    assert (found.finding.where, found.certified, found.below) == (as_case(smallest), True, smaller_than(smallest, SMALL))


@settings(max_examples=60, deadline=None)
@given(faults=FAULTS, kind=KINDS, part=st.sampled_from(["survey", "probe[n=4]", "laws"]))
def test_worked_out(faults, kind, part):
    """Whichever part meets a fault first, the outcome reports the smallest one as minimal, confirmed, with the whole layer."""
    examination = Examination(kind(faults, on=SPACES))
    outcome = examination.survey() if part == "survey" else examination.work_out(reported(max(faults, key=key_of)), part, 0.0)
    smallest = min(faults, key=key_of)
    assert outcome is examination.failure
    assert (outcome.status, outcome.finding.where) == ("refuted", as_case(smallest))
    below = smaller_than(smallest, SPACES)
    assert outcome.minimality == minimality(below)
    true = truth(smallest[0])[smallest[1:3]].get(smallest[3:], 0)
    assert outcome.verdict == (
        f"refuted: {outcome.conjecture.name} at {as_case(smallest)}: rule {true + 1}, oracle {true} ({minimality(below)})"
    )
    layer = [as_case(case) for case in sorted(faults, key=key_of) if case[0] is smallest[0]]
    assert outcome.layer.complete
    assert [f.where for f in outcome.layer.findings] == layer
    assert outcome.layer.pairs == len({(case.u, case.v) for case in layer})
    assert "engine localisation" in outcome.confirmed_by


@settings(max_examples=80, deadline=None)
@given(faults=FAULTS, kind=KINDS, budget=st.sampled_from([0.0, 1e-9, 1e-5, 1e-4, 1e-3, 4e-3]), known=st.booleans())
@example(
    faults=[(Fl(3), Fl(3).point, Fl(3).point, w, d) for w, d in outcomes_of(Fl(3), 6)], kind=rule_by_cases, budget=0.0, known=True
)
def test_without_time_nothing_is_called_minimal(faults, kind, budget, known):
    """With a budget too small nothing is called minimal, unless it is; and what is counted below a fault was compared."""
    start, smallest = max(faults, key=key_of), min(faults, key=key_of)
    comparer, coverage = Comparer(kind(faults, on=SPACES)), Coverage()
    if known:  # everything below the row of the smallest fault was compared before
        survey(comparer, budget=60.0, stop_before=as_case(smallest).row, coverage=coverage)
    found = minimise(comparer, reported(start), coverage, budget=budget)
    event(f"certified: {found.certified}")
    if found.certified:
        assert found.finding.where == as_case(smallest)
        assert found.below == smaller_than(smallest, SPACES)
    else:
        assert found.reach
        assert found.below <= smaller_than(tuple(getattr(found.finding.where, name) for name in "XuvwdX"[:5]), SPACES)


@settings(max_examples=25, deadline=None)
@given(faults=FAULTS, kind=KINDS, budget=st.sampled_from([0.0, 1e-9, 1e-5]))
def test_reports_without_time(faults, kind, budget):
    """The report after a budget too small says that the failure is not known to be minimal, and nowhere that it is."""
    effort = EFFORTS["quick"]
    starved = type(effort)(
        **{name: getattr(effort, name) for name in type(effort).__slots__} | {"minimise": budget, "layer": budget}
    )
    last = (Fl(2, 3, n=4), *cases_of(Fl(2, 3, n=4))[-1][1:])
    outcome = Examination(kind([*faults, last], on=SPACES), starved).work_out(reported(last), "probe[n=4]", 0.0)
    text = text_report(outcome)
    assert not outcome.minimum.certified
    assert "(not known to be minimal: " in outcome.verdict
    assert "minimal: all" not in text
    assert "minimal: there" not in text
    assert "yes:" not in text
    assert outcome.as_json()["minimal"] is False
    assert not outcome.layer.complete or len(outcome.layer.findings) == sum(case[0] is last[0] for case in {*faults, last})


def test_its_own_row_counts():
    """What lies below in the failing row itself belongs to the certainty: a slow row leaves it open."""
    X = Fl(3)
    first, last = ((X, X.point, X.point, *outcomes_of(X, 6)[k]) for k in (7, -1))
    tables = truth(X)

    @candidate(on=Varieties(X))
    def slow_in_one_row(X, u, v, w, d):
        if u is v is X.point:
            time.sleep(0.02)
        return tables[u, v].get((w, d), 0) + ((w, d) in (first[3:], last[3:]) and u is v is X.point)

    comparer, coverage = Comparer(slow_in_one_row), Coverage()
    survey(comparer, budget=60.0, stop_before=as_case(first).row, coverage=coverage)
    for budget in (0.0, 0.4):  # a quarter is for the row itself, which takes 0.16 s up to the first fault
        found = minimise(comparer, reported(last), coverage, budget=budget)
        assert (found.certified, found.finding.where) == (False, as_case(last))
    found = minimise(comparer, reported(last), coverage, budget=60.0)
    assert (found.certified, found.finding.where) == (True, as_case(first))


def test_gaps_in_the_family():
    """Smaller spaces that no engine reaches are named, and then nothing is called minimal."""
    tables = {X: truth(X) for X in (Gr(1, 2), Gr(1, 8))}

    @candidate(on=Varieties("Gr(1,2)", "C6/B", "E6/B", "Gr(1,8)"))
    def rule(X, u, v):
        return {} if u is v is X.point and X.n == 8 else tables[X][u, v]

    outcome = Examination(rule).survey()
    assert outcome.finding.where.row == Row(Gr(1, 8), Gr(1, 8).point, Gr(1, 8).point)
    assert not outcome.minimum.certified
    assert outcome.minimum.reach == "all 67 smaller cases in reach agree; out of reach of the oracle: C6/B, E6/B"


def test_other_trouble_below():
    """If something else is wrong below a refuted case, that is the smallest failure."""
    X = Fl(3)
    crash, wrong = cases_of(X)[20], cases_of(X)[150]
    tables = truth(X)

    @candidate(on=Varieties(X))
    def rule(X, u, v, w, d):
        if (X, u, v, w, d) == crash:
            raise ValueError("here")
        return tables[u, v].get((w, d), 0) + ((X, u, v, w, d) == wrong)

    found = minimise(Comparer(rule), reported(wrong), Coverage(), budget=60.0)
    assert (found.finding.status, found.finding.where, found.certified, found.below) == ("crashed", as_case(crash), True, 20)


def test_a_failure_that_is_gone():
    """A failure that does not come again, though its row was compared to the end, is reported as unstable, not as refuted."""
    case = cases_of(Fl(3))[100]
    found = minimise(Comparer(rule_by_cases(on=SPACES)), reported(case), Coverage(), budget=60.0)
    assert found.finding.status == "unstable"
    assert found.finding.where == as_case(case)


def test_a_premise_counts():
    """Cases outside the premise are neither looked at nor counted below."""
    X = Fl(3)
    inside = [case for case in cases_of(X) if case[2].length != 1]
    fault = inside[70]
    premise = lambda X, u, v: v.length != 1  # noqa: E731
    premise_on_cases = lambda X, u, v, w, d: v.length != 1  # noqa: E731
    for kind, condition in itertools.product((rule_by_cases, rule_by_rows), (premise, premise_on_cases)):
        outside = next(case for case in cases_of(X) if case[2].length == 1)
        found = minimise(Comparer(kind([fault, outside], on=(X,), premise=condition)), reported(fault), Coverage(), budget=60.0)
        assert (found.finding.where, found.certified, found.below) == (as_case(fault), True, 70)


def test_too_slow_is_not_called_again():
    """A call that was too slow is not repeated: the minimiser only looks below it."""
    X, calls = Fl(3), []
    case = cases_of(X)[120]
    tables = truth(X)

    @candidate(on=Varieties(X))
    def rule(X, u, v, w, d):
        calls.append((X, u, v, w, d))
        return tables[u, v].get((w, d), 0)

    found = minimise(Comparer(rule), Finding("too-slow", as_case(case), detail="slow"), Coverage(), budget=60.0)
    assert (found.finding.status, found.finding.where) == ("too-slow", as_case(case))
    assert case not in calls


def test_descend():
    """From a failure on, walking down inside the space ends at a failing row that is not larger; one with no failing neighbour stays."""
    X = Fl(4)

    @candidate(on=Varieties(X))
    def rule(X, u, v):
        return tables[u, v] if u.length + v.length < 4 else {}

    tables = truth(X)
    comparer = Comparer(rule)
    with comparer.limit:
        start = comparer.row(Row(X, X.point, X.point)).finding
    found = descend(comparer, start, budget=60.0)
    assert found.status == "refuted"
    assert found.row.u.length + found.row.v.length == 4
    assert descend(comparer, start, budget=0.0) == start
    lonely = rule_by_rows([cases_of(X)[20_000]])
    with Comparer(lonely).limit:
        finding = Comparer(lonely).row(as_case(cases_of(X)[20_000]).row).finding
    assert descend(Comparer(lonely), finding, budget=60.0) == finding


# -- layers ------------------------------------------------------------------------------------------------------------


def test_layer_of_a_rule_that_is_always_zero():
    """All failures of a space are found, from the first on: for the rule 0 they are the nonzero constants, in Gr(2,4) two orbits."""
    X = Gr(2, 4)

    @candidate(on=Varieties(X))
    def zero(X, u, v):
        return {}

    comparer = Comparer(zero)
    layer = layer_of(comparer, survey(comparer, budget=60.0).finding, budget=60.0)
    expected = [case for case in cases_of(X) if truth(X)[case[1:3]].get(case[3:])]
    assert [f.where for f in layer.findings] == list(map(as_case, expected))
    assert (layer.complete, layer.rows, layer.size, layer.pairs) == (True, 36, 36, 36)
    left, orbits = set(map(as_case, expected)), 0
    while left:
        left -= orbit_of_case(next(iter(left)))
        orbits += 1
    assert layer.orbits == orbits


def test_layer_of_claims():
    """The failing rows of a claim about products: on Fl(3) they are one orbit, and the report calls them rows."""
    X = Fl(3)

    @claim(on=Varieties(X))
    def one_term(X, u, v, N):
        return len(N.product(u, v)) == 1

    comparer = Comparer(one_term)
    layer = layer_of(comparer, survey(comparer, budget=60.0).finding, budget=60.0)
    failing = [row for row, terms in truth(X).items() if len(terms) != 1]
    assert {(f.row.u, f.row.v) for f in layer.findings} == set(failing)
    assert (layer.pairs, layer.orbits, layer.all_orbits) == (len(failing), 1, True)
    text = " ".join(text_report(Examination(one_term).survey()).split())
    assert "9 failing ordered pairs (u, v) among the 36 of Fl(3): 9 failing rows in 1 orbit under the symmetries of Fl(3)" in text
    assert "9 failing rows and 27 agreeing ones" in text


def test_layer_of_classical_claims():
    """In the classical ring Seidel elements join no rows: what is left are swaps and the diagram automorphism."""
    X = Fl(3)

    @claim(on=Varieties(X), ring="classical")
    def never(X, u, v, N):
        return False

    comparer = Comparer(never)
    layer = layer_of(comparer, survey(comparer, budget=60.0).finding, budget=60.0)
    turned = {X.schubert(permutation=a): X.schubert(permutation=b) for a, b in TURNED.items()}
    orbits = {
        frozenset({(u, v), (v, u), (turned[u], turned[v]), (turned[v], turned[u])})
        for u, v in ((f.row.u, f.row.v) for f in layer.findings)
    }
    assert (layer.pairs, layer.orbits) == (36, len(orbits))


def test_layer_without_time():
    """Without time a layer says that it is not complete."""
    case = cases_of(Fl(3))[10]
    layer = layer_of(Comparer(rule_by_cases([case], on=(Fl(3),))), reported(case), budget=0.0)
    assert not layer.complete
    assert layer.rows < 36


# -- confirmation ------------------------------------------------------------------------------------------------------


@settings(max_examples=60, deadline=None)
@given(case=st.sampled_from(CASES))
def test_confirmed(case):
    """Every constant with n <= 4 is confirmed by another way, whatever the rule said."""
    finding, how = confirm(reported(case))
    assert finding == reported(case)
    where = finding.where
    another = [] if where.w.dual is where.v is where.u else ["S3-symmetry"]
    assert how.split(", ")[-len(another) - 2 :] == ["engine localisation", "the recursion without symmetries", *another]
    assert how.startswith("engine recursion") == case[0].is_grassmannian


def test_confirmation_outside_the_degree_axiom():
    """The 0 of a case where lengths and degrees do not add up is confirmed too."""
    for text in (
        "Gr(2,4): (2,1) * (2,1) -> (2,2), q^(3)",
        "Fl(3): [321] * [321] -> [321], q^(2,0)",
        "Fl(1,2;4): [2134] * [1234] -> [1234], q^(0,0)",
    ):
        case = Case.parse(text)
        assert confirm(Finding("refuted", case, 1, 0))[0].oracle == 0


def test_the_oracle_in_doubt(monkeypatch):
    """If a witness gives another value, the oracle is in doubt, and no verdict is given."""
    case = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")
    with pytest.raises(EnginesDisagree, match="the oracle is in doubt"):
        confirm(Finding("refuted", case, 0, 2))
    engine = type(ENGINES["recursion"])
    monkeypatch.setattr(engine, "constant", lambda self, u, v, w, d: 5)
    with pytest.raises(EnginesDisagree, match="5 by engine recursion"):
        confirm(Finding("refuted", case, 0, 1))


def test_confirmed_rows():
    """A row is confirmed by computing its product twice; a wrong engine is found out."""
    finding = Finding("refuted", Row(Fl(3), Fl(3).point, Fl(3).point))
    assert confirm(finding) == (finding, "the product was computed on two routes")


# -- two rules that are right for a long way ---------------------------------------------------------------------------


def row_rule(X, v, w, d, p):
    """The product of a row of p boxes with v (Buch, Compositio Math. 137 (2003), Theorem 1), but for the last row of the q-term.

    There l_k - 1 >= nu_k >= 0; here a third row, or a later one, must keep a box whenever it can.
    """
    (k,) = X.steps
    old, new = ((*x.partition, *[0] * k)[:k] for x in (v, w))
    if d == (0,):
        return int(all(new[i] <= old[i - 1] for i in range(1, k)) and all(a <= b for a, b in zip(old, new, strict=True)))
    floor = [*(part - 1 for part in old[1:]), int(k >= 3 and old[-1] > 1)]
    return int(d == (1,) and all(part - 1 >= entry >= least for part, entry, least in zip(old, new, floor, strict=True)))


def test_one_wrong_boundary():
    """A Pieri rule with one boundary wrong, which shows from Gr(3,5) on, is refuted at the case that brute force names."""

    def is_row(X, u, v):
        return len(u.partition) == 1

    @candidate(on=Grassmannians(), premise=is_row)
    def boundary(X, u, v, w, d):
        return row_rule(X, v, w, d, u.length)

    below, first = 0, None
    for X in sorted(Grassmannians().up_to(5), key=lambda X: (X.n, X.dim, X.steps)):
        for case in cases_of(X):
            if first is None and is_row(*case[:3]):
                _, u, v, w, d = case
                if row_rule(X, v, w, d, u.length) != product(u, v).get((w, d), 0):
                    first = case
                else:
                    below += 1
    assert first[0] is Gr(3, 5)
    outcome = Examination(boundary).survey()
    assert outcome.finding.where == as_case(first)
    assert outcome.minimality == f"minimal: all {below} smaller cases agree"


def test_at_most_one():
    """The rule min(N, 1) on complete flags is right up to n = 4 and refuted on Fl(5): 25 failing constants, the first as by brute force.

    The constants come from another program (computed; no published source for the number).
    """
    capped = {}
    for n in range(2, 6):
        X = Fl(n)
        classes = {w.permutation: w for w in X.classes}
        for (u, v), terms in plain_rows(n).items():
            capped[classes[u], classes[v]] = {(classes[w], d): min(N, 1) for (w, d), N in terms.items()}
    twos = [(u, v, w, d) for (u, v), terms in plain_rows(5).items() for (w, d), N in terms.items() if N > 1]

    @candidate(on=CompleteFlags())
    def at_most_one(X, u, v):
        return capped[u, v]

    outcome = Examination(at_most_one, EFFORTS["thorough"]).survey()
    X = Fl(5)
    named = [(X, *(X.schubert(permutation=w) for w in case[:3]), case[3]) for case in twos]
    expected = sorted(named, key=key_of)
    assert len(expected) == 25
    assert [f.where for f in outcome.layer.findings] == list(map(as_case, expected))
    assert outcome.layer.complete
    assert outcome.finding.where == as_case(expected[0])
    assert (outcome.finding.rule, outcome.finding.oracle) == (1, 2)
    lengths = Counter(w.length for w in X.classes)
    below = sum(len(cases_of(Fl(n))) for n in range(2, 5)) + _below_on_complete_flags(expected[0], lengths)
    assert outcome.minimality == f"minimal: all {below:,} smaller cases agree"
    assert outcome.explanation.kinds[0] == "undercount"


def _below_on_complete_flags(case, lengths):
    """The number of smaller cases on the same complete flag variety, counted row by row without listing them."""
    X, u, v, w, d = case

    def size(total):
        return sum(
            len(_compositions((total - length) // 2, len(d))) * count for length, count in lengths.items() if _fits(total, length)
        )

    rows = sorted((a.length + b.length, a.length, a.index, b.index) for a in X.classes for b in X.classes)
    here = rows.index((u.length + v.length, u.length, u.index, v.index))
    total = u.length + v.length
    inside = sum(
        (sum(e), e, x.index) < (sum(d), d, w.index)
        for x in X.classes
        if _fits(total, x.length)
        for e in _compositions((total - x.length) // 2, len(d))
    )
    return sum(size(row[0]) for row in rows[:here]) + inside


def _fits(total, length):
    return total >= length and (total - length) % 2 == 0


def _compositions(total, parts):
    if parts == 1:
        return [(total,)]
    return [(first, *rest) for first in range(total + 1) for rest in _compositions(total - first, parts - 1)]
