"""The report in plain text, and the table at the end of a run."""

import re
import shlex
from dataclasses import replace

import pytest
from planted import as_case, cases_of, rule_by_cases, rule_by_rows, truth

from conjcheck import Case, Fl, FlagVariety, Gr, Row, Varieties, candidate, claim
from conjcheck.report.text import describe_class, summary_table, text_report
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.finding import STATUSES, Finding
from conjcheck.testing.outcome import Outcome, environment

F = Fl(3)
FAULT = next(case for case in cases_of(F) if case[1].length + case[2].length == 4 and truth(F)[case[1:3]].get(case[3:]))


@pytest.fixture(scope="module")
def refuted():
    """The outcome for a rule with one fault."""
    return Examination(rule_by_cases([FAULT], on=(Gr(1, 3), F))).survey()


def entries(text):
    """The labelled entries of a report, continuation lines joined."""
    found = {}
    label = ""
    for line in text.splitlines()[1:]:
        label = line[:13].strip() or label
        found[label] = f"{found.get(label, '')} {line[13:].strip()}".strip()
    return found


def test_agrees():
    """An agreement gives its verdict, what was compared, and the environment; nothing about failures."""
    outcome = Examination(rule_by_rows(on=(F,))).survey()
    text = text_report(outcome, replay="pytest x")
    assert text.splitlines()[0] == outcome.verdict
    found = entries(text)
    assert found["compared"] == outcome.scope
    assert found["environment"] == environment()
    assert set(found) == {"", "compared", "environment"}


def test_refuted(refuted):
    """A refutation gives case, classes, both values, confirmation, kind, products, minimality, layer and the replay line."""
    text = text_report(refuted, replay="pytest 'a.py::rule'")
    case = as_case(FAULT)
    found = entries(text)
    assert text.splitlines()[0] == refuted.verdict
    assert found["case"].startswith(
        f"{case} u = {describe_class(case.u)} v = {describe_class(case.v)} w = {describe_class(case.w)}"
    )
    assert found["rule"] == "2"
    assert found["oracle"] == f"1, confirmed by {refuted.confirmed_by}"
    assert found["kind"] == "overcount, not symmetric"
    assert found["product"].startswith("by the rule: ")
    assert "by the oracle: " in found["product"]
    assert found["minimal"] == f"yes: all {refuted.minimum.below:,} smaller cases were compared and agree"
    assert found["layer"].startswith(
        "1 failing ordered pair (u, v) among the 36 of Fl(3): 1 failing case in 1 orbit under the symmetries of"
    )
    assert found["replay"] == f"pytest 'a.py::rule' --conjcheck-case '{case}'"
    assert list(found)[-1] == "environment"


def test_the_choice_is_shown():
    """Where a rule has variants, the report says which one it speaks about, and how many others there are."""

    @candidate(on=Varieties(Gr(1, 3)), variants={"shift": (0, 1), "words": ("a",)})
    def rule(X, u, v, *, shift, words):
        return {}

    found = entries(text_report(Examination(rule).survey()))
    assert found["choice"] == "shift=0, words='a'; 1 other variant"
    found = entries(text_report(Examination(rule.variant(shift=1)).survey()))
    assert found["choice"] == "shift=1, words='a'; 1 other variant"


def test_the_replay_line_is_for_a_shell(refuted):
    """The replay line splits into the words of a command, and its case parses back."""
    (line,) = [line for line in text_report(refuted, replay="pytest 'a b.py::rule'").splitlines() if line.startswith("replay")]
    command = shlex.split(line.removeprefix("replay"))
    assert command[:3] == ["pytest", "a b.py::rule", "--conjcheck-case"]
    assert Case.parse(command[3]) == as_case(FAULT)


def test_objects():
    """The objects that a rule counts are shown at the failing case."""
    tables = truth(F)

    @candidate(on=Varieties(F), statement=r"N = \#\{\dots\}")
    def rule(X, u, v, w, d):
        count = tables[u, v].get((w, d), 0) + ((X, u, v, w, d) == FAULT)
        return [("chain", k) for k in range(count)]

    found = entries(text_report(Examination(rule).survey()))
    assert found["objects"] == "('chain', 0); ('chain', 1)"
    assert found["statement"] == r"N = \#\{\dots\}"

    @candidate(on=Varieties(F))
    def nothing(X, u, v, w, d):
        return []

    assert entries(text_report(Examination(nothing).survey()))["objects"] == "none"


