"""Rules whose values are polynomials: compared, minimised, confirmed and explained like counts."""

import pytest
import sympy

from conjcheck import CompleteFlags, Grassmannians, ProjectiveSpaces, candidate, claim, simple_roots
from conjcheck.errors import DeclarationError
from conjcheck.report.text import text_report
from conjcheck.testing.examine import EFFORTS, Examination


def powers(X, u, v, *, wrong=None):
    """On P^(n-1): the product with the hyperplane class, equivariantly; ``wrong`` changes the root of one space."""
    n, place = X.n, v.length
    roots = simple_roots(X)
    shift = sum(roots[:place], 0 * roots[0])
    if wrong == (n, place):
        shift = shift + roots[0]
    nxt = {(X.classes[place + 1], (0,)): 1} if place < n - 1 else {(X.identity, (1,)): 1}
    return nxt | ({(v, (0,)): shift} if shift else {})


def rule_with(**choices):
    @candidate(on=ProjectiveSpaces(), premise=lambda X, u, v: u.length == 1, ring="equivariant quantum")
    def hyperplane(X, u, v):
        return powers(X, u, v, **choices)

    return hyperplane


def test_a_true_rule_agrees():
    """The equivariant quantum product with a hyperplane on P^(n-1): ``h * h^k = h^(k+1) + (alpha_1 + ... + alpha_k) h^k``."""
    outcome = Examination(rule_with(), EFFORTS["quick"]).survey()
    assert outcome.status == "agrees"
    assert outcome.rows > 20


@pytest.mark.parametrize(("n", "place"), [(2, 1), (4, 0), (5, 3)])
def test_a_wrong_root_is_found_at_the_smallest_case(n, place):
    """One root too many on one space is refuted exactly there, with the oracle's polynomial written out."""
    outcome = Examination(rule_with(wrong=(n, place)), EFFORTS["quick"]).survey()
    finding = outcome.finding
    X = finding.where.X
    assert (outcome.status, X.n, finding.where.v.length, finding.where.w.length) == ("refuted", n, place, place)
    assert outcome.minimum.certified
    assert finding.rule - finding.oracle == simple_roots(X)[0]
    assert "interpolation" in outcome.confirmed_by
    text = text_report(outcome)
    assert f"oracle {finding.oracle} (minimal: " in text
    assert outcome.as_json()["rule"] == str(finding.rule)


def test_sympy_answers_and_single_constants():
    """A rule may give sympy expressions, case by case, in the classical equivariant ring."""

    @candidate(on=Grassmannians(), premise=lambda X, u, v: u.length == 0, ring="equivariant")
    def unit(X, u, v, w):
        x = sympy.Symbol("alpha1")
        return (x + 1) ** 2 - x**2 - 2 * x if w is v else x - x

    outcome = Examination(unit, EFFORTS["quick"]).survey()
    assert outcome.status == "agrees", outcome.verdict


@pytest.mark.parametrize(("change", "words"), [(-1, "negative coefficient"), (2, "not homogeneous of degree")])
def test_laws_without_the_oracle(change, words):
    """A negative coefficient, and a wrong degree, are found by positivity alone."""

    @candidate(on=ProjectiveSpaces(), premise=lambda X, u, v: u.length == 1, ring="equivariant quantum")
    def rule(X, u, v):
        def changed(x):
            return x if isinstance(x, int) else -x if change < 0 else x**2

        return {key: changed(x) for key, x in powers(X, u, v).items()}

    outcome = Examination(rule, EFFORTS["quick"]).laws(seed=1)
    assert outcome.status == "refuted"
    assert outcome.broken_law.startswith("positivity")
    assert words in outcome.broken_law


@pytest.mark.parametrize("answer", [0.5, None, "alpha1", sympy.Symbol("x"), sympy.Rational(1, 2), [1]], ids=repr)
def test_wrong_kinds_of_answers(answer):
    """What is no polynomial with integer coefficients in the simple roots is no value."""

    @candidate(on=Grassmannians(), ring="equivariant")
    def rule(X, u, v, w):
        return answer

    outcome = Examination(rule, EFFORTS["quick"]).survey()
    assert outcome.status == "not-a-count"
    assert "expected a polynomial" in outcome.finding.detail


def test_claims_are_about_numbers():
    """A claim about an equivariant ring is refused at declaration."""
    with pytest.raises(DeclarationError, match="expected ring='quantum' or 'classical' for a claim"):

        @claim(on=CompleteFlags(), ring="equivariant")
        def nothing(X, u, v, w, N):
            return True
