"""One conjecture examined from end to end."""

import itertools
import random
import time
from dataclasses import replace

import pytest
from planted import SMALL, cases_of, rule_by_cases, rule_by_rows, truth

from conjcheck import (
    Case,
    CompleteFlags,
    Fl,
    FlagVariety,
    Gr,
    Grassmannians,
    OutsideDomain,
    PartialFlags,
    Row,
    Varieties,
    candidate,
    claim,
    product,
)
from conjcheck.errors import ConjcheckError
from conjcheck.report.text import text_report
from conjcheck.testing.examine import EFFORTS, Examination, examine
from conjcheck.testing.finding import STATUSES

BRIEF = replace(EFFORTS["quick"], survey=0.3, laws=0.3, probe=0.3, minimise=2.0, layer=0.3)
F = Fl(3)


def parts(conjecture, effort=BRIEF, **options):
    """All parts of an examination, run whatever the others found, under a small effort."""
    found = []
    for part in ("survey", "laws", "probe"):
        examination = Examination(conjecture, effort, call_limit=0.3, **options)
        if part == "survey":
            found.append(examination.survey())
        elif part == "laws" and conjecture.role == "candidate":
            found.append(examination.laws(seed=1))
        elif part == "probe":
            found += [examination.probe(spaces, 0.3, seed=1) for _, spaces in examination.levels()]
    return [outcome for outcome in found if outcome]


def test_a_true_rule():
    """A true rule agrees in every part, and every verdict says how far."""
    outcomes = examine(rule_by_rows(), effort="quick", seed=1)
    assert [outcome.part for outcome in outcomes] == ["laws", "survey", "probe[n=4]"]
    assert {outcome.status for outcome in outcomes} == {"agrees"}
    laws, survey, probe = outcomes
    assert survey.verdict.startswith(
        "agrees: by_rows as far as checked: all 11 spaces from Gr(1,2) to Fl(4); 1,134 rows, 40,091 cases, "
    )
    assert laws.verdict.startswith("agrees: by_rows as far as checked: the laws hold around ")
    assert " rows drawn at random on Fl(4), " in probe.verdict
    assert "at 95 % at most " in probe.verdict


def test_the_first_failure_ends_it():
    """After the first part that finds something wrong no other runs."""
    case = cases_of(F)[100]
    (outcome,) = examine(rule_by_cases([case]), effort="quick")
    assert (outcome.part, outcome.status, outcome.finding.where) == ("laws", "refuted", Case(*case))


def test_claims_have_no_laws():
    """A claim is surveyed and probed; laws are about candidates."""

    @claim(on=PartialFlags())
    def positive(X, u, v, N):
        return min(N.product(u, v).values()) > 0

    outcomes = examine(positive, effort="quick", seed=1)
    assert [outcome.part for outcome in outcomes][:2] == ["survey", "probe[n=4]"]
    assert {outcome.status for outcome in outcomes} == {"agrees"}


def test_seeds():
    """With a seed the random parts draw the same again."""
    unhurried = replace(EFFORTS["quick"], laws=60.0, probe=60.0)

    def drawn():
        examination = Examination(rule_by_rows(), unhurried)
        parts = [examination.laws(seed=5), *(examination.probe(spaces, 60.0, seed=5) for _, spaces in examination.levels())]
        return [(outcome.part, outcome.rows, outcome.cases) for outcome in parts]

    counted = [drawn(), drawn()]
    assert counted[0] == counted[1]


def test_unknown_effort():
    """An effort that does not exist is an error at once."""
    with pytest.raises((ConjcheckError, KeyError), match="lazy"):
        examine(rule_by_rows(), effort="lazy")


# -- every status, by every part ---------------------------------------------------------------------------------------

TABLES = {X: truth(X) for X in SMALL}
ANSWERS = itertools.count(5)


def slow():
    """Never end."""
    while True:
        pass


def outside():
    """Say that this is outside the domain."""
    raise OutsideDomain("too long")


TROUBLE = {
    "refuted": lambda u, v: {},
    "crashed": lambda u, v: 1 // 0,
    "unstable": lambda u, v: {(u.variety.point, (0,) * len(u.variety.marked)): next(ANSWERS)},
    "too-slow": lambda u, v: slow(),
    "not-a-count": lambda u, v: {(u.variety.point, (0,) * len(u.variety.marked)): -1},
    "undefined": lambda u, v: outside(),
    "not-independent": lambda u, v: product(u, v),
}