def test_claims():
    """A false claim shows the row and the true product, and that the product was confirmed."""

    @claim(on=Varieties(F))
    def one_term(X, u, v, N):
        return len(N.product(u, v)) < 2

    found = entries(text_report(Examination(one_term).survey()))
    assert found["row"].startswith("Fl(3): [132] * [132] u = ")
    assert found["confirmed"] == "the product was computed on two routes"
    assert found["product"] == "by the oracle: sigma[231] + q^(0,1) sigma[123]"
    assert found["kind"] == "false claim"


@pytest.mark.parametrize("status", STATUSES[2:])
def test_other_trouble(status):
    """Any other trouble gives the problem, a remedy, the traceback if there is one, and what is known of smaller cases."""
    finding = Finding(status, as_case(FAULT), detail="what came", trace='  File "x.py", line 1\nValueError: why\n')
    outcome = Outcome(rule_by_cases(on=(F,)), "survey", status, "nothing smaller", finding=finding)
    found = entries(text_report(outcome))
    assert found["problem"] == "what came"
    assert len(found["remedy"]) > 20
    assert "ValueError: why" in text_report(outcome)
    assert found["minimal"] == "not looked at: only this case was compared"


def test_law_and_note(refuted):
    """A law that gave a rule away, a note and a seed are in the report."""
    outcome = replace(refuted, broken_law="unit: 2 at here, but 1 at there", note="on record", seed="77")
    found = entries(text_report(outcome))
    assert found["law"] == "broken without any oracle: unit: 2 at here, but 1 at there"
    assert found["note"] == "on record"
    assert found["environment"].endswith("; seed 77")


def test_never_minimal_without_a_certificate(refuted):
    """Without a certificate the report does not say that the case is minimal."""
    text = text_report(
        replace(refuted, minimum=replace(refuted.minimum, certified=False, reach="no smaller one among the first 5 cases"))
    )
    assert entries(text)["minimal"] == "not certain: no smaller one among the first 5 cases"
    assert "not known to be minimal" in text.splitlines()[0]


def test_large_layers_and_products_are_cut():
    """A layer of many failures lists eight, a product of many terms thirty, and both say how many more there are."""
    zero = Examination(candidate(on=Varieties("Fl(3)"))(_nothing)).survey()
    assert len(zero.layer.findings) == 45
    assert entries(text_report(zero))["layer"].endswith("... 37 more")
    crowded = Examination(candidate(on=Varieties("Fl(3)"))(_everything)).case(Row(F, F.point, F.point))
    assert len(crowded.explanation.by_rule) == 41
    assert "(11 more terms)" in text_report(crowded)


def _nothing(X, u, v):
    return {}


def _everything(X, u, v):
    return {(w, (a, b)): 1 for w in X.classes for a in range(3) for b in range(3) if (a + b < 4 and w.length < 3) or a == b == 0}


def test_width():
    """Lines are wrapped, but for those that are to be copied."""
    for line in text_report(Examination(candidate(on=Varieties("Fl(3)"))(_everything)).case(Row(F, F.point, F.point))).splitlines()[
        1:
    ]:
        assert len(line) <= 110 or line.startswith(("replay", "case", "    "))


def test_an_incomplete_layer():
    """A layer that the time did not suffice for says "at least" and how far it got."""
    outcome = Examination(rule_by_cases([FAULT], on=(F,)), replace(EFFORTS["quick"], layer=0.0)).survey()
    assert entries(text_report(outcome))["layer"].startswith(
        "at least 1 failing ordered pair (u, v) of Fl(3): 1 failing case in 1 orbit"
    )


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (lambda: Gr(2, 4).schubert(partition=(2,)), "(2)  permutation 1423, string 0110, word 3.2, length 2"),
        (lambda: Gr(2, 4).identity, "()  permutation 1234, string 0011, word empty, length 0"),
        (lambda: Fl(1, 3, n=4).point, "[4231]  string 2110, word 1.2.3.2.1, length 5"),
        (
            lambda: Gr(1, 11).point,
            "(10)  permutation 11.1.2.3.4.5.6.7.8.9.10, string 11111111110, word 10.9.8.7.6.5.4.3.2.1, length 10",
        ),
        (lambda: FlagVariety("G2/B").classes[3], "<1.2>  length 2"),
    ],
    ids=range(5),
)
def test_classes(text, expected):
    """A class is described in all its notations."""
    assert describe_class(text()) == expected


