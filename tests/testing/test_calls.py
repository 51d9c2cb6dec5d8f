"""Calling a rule: premises, values, and asking again."""

import itertools
import sys
import time

import pytest
from planted import cases_of, outcomes_of, rule_by_cases, rule_by_rows, truth

from conjcheck import Case, Fl, OutsideDomain, Row, Varieties, candidate, claim, product
from conjcheck.testing.calls import RuleCalls
from conjcheck.testing.finding import Finding

F = Fl(3)
ROW = Row.parse("Fl(3): [132] * [321]")
OUTCOMES = outcomes_of(F, 4)
truth(F)  # filled before any rule runs


def calls_of(rule, **choices):
    """The calls of a rule."""
    return RuleCalls(rule, **choices)


def with_premise(premise):
    """A true rule by cases under a premise."""
    return rule_by_cases(on=(F,), premise=premise)


def test_inside():
    """``inside`` is the premise on rows; where it raises, loops or exits, the row counts as inside, so that the error is met."""
    assert calls_of(rule_by_cases(on=(F,))).inside(ROW)
    assert calls_of(with_premise(lambda X, u, v, w, d: False)).inside(ROW), "a premise on cases says nothing about rows"
    for premise, expected in (
        (lambda X, u, v: False, False),
        (lambda X, u, v: 1, True),
        (lambda X, u, v: 1 // 0, True),
        (lambda X, u, v: sys.exit(1), True),
        (lambda X, u, v: time.sleep(9), True),
    ):
        calls = calls_of(with_premise(premise), call_limit=0.15)
        with calls.limit:
            assert calls.inside(ROW) is expected


def test_values():
    """``values`` are the nonzero values of a rule at the outcomes asked for, and nothing for a claim."""
    for rule in (rule_by_cases(on=(F,)), rule_by_rows(on=(F,))):
        calls = calls_of(rule)
        with calls.limit:
            assert calls.values(ROW, OUTCOMES) == truth(F)[ROW.u, ROW.v]

    @claim(on=Varieties(F))
    def anything(X, u, v, N):
        return True

    assert calls_of(anything).values(ROW, OUTCOMES) == {}


def test_a_premise_that_hangs_is_asked_once():
    """After a premise has hung, it is not asked again by the searches: they would spend all their time on it."""
    asked = []

    def premise(X, u, v):
        asked.append(u)
        time.sleep(9)

    calls = calls_of(with_premise(premise), call_limit=0.15)
    with calls.limit:
        assert all(calls.inside(Row(F, u, v)) for u in F.classes for v in F.classes)
    assert len(asked) == 1


@pytest.mark.parametrize(
    ("premise", "status"),
    [
        (None, None),
        (lambda X, u, v: False, None),
        (lambda X, u, v, w, d: 1 // 0, None),
        (lambda X, u, v: 1 // 0, "crashed"),
        (lambda X, u, v: sys.exit(1), "crashed"),
        (lambda X, u, v: time.sleep(9), "too-slow"),
        (lambda X, u, v: bool(product(u, v)), "not-independent"),
    ],
    ids=range(7),
)
def test_trouble_with_a_premise(premise, status):
    """A premise on rows that does not answer is found out by itself; an answer, true or false, is no trouble."""
    calls = calls_of(with_premise(premise), call_limit=0.15)
    with calls.limit:
        finding = calls.premise_trouble(ROW)
    assert (finding.status if finding else None) == status


def test_a_premise_outside_its_domain():
    """A premise may say that it is undefined."""

    def premise(X, u, v):
        raise OutsideDomain("not here")

    assert calls_of(with_premise(premise)).premise_trouble(ROW).status == "undefined"


def test_admits():
    """A premise on cases decides case by case; one on rows, or none, admits every case."""
    zero, one = (Case(F, ROW.u, ROW.v, *key) for key in OUTCOMES[:2])
    calls = calls_of(with_premise(lambda X, u, v, w, d: w is one.w))
    assert (calls.admits(zero), calls.admits(one)) == (False, True)
    assert calls_of(with_premise(lambda X, u, v: False)).admits(zero)
    assert calls_of(rule_by_rows(on=(F,))).admits(zero)


def test_values_inside_the_premise():
    """Values are asked, and given, at admitted cases only."""
    asked = []
    table = truth(F)

    @candidate(on=Varieties(F), premise=lambda X, u, v, w, d: w.length == 2)
    def by_cases(X, u, v, w, d):
        asked.append(w)
        return table[u, v].get((w, d), 0)

    assert calls_of(by_cases).values(ROW, OUTCOMES) == {key: n for key, n in table[ROW.u, ROW.v].items() if key[0].length == 2}
    assert {w.length for w in asked} == {2}
    by_rows = rule_by_rows(on=(F,), premise=lambda X, u, v, w, d: w.length == 2)
    assert calls_of(by_rows).values(ROW, OUTCOMES) == {key: n for key, n in table[ROW.u, ROW.v].items() if key[0].length == 2}


def test_outcomes():
    """The outcomes of a row, their number, and the number below each are those of an independent list."""
    calls = calls_of(rule_by_rows(on=(F,)))
    for u, v in itertools.product(F.classes, repeat=2):
        row, expected = Row(F, u, v), outcomes_of(F, u.length + v.length)
        assert list(calls.outcomes(row)) == expected
        assert calls.size(row) == len(expected)
        assert [calls.below(row, key) for key in expected] == list(range(len(expected)))
    assert sum(calls.size(Row(F, u, v)) for u in F.classes for v in F.classes) == len(cases_of(F))


def test_a_doubt_is_settled_in_time():
    """A wrong answer is asked for again a few times, but a slow rule not for long."""
    asked = []

    @candidate(on=Varieties(F))
    def slow(X, u, v):
        asked.append(u)
        time.sleep(0.2)
        return {}

    calls = calls_of(slow)
    finding = Finding("refuted", Case(F, ROW.u, ROW.v, *OUTCOMES[1]), 0, 1)
    began = time.perf_counter()
    with calls.limit:
        assert calls.settle(finding) is finding
    assert 1 <= len(asked) <= 4
    assert time.perf_counter() - began < 20
