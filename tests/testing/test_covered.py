"""From a survey to entries of a record."""

import pytest

from conjcheck import FlagVariety, Varieties, candidate, product
from conjcheck.evidence.entries import own_version
from conjcheck.testing.compare import Comparer
from conjcheck.testing.covered import covered
from conjcheck.testing.survey import Coverage, SpaceCoverage, survey


@pytest.fixture(scope="module")
def surveyed():
    """A true rule on two small spaces, with a premise, and its complete survey."""
    tables = {
        X: {(u, v): dict(product(u, v)) for u in X.classes for v in X.classes} for X in map(FlagVariety, ("Gr(1,3)", "Fl(3)"))
    }

    @candidate(on=Varieties("Gr(1,3)", "Fl(3)"), premise=lambda X, u, v: u.length == 1)
    def true_rule(X, u, v):
        return tables[X][u, v]

    return true_rule, survey(Comparer(true_rule), budget=60.0).coverage


def test_numbers(surveyed):
    """The entries repeat what the survey counted, with the engine that was asked first and the version."""
    rule, coverage = surveyed
    entries = covered(coverage, rule)
    assert [(c.X.name, c.rows, c.seen, c.of, c.complete) for c in entries] == [
        ("Gr(1,3)", 3, 9, 9, True),
        ("Fl(3)", 12, 36, 36, True),
    ]
    assert sum(c.cases for c in entries) == coverage.cases
    assert sum(c.nonzero for c in entries) == coverage.nonzero
    assert [c.engine for c in entries] == ["vafa-intriligator", "recursion"]
    assert {c.conjcheck for c in entries} == {own_version()}
    assert not any(c.failing for c in entries)
    assert [round(space.seconds, 3) for space in coverage.spaces] == [c.seconds for c in entries]


def test_spaces_not_begun(surveyed):
    """A space without a row is no entry; the last one counts as far as it got."""
    rule, _ = surveyed
    X, Y = map(FlagVariety, ("Gr(1,3)", "Fl(3)"))
    (entry,) = covered(Coverage([SpaceCoverage(X, 4, 2, 3, 3), SpaceCoverage(Y)]), rule)
    assert (entry.X, entry.seen, entry.rows, entry.complete) == (X, 4, 2, False)


def test_two_ways(surveyed):
    """That every product was computed in two ways is on record; equivariant constants have one engine."""
    rule, coverage = surveyed
    assert covered(coverage, rule, cross_check=True)[0].engine == "vafa-intriligator, every product computed in two ways"

    @candidate(on=Varieties("Gr(1,3)"), ring="equivariant")
    def equivariant_rule(X, u, v):
        return {}

    assert covered(coverage, equivariant_rule, cross_check=True)[0].engine == "localisation"