@pytest.mark.parametrize("status", TROUBLE)
def test_every_status_by_every_part(status):
    """Whatever is wrong with a rule is reported under its own status by the survey, by the laws and by the probe alike."""
    assert set(TROUBLE) == set(STATUSES) - {"agrees"}

    @candidate(on=PartialFlags())
    def rule(X, u, v):
        return TROUBLE[status](u, v) if u.length > 0 else TABLES[X][u, v] if X in TABLES else TROUBLE[status](u, v)

    began = time.perf_counter()
    outcomes = parts(rule)
    assert [outcome.part for outcome in outcomes][:2] == ["survey", "laws"]
    assert any(outcome.part.startswith("probe") for outcome in outcomes)
    for outcome in outcomes:
        assert outcome.status == status
        assert outcome.finding.row == Row.parse("Gr(1,2): (1) * ()")
        assert outcome.minimum.certified or status == "too-slow"
        assert text_report(outcome).startswith(f"{status}: rule at Gr(1,2): (1) * ()")
    assert time.perf_counter() - began < 30


def test_an_unstable_rule_never_agrees_for_long():
    """A rule that is wrong at random, one call in four, is never said to agree, nor refuted with a value that it may not have."""
    chance = random.Random(3)

    @candidate(on=Varieties(*SMALL))
    def rule(X, u, v):
        return TABLES[X][u, v] if chance.random() < 0.75 else {}

    for outcome in parts(rule):
        assert outcome.status == "unstable"


def test_a_rule_with_a_poor_memory():
    """A rule that is right at the first call for a row and wrong at the second is caught by the laws."""
    asked = set()

    @candidate(on=Varieties(*SMALL))
    def rule(X, u, v):
        fresh = (u, v) not in asked
        asked.add((u, v))
        return TABLES[X][u, v] if fresh else {}

    outcome = Examination(rule, BRIEF).laws(seed=1)
    assert outcome.status != "agrees"
    assert outcome.broken_law


# -- nothing compared is no agreement ----------------------------------------------------------------------------------

NOTHING = {
    "premise on rows": candidate(on=Grassmannians(), premise=lambda X, u, v: False),
    "premise on cases": candidate(on=Grassmannians(), premise=lambda X, u, v, w, d: False),
    "premise that forgets to return": candidate(on=CompleteFlags(), premise=lambda X, u, v: None),
    "no member": candidate(on=Grassmannians().where(lambda X: False, words="none")),
    "out of reach": candidate(on=Varieties("Fl(9)", "E8/B")),
}


@pytest.mark.parametrize("name", NOTHING)
def test_nothing_compared(name):
    """Where nothing is compared no part says "agrees"."""

    def rule(X, u, v):
        return {}

    outcomes = parts(NOTHING[name](rule))
    assert outcomes, "the survey at least says so"
    assert all(outcome.status == "undefined" for outcome in outcomes)
    assert all("nothing compared" in outcome.verdict for outcome in outcomes)


def test_no_time():
    """Without time for a single row the survey does not say "agrees"."""
    outcome = Examination(rule_by_rows(), replace(BRIEF, survey=0.0)).survey()
    assert outcome.status != "agrees"
    assert (outcome.rows, outcome.cases) == (0, 0)
    examination = Examination(rule_by_rows(), replace(BRIEF, laws=-1.0))
    assert examination.laws() is None
    assert examination.probe([Fl(4)], -1.0) is None


@pytest.mark.parametrize("by_rows", [True, False], ids=["premise on rows", "premise on cases"])
def test_one_case_outside(by_rows):
    """A case or row outside the premise, the family or the ring is refused: comparing nothing is no agreement."""
    on_rows = lambda X, u, v: u.length == 1  # noqa: E731
    on_cases = lambda X, u, v, w, d: u.length == 1  # noqa: E731

    @candidate(on=Varieties("Fl(3)"), premise=on_rows if by_rows else on_cases)
    def rule(X, u, v):
        return TABLES[X][u, v]

    examination = Examination(rule)
    inside = "Fl(3): [132] * [321]"
    assert examination.case(Row.parse(inside)).status == "agrees"
    assert examination.case(Case.parse(f"{inside} -> [312], q^(0,1)")).status == "agrees"
    for place in (
        Case.parse("Fl(3): [321] * [321] -> [312], q^(1,1)"),
        Row.parse("Fl(3): [321] * [321]"),
        Case.parse("Gr(2,4): (1) * () -> (1)"),
        Row.parse("Gr(2,4): (1) * ()"),
    ):
        with pytest.raises(ConjcheckError, match="expected a "):
            examination.case(place)


