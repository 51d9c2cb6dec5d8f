"""Rules for equivariant constants, through the whole harness."""

import json
from bisect import bisect_left

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from planted import key_of, weighted_degrees

from conjcheck import Case, Fl, Gr, Varieties, candidate
from conjcheck.geometry.polynomial import simple_roots
from conjcheck.oracle.equivariant import equivariant_constant
from conjcheck.report.text import text_report
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import Examination
from conjcheck.testing.survey import survey

SPACES = (Gr(1, 2), Gr(1, 3), Fl(3))


def cases(X, *, quantum):
    """Every case of the equivariant ring, in order: the degree of the constant may be anything from 0 on."""
    found = [
        (X, u, v, w, d)
        for u in X.classes
        for v in X.classes
        for w in X.classes
        for weight in (range(u.length + v.length - w.length + 1) if quantum else [0] if w.length <= u.length + v.length else [])
        for d in weighted_degrees(X.q_degrees, weight)
    ]
    return sorted(found, key=key_of)


CASES = {quantum: [case for X in SPACES for case in cases(X, quantum=quantum)] for quantum in (False, True)}
TRUE = {case: equivariant_constant(Case(*case)) for case in CASES[True]}


def rule_with(change, *, quantum):
    """The true constants, but for ``change(case, true value)``; asked case by case."""
    if quantum:

        @candidate(on=Varieties(*SPACES), ring="equivariant quantum")
        def rule(X, u, v, w, d):
            return change((X, u, v, w, d), TRUE[X, u, v, w, d])
    else:

        @candidate(on=Varieties(*SPACES), ring="equivariant")
        def rule(X, u, v, w):
            case = (X, u, v, w, (0,) * len(X.steps))
            return change(case, TRUE[case])

    return rule


@pytest.mark.parametrize("quantum", [False, True], ids=["classical", "quantum"])
def test_everything_is_compared(quantum):
    """The true polynomials agree at every case; cases and nonzero cases are those of an independent count."""
    coverage = survey(Comparer(rule_with(lambda case, true: true, quantum=quantum)), budget=60.0).coverage
    assert coverage.whole_family
    assert coverage.cases == len(CASES[quantum])
    assert coverage.nonzero == sum(TRUE[case] != 0 for case in CASES[quantum])


@settings(max_examples=40, deadline=None)
@given(data=st.data(), quantum=st.booleans())
def test_planted_faults(data, quantum):
    """A polynomial that is wrong in one coefficient at one case is refuted exactly there, certified, with the true polynomial."""
    fault = data.draw(st.sampled_from(CASES[quantum]))
    roots = simple_roots(fault[0])
    extra = data.draw(st.sampled_from([roots[0], roots[-1] ** 3, roots[0] - roots[-1] + 1, 7 * roots[0]]))
    rule = rule_with(lambda case, true: true + extra if case == fault else true, quantum=quantum)
    outcome = Examination(rule).survey()
    assert (outcome.status, outcome.finding.where) == ("refuted", Case(*fault))
    assert outcome.minimum.certified
    assert outcome.minimum.below == bisect_left([key_of(case) for case in CASES[quantum]], key_of(fault))
    assert outcome.finding.rule == TRUE[fault] + extra
    assert outcome.finding.oracle == TRUE[fault]
    data = json.loads(json.dumps(outcome.as_json()))
    assert (data["rule"], data["oracle"]) == (str(TRUE[fault] + extra), str(TRUE[fault]))
    assert f"rule         {TRUE[fault] + extra}" in text_report(outcome)


def test_expressions_of_sympy():
    """A rule may answer with expressions of sympy in alpha1, alpha2, ..., in any form."""

    def expression(case, true):
        return sympy.factor(true.sympy())

    assert survey(Comparer(rule_with(expression, quantum=False)), budget=60.0).finding is None


@pytest.mark.parametrize(
    "answer",
    [
        0.5,
        None,
        "alpha1",
        [1],
        sympy.Symbol("t"),
        sympy.Symbol("alpha1") / 2,
        sympy.Symbol("alpha1") * 1.0,
        simple_roots(Gr(1, 5))[0],
        {},
    ],
    ids=range(9),
)
def test_no_polynomials(answer):
    """What is no polynomial with integer coefficients in the roots of the space is ``not-a-count``, even where the constant is 0."""
    finding = survey(Comparer(rule_with(lambda case, true: answer, quantum=False)), budget=60.0).finding
    assert finding.status == "not-a-count"
    assert "expected a polynomial in the 1 simple roots, got " in finding.detail


def test_a_small_difference_in_a_large_coefficient():
    """Coefficients are compared exactly, however large: a wrong one is wrong by the primes themselves, too."""
    fault = CASES[False][-1]
    for extra in (2**30, 2**31 - 1, 2**61 - 1, 10**40):
        rule = rule_with(
            lambda case, true, extra=extra: true + extra * simple_roots(case[0])[0] if case == fault else true, quantum=False
        )
        assert survey(Comparer(rule), budget=60.0).finding.where == Case(*fault)
