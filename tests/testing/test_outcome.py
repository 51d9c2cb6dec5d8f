"""Outcomes: one value for every output."""

import json
from dataclasses import replace

import pytest
from planted import rule_by_rows

from conjcheck import Case, Row, candidate, claim
from conjcheck.geometry.families import Varieties
from conjcheck.testing.examine import Examination
from conjcheck.testing.explain import Explanation
from conjcheck.testing.finding import STATUSES, Finding
from conjcheck.testing.minimise import Layer, Minimum
from conjcheck.testing.outcome import Outcome, environment

RULE = rule_by_rows()
CASE = Case.parse("Fl(3): [132] * [321] -> [312], q^(0,1)")
AGREES = Outcome(RULE, "survey", "agrees", "all of Fl(3); 36 rows", "all of Fl(3)", 36, 189, 45, seconds=1.23456)
FINDING = Finding("refuted", CASE, 2, 1)
REFUTED = Outcome(RULE, "survey", "refuted", "nothing smaller", finding=FINDING)


def test_agrees_carries_its_scope():
    """No verdict says "agrees" without saying how far."""
    assert AGREES.verdict == "agrees: by_rows as far as checked: all of Fl(3); 36 rows"


def test_refuted():
    """A refutation gives the case, both values, and what is known about smaller ones."""
    assert REFUTED.verdict == f"refuted: by_rows at {CASE}: rule 2, oracle 1 (smaller cases not looked at)"
    certified = replace(REFUTED, minimum=Minimum(FINDING, certified=True, below=1234))
    assert certified.verdict.endswith("(minimal: all 1,234 smaller cases agree)")
    open_ = replace(REFUTED, minimum=Minimum(FINDING, certified=False, below=3, reach="no smaller one among the first 3 cases"))
    assert open_.verdict.endswith("(not known to be minimal: no smaller one among the first 3 cases)")


@pytest.mark.parametrize(
    ("where", "oracle", "words"), [(CASE, 1, "the claim is false, the constant is 1"), (CASE.row, None, "the claim is false")]
)
def test_claims(where, oracle, words):
    """A false claim has no value of its own."""

    @claim(on=Varieties("Fl(3)"))
    def small(X, u, v, N):
        return False

    verdict = Outcome(small, "survey", "refuted", "nothing smaller", finding=Finding("refuted", where, None, oracle)).verdict
    assert verdict == f"refuted: small at {where}: {words} (smaller cases not looked at)"


@pytest.mark.parametrize("status", STATUSES[2:])
def test_other_trouble(status):
    """Any other verdict gives status, place and detail."""
    finding = Finding(status, CASE.row, detail="what was expected")
    assert (
        Outcome(RULE, "laws", status, "nothing smaller", finding=finding).verdict
        == f"{status}: by_rows at {CASE.row}: what was expected"
    )


@pytest.mark.parametrize("status", STATUSES[1:])
def test_verdict_is_one_line(status):
    """Whatever a rule's exceptions say, a verdict is a single line of bearable length."""
    finding = Finding(status, CASE, 1, 2, detail="ValueError: one\ntwo\r\nthree\u2028four " + "x" * 5000)
    verdict = Outcome(RULE, "survey", status, "nothing smaller", finding=finding).verdict
    assert len(verdict.splitlines()) == 1
    assert len(verdict) < 1500


def test_json():
    """The JSON form has plain types only and the same words; numbers, seed and note where there are any."""
    data = json.loads(json.dumps(AGREES.as_json()))
    assert data["verdict"] == AGREES.verdict
    assert (data["conjecture"], data["part"], data["status"], data["scope"]) == ("by_rows", "survey", "agrees", AGREES.scope)
    assert (data["rows"], data["cases"], data["nonzero"], data["seconds"], data["where"]) == (36, 189, 45, 1.235, "all of Fl(3)")
    assert "seed" not in data
    assert "rule" not in data
    with_seed = replace(AGREES, seed="7", note="on record").as_json()
    assert (with_seed["seed"], with_seed["note"]) == ("7", "on record")


def test_json_of_a_refutation():
    """A refutation adds case, values, kinds, minimality, confirmation and the numbers of the layer."""
    layer = Layer(
        (FINDING, Finding("refuted", Row.parse("Fl(3): [132] * [132]"))), 30, complete=False, orbits=2, all_orbits=True, size=36
    )
    outcome = replace(
        REFUTED,
        minimum=Minimum(FINDING, certified=True, below=5),
        layer=layer,
        explanation=Explanation(("overcount",), None, None, partial=False),
        confirmed_by="S3-symmetry",
    )
    data = json.loads(json.dumps(outcome.as_json()))
    assert data["where"] == str(CASE)
    assert (data["rule"], data["oracle"], data["minimal"], data["kinds"]) == (2, 1, True, ["overcount"])
    assert data["confirmed_by"] == "S3-symmetry"
    assert data["layer"].items() >= {"pairs": 2, "cases": 1, "orbits": 2, "complete": False, "rows": 30, "size": 36}.items()
    assert data["layer"]["failures"][0] == {"where": str(CASE), "rule": 2, "oracle": 1}
    assert REFUTED.as_json()["minimal"] is False


def test_environment():
    """The environment names the versions of everything that took part."""
    for name in ("conjcheck ", "hypothesis ", "numpy ", "pytest ", "Python 3."):
        assert name in environment()
    assert "not installed" not in environment()


@pytest.mark.parametrize(
    ("ring", "words"),
    [
        ("quantum", "return a mapping {(w, d): count}, each one an int of 0 or more, or an iterable of distinct hashable objects"),
        ("classical", "return a mapping {w: count}, each one an int"),
        ("equivariant", "return a mapping {w: value}, each one a polynomial built from simple_roots(X)"),
    ],
)
def test_the_remedy_of_a_product_rule(ring, words):
    """A product rule that returns a list is told to return a mapping."""

    @candidate(on=Varieties("Fl(3)"), ring=ring)
    def listed(X, u, v):
        return [1]

    outcome = Examination(listed).survey()
    assert outcome.status == "not-a-count"
    assert outcome.remedy.startswith(words)