def test_one_case_in_the_classical_ring():
    """A case with q, or a row without a term of degree 0, says nothing about a classical rule: it is refused."""

    @candidate(on=Grassmannians(), ring="classical")
    def rule(X, u, v, w):
        return TABLES[X][u, v].get((w, (0,)), 0)

    examination = Examination(rule)
    assert examination.case(Case.parse("Gr(2,4): (1) * (2,1) -> (2,2)")).status == "agrees"
    for place in (Case.parse("Gr(2,4): (1) * (2,1) -> (), q^(1)"), Row.parse("Gr(2,4): (2,1) * (2,1)")):
        with pytest.raises(ConjcheckError, match="expected a "):
            examination.case(place)


def test_one_case():
    """A single case is compared, confirmed and explained, and nothing is said about smaller ones."""
    case = cases_of(F)[100]
    outcome = Examination(rule_by_cases([case, cases_of(F)[3]])).case(Case(*case))
    assert (outcome.status, outcome.finding.where, outcome.minimum, outcome.layer) == ("refuted", Case(*case), None, None)
    assert outcome.confirmed_by
    assert outcome.explanation.kinds
    assert outcome.verdict.endswith("(smaller cases not looked at)")
    row = Examination(rule_by_cases([case])).case(Row(*case[:3]))
    assert row.finding.where == Case(*case)


def test_the_numbers_of_one_row():
    """A single row that agrees is reported with the number of its cases."""
    outcome = Examination(rule_by_cases()).case(Row.parse("Fl(3): [132] * [321]"))
    assert (outcome.status, outcome.rows, outcome.cases) == ("agrees", 1, 7)
    assert "7 cases" in outcome.scope


# -- the parts together ------------------------------------------------------------------------------------------------


def test_a_fault_beyond_the_survey():
    """A fault that only the probe meets is walked down to the smallest one, and certified if there is time."""

    @candidate(on=Varieties("Fl(4)"))
    def rule(X, u, v):
        return TABLES[X][u, v] if u.length + v.length < 7 else {}

    first = next(case for case in cases_of(Fl(4)) if case[1].length + case[2].length == 7 and truth(Fl(4))[case[1:3]].get(case[3:]))
    for minimise, certified in ((60.0, True), (0.0, False)):
        examination = Examination(rule, replace(BRIEF, minimise=minimise))
        outcome = examination.probe([Fl(4)], 5.0, seed=1)
        assert (outcome.part, outcome.status, outcome.minimum.certified) == ("probe[n=4]", "refuted", certified)
        if certified:
            assert outcome.finding.where == Case(*first)
        assert examination.failure is outcome


def test_laws_lead_to_the_smallest_failure():
    """A rule that breaks a law is refuted at its smallest failing case, with the law that gave it away."""
    table = TABLES[F]

    @candidate(on=Varieties("Fl(3)"))
    def rule(X, u, v):
        return table[u, v] if u.length <= v.length else {}

    outcome = Examination(rule, BRIEF).laws(seed=1)
    assert (outcome.part, outcome.status) == ("laws", "refuted")
    assert outcome.finding.where == Case.parse("Fl(3): [132] * [123] -> [132], q^(0,0)")
    assert outcome.minimum.certified
    assert "not symmetric" in outcome.explanation.kinds
    assert outcome.broken_law.split(":")[0] in ("unit", "commutativity", "S3-symmetry", "Seidel symmetry")


@pytest.mark.parametrize("premise", [lambda X, u, v: slow(), lambda X, u, v, w, d: slow(), lambda X, u, v: outside()])
def test_premises_in_trouble(premise):
    """A premise that loops or raises is reported by every part, in bounded time."""

    @candidate(on=Varieties("Fl(3)", "Fl(4)"), premise=premise)
    def rule(X, u, v):
        return TABLES[X][u, v]

    began = time.perf_counter()
    assert {outcome.status for outcome in parts(rule)} <= {"too-slow", "undefined"}
    assert all(outcome.finding is not None for outcome in parts(rule))
    assert time.perf_counter() - began < 30


@pytest.mark.parametrize("name", ["Fl(6)", "Gr(3,8)", "Fl(1,2;6)"])
def test_families_without_small_spaces(name):
    """Laws are tried on the smallest spaces there are, however large."""

    @candidate(on=Varieties(name))
    def rule(X, u, v):
        return {}

    assert Examination(rule).small_spaces() == [FlagVariety(name)]
    assert Examination(rule, BRIEF).laws(seed=1).status == "refuted"


def test_unfinished():
    """Probes draw on spaces that the survey has not completed; on all of them if it has."""
    examination = Examination(rule_by_rows(on=(F, Fl(4))))
    assert examination.unfinished([F, Fl(4)]) == [F, Fl(4)]
    examination.survey()
    assert examination.unfinished([F, Fl(4), Gr(2, 4)]) == [Gr(2, 4)]
    assert examination.unfinished([F]) == [F]