def line_of(name, part, status, **more):
    """The JSON form of an outcome."""
    plain = {
        "conjecture": name,
        "part": part,
        "status": status,
        "rows": 0,
        "cases": 0,
        "nonzero": 0,
        "seconds": 0.25,
        "where": "",
        "file": "a.py",
    }
    return plain | ({"minimal": False, "rule": 1} if status != "agrees" else {}) | more


def cells(lines):
    """The table as a dictionary from the first cell to the others."""
    return {line.split("  ")[0].strip(): [cell.strip() for cell in line.split("  ") if cell.strip()][1:] for line in lines[1:]}


def test_table():
    """One line per conjecture: status, numbers of the survey, rows drawn, seconds of all parts, and what was compared."""
    lines = [
        line_of("rule", "laws", "agrees", rows=33),
        line_of("rule", "survey", "agrees", rows=1234, cases=56789, nonzero=77, where="all of Fl(3)", seconds=1.0),
        line_of("rule", "probe[n=4]", "agrees", rows=100, seconds=0.5),
        line_of("rule", "probe[n=5]", "agrees", rows=11),
        line_of("second", "survey", "agrees", rows=1, cases=2, nonzero=2, where="the first 1 of 4 rows of Gr(1,2)"),
    ]
    table = summary_table(lines)
    assert len(table) == 3
    assert cells(table) == {
        "rule": ["agrees", "1,234", "56,789", "77", "111", "2.0", "all of Fl(3)"],
        "second": ["agrees", "1", "2", "2", "0", "0.2", "the first 1 of 4 rows of Gr(1,2)"],
    }
    assert len({line.index("status") for line in table[:1]} | {table[1].index("agrees")}) == 1


@pytest.mark.parametrize("status", STATUSES[1:])
def test_a_failure_shows(status):
    """Whatever part fails decides the line of its conjecture, with the place and whether it is minimal."""
    place = "Fl(3): [132] * [213]"
    for minimal, words in ((True, "(minimal)"), (False, "(not known to be minimal)")):
        lines = [
            line_of("rule", "laws", "agrees", rows=3),
            line_of("rule", "survey", status, rows=5, cases=6, where=place, minimal=minimal, note="on record"),
            line_of("rule", "probe[n=4]", "agrees", rows=9),
        ]
        (line,) = cells(summary_table(lines)).values()
        assert line[0] == status
        assert line[-1] == f"{place} {words}; on record"


def test_conjectures_of_one_name():
    """Two conjectures of one name in two files have a line each: no verdict hides the other."""
    lines = [
        line_of("rule", "survey", "agrees", rows=1, where="all of Fl(3)", file="a.py"),
        line_of("rule", "survey", "refuted", rows=2, where="Fl(3): [132] * [213]", file="b.py"),
    ]
    table = summary_table(lines)
    assert len(table) == 3
    assert any("agrees" in line for line in table)
    assert any("refuted" in line for line in table)


def test_a_failure_without_a_place():
    """A survey that compared nothing has its line too."""

    @candidate(on=Varieties("Fl(3)"), premise=lambda X, u, v: False)
    def nowhere(X, u, v):
        return {}

    outcome = Examination(nowhere).survey()
    text = text_report(outcome)
    assert "nothing compared" in text.splitlines()[0]
    (_, line) = summary_table([outcome.as_json()])
    assert "undefined" in line
    assert "agrees" not in line


def test_what_cannot_be_used():
    """A file that cannot be imported has a line of its own: no verdict, and why."""
    broken = [{"file": "conjectures/lost.py", "problem": "  File ...\nModuleNotFoundError: No module named 'nothing'\n"}]
    outcomes = [line_of("rule", "survey", "agrees", rows=3)]
    *before, line = summary_table(outcomes, broken)
    assert len(before) == 2
    assert re.split(r"\s{2,}", line) == ["lost.py", "no verdict", "cannot be used: ModuleNotFoundError: No module named 'nothing'"]
    assert len(summary_table([], broken)) == 2


def test_why(refuted):
    """The derivation stands in the report; where none was found that is said, since nothing is left out in silence."""
    assert entries(text_report(refuted))["why"].startswith(refuted.derivation.lines[0])
    assert entries(text_report(replace(refuted, derivation=None)))["why"] == (
        "no short chain of Chevalley products was found; a certificate, where there is one, has all the steps"
    )
