"""How much was compared, in words."""

from planted import SMALL, rule_by_rows, truth

from conjcheck import Fl, Gr, Row, Varieties, candidate
from conjcheck.testing.compare import Comparer
from conjcheck.testing.probe import ProbeCount
from conjcheck.testing.scope import probe_scope, survey_scope, survey_spaces
from conjcheck.testing.survey import Coverage, survey


def surveyed(rule, stop_before=None):
    """How far a survey gets."""
    return survey(Comparer(rule), budget=60.0, stop_before=stop_before).coverage


def test_one_space():
    """A single space is named; a family compared completely is called whole."""
    rule = rule_by_rows(on=(Fl(3),))
    assert survey_scope(surveyed(rule), rule) == "all of Fl(3); 36 rows, 189 cases, 45 of them nonzero; this is the whole family"


def test_many_spaces():
    """Many spaces are counted, with the first and the last."""
    rule = rule_by_rows()
    text = survey_scope(surveyed(rule), rule)
    assert text.startswith("all 11 spaces from Gr(1,2) to Fl(4); ")
    assert " 40,091 cases, " in text


def test_stopped_inside_a_space():
    """A survey that stopped inside a space says after how many of its rows, and does not speak of the whole family."""
    rule = rule_by_rows()
    coverage = surveyed(rule, Row(Fl(3), Fl(3).classes[1], Fl(3).classes[0]))
    assert survey_spaces(coverage) == "all 3 spaces from Gr(1,2) to Gr(2,3) and the first 3 of 36 rows of Fl(3)"
    assert "whole family" not in survey_scope(coverage, rule)


def test_stopped_inside_the_first_space():
    """So it does inside the first space."""
    rule = rule_by_rows()
    coverage = surveyed(rule, Row(Gr(1, 2), Gr(1, 2).point, Gr(1, 2).point))
    assert survey_spaces(coverage) == "the first 3 of 4 rows of Gr(1,2)"
    assert survey_spaces(Coverage()) == ""


def test_premise_and_gaps():
    """Numbers inside a premise say so, and spaces in between that are out of reach are named."""
    table = {X: truth(X) for X in (Gr(1, 2), Gr(1, 8))}

    @candidate(on=Varieties("Gr(1,2)", "C6/B", "Gr(1,8)"), premise=lambda X, u, v: u is X.identity)
    def rule(X, u, v):
        return table[X][u, v]

    text = survey_scope(surveyed(rule), rule)
    assert text == (
        "all 2 spaces from Gr(1,2) to Gr(1,8); 10 rows, 10 cases inside the premise, 10 of them nonzero; "
        "1 space in between is out of reach, the first C6/B"
    )


def test_probes():
    """A probe says how many rows, how many distinct, and the share of failing rows that is still possible at 95 %."""
    X = SMALL[-1]
    assert X is Fl(4)
    count = ProbeCount()
    for row in [Row(X, X.identity, X.point)] * 2 + [Row(X, X.point, X.point)]:
        count.add(row, 10, 1)
    head = "3 rows drawn at random on Fl(4), 2 of them distinct, 30 cases; "
    assert probe_scope([X], count) == head + "too few rows for a bound on the failures"
    for _ in range(21):
        count.add(Row(X, X.point, X.point), 10, 1)
    assert probe_scope([X], count) == (
        "24 rows drawn at random on Fl(4), 2 of them distinct, 240 cases; "
        "taking the draws as independent, at 95 % at most 12 % of rows, weighted as they are drawn, can fail"
    )
    count.add(Row(X, X.point, X.identity), 5, 1, sampled=True)
    text = probe_scope([X, Gr(2, 4)], count)
    assert text.startswith(
        "25 rows drawn at random on 2 spaces with n=4, 3 of them distinct, 245 cases (1 row with all nonzero cases and"
    )
