"""Diagnosis: planted faults are found again, counts are exact, suggestions stand, and nothing a rule does breaks it."""

import importlib
import json
import sys
from itertools import combinations
from pathlib import Path
from time import perf_counter, sleep
from types import SimpleNamespace

import faulty
import numpy as np
import pytest

from conjcheck import CompleteFlags, Grassmannians, ProjectiveSpaces, Varieties, candidate, claim, product, simple_roots
from conjcheck.geometry.case import Case, Row
from conjcheck.oracle.guard import Watch, watched
from conjcheck.report.text import text_report
from conjcheck.testing.bank import TestBank
from conjcheck.testing.compare import Comparer
from conjcheck.testing.conditions import Found, Test, iter_tests
from conjcheck.testing.diagnose import diagnose, worded
from conjcheck.testing.diagnosis import Diagnosis, Suggestion
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.features import FEATURES, Feature
from conjcheck.testing.finding import Finding
from conjcheck.testing.gather import gather, place
from conjcheck.testing.minimise import Minimum, layer_of
from conjcheck.testing.search import inside, premises, search
from conjcheck.testing.survey import survey

BUNDLED = Path(__file__).parents[2] / "conjectures"


def bundled(name):
    """A bundled conjecture."""
    if str(BUNDLED) not in sys.path:
        sys.path.append(str(BUNDLED))
    return getattr(importlib.import_module(name), name)


def worked_out(conjecture, *, budget=1.0):
    """The diagnosis of a false conjecture whose survey finds the failure, and the comparer."""
    comparer = Comparer(conjecture)
    finding = survey(comparer, budget=60).finding
    layer = layer_of(comparer, finding, budget=0.3)
    return diagnose(comparer, Minimum(finding, True, 0), layer, budget=budget), comparer


def right(u, v):
    """The right product, as a rule under test may know it."""
    return faulty.terms(u, v)


# -- the search in the bank -------------------------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(4))
def test_the_bank_finds_what_brute_force_finds(seed):
    """Of all tests and pairs that hold at every failure, the best one is as good as the best found by trying all; counts are exact."""
    chooser = np.random.default_rng(seed)
    K = 300
    values = [
        (Feature(f"f{k}", f"not f{k}", "row", lambda cases: None, "", int(k % 3)), chooser.random(K) < 0.8) for k in range(9)
    ] + [(Feature(f"the number g{k}", "", "case", lambda cases: None, "", 1), chooser.integers(0, 4, K)) for k in range(3)]
    fails = values[0][1] & values[1][1] & (chooser.random(K) < 0.4)
    informative = chooser.random(K) < 0.5
    bank = TestBank(values, fails, informative, (5, 2))
    by_feature = dict(values)
    vectors = {test: test.holds(by_feature[test.feature]) for test in bank.tests}

    def counts(vector):
        return tuple(int((vector & part).sum()) for part in (fails, ~fails & informative, ~fails & ~informative))

    found = bank.covering()
    for one in found:
        parts = [vectors[test] for test in one.tests]
        vector = np.logical_and.reduce(parts) if one.join == "and" else np.logical_or.reduce(parts)
        assert counts(vector) == (one.failing, one.informative, one.zeros)
        assert one.failing == fails.sum()

    def saved(vector, oddity, price):
        total = (~fails & informative).sum(), (~fails & ~informative).sum()
        _, i, z = counts(vector)
        return 5 * np.log2((total[0] + 1) / (i + 1)) + 2 * np.log2((total[1] + 1) / (z + 1)) - oddity - price

    best = max(
        [saved(vector, test.oddity, 0) for test, vector in vectors.items() if vector[fails].all()]
        + [
            saved(vectors[a] & vectors[b], a.oddity + b.oddity, 10)
            for a, b in combinations(vectors, 2)
            if (vectors[a] & vectors[b])[fails].all()
        ]
        + [
            saved(vectors[a] | vectors[b], a.oddity + b.oddity, 11)
            for a, b in combinations(vectors, 2)
            if (vectors[a] | vectors[b])[fails].all()
        ]
    )
    assert bank.score(found[0]) == pytest.approx(best)


def test_opposites():
    """The opposite of a test and of a condition holds exactly where it does not, and the opposite of that is the first again."""
    values = {
        Feature("n", "", "space", lambda cases: None): np.arange(8),
        Feature("yes", "no", "row", lambda cases: None): np.arange(8) % 2 == 0,
        Feature("the word", "", "row", lambda cases: None): np.array(list("aabbccdd")),
    }
    tests = [(test, column) for feature, column in values.items() for test in iter_tests(feature, column)]
    assert len(tests) > 20
    for test, column in tests:
        assert (test.holds(column) ^ test.opposite.holds(column)).all(), test.words
        assert test.opposite.opposite == test
        assert test.words != test.opposite.words
    pair = Found((tests[0][0], tests[-1][0]), "and")
    assert pair.opposite.join == "or"
    assert pair.opposite.opposite == pair


def test_what_reaches_on():
    """A bound on n and a single large number are no premises; a lower bound, a small number and a word are."""
    n = Feature("n", "", "space", lambda cases: None, grows=True)
    rows = Feature("the number of rows", "", "row", lambda cases: None)
    said = {
        (n, "<=", 5): False,
        (n, ">=", 5): True,
        (n, "==", 2): False,
        (rows, "<=", 5): True,
        (rows, "==", 5): False,
        (rows, "!=", 1): True,
        (rows, "==", "A"): True,
    }
    for (feature, sign, value), expected in said.items():
        assert Found((Test(feature, sign, value),), "and").reaches_on == expected
        assert Found((Test(rows, ">=", 2), Test(feature, sign, value)), "or").reaches_on == expected


# -- planted faults ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "name",
    ["only d > 0", "u not vexillary", "u after v", "two hooks", "l(u) + l(v) > dim"],
)
def test_planted_faults_are_named(name):
    """A condition equivalent to the planted one on all nonzero constants looked at is shown, and on the next n, not looked at, as well."""
    fault = next(fault for fault in faulty.FAULTS if fault.name == name)
    for budget in (1.2, 10):  # the second for a machine that is busy
        measured = faulty.measure(fault, budget=budget, seconds=budget / 3)
        if measured.named and measured.still and measured.holds:
            break
    assert measured.named
    assert measured.still
    assert measured.holds


@pytest.mark.slow
def test_how_many_planted_faults_are_found(capsys):
    """Of the 24 planted faults at least 22 are named, and at least 20 suggested premises hold at the next n; the figures are printed."""
    lines, (named, still, holds) = faulty.figures(faulty.FAULTS, budget=4)
    strange, (_, _, strange_holds) = faulty.figures(faulty.STRANGE, budget=4)
    with capsys.disabled():
        print("", *lines, f"named {named}, at the next n {still}, premises that hold there {holds}, of {len(lines)}", sep="\n")
        print("conditions that no feature says:", *strange, f"premises that hold {strange_holds} of {len(strange)}", sep="\n")
    assert named >= 22
    assert still >= 22
    assert holds >= 20


def test_a_bound_on_the_space_is_no_premise():
    """A rule that is wrong from n = 4 on is said to be so, but no premise with a bound on n is suggested."""
    measured = faulty.measure(next(fault for fault in faulty.FAULTS if fault.name == "n >= 4"), budget=1, seconds=0.4)
    assert measured.found.conditions[0].words == "n >= 4"
    assert measured.found.conditions[0].informative == 0
    assert measured.found.premise is None


def test_a_premise_that_fails_on_fresh_rows_is_refused():
    """Where everything fails in the next rank, every premise is tried there, refused, and none is suggested."""

    @candidate(on=Grassmannians().where(lambda X: 3 <= X.n <= 5, words="3 <= n <= 5"))
    def worse_and_worse(X, u, v, w, d):
        true = right(u, v).get((w, d), 0)
        return true + (true > 0 and (X.n == 5 or sum(d) > 0))

    found, _ = worked_out(worse_and_worse)
    assert found.suggestion is None
    assert found.refused >= 1
    assert "failed there" in found.suggested
    assert ",5)" in found.where  # what failed there is looked at, too


def test_premises_that_are_passed_over():
    """Premises that bound the space, ask the oracle, or keep nothing are passed over; premises on rows come before others as good."""
    n, on_rows, on_cases, asking = (
        Feature("n", "", "space", lambda cases: None, grows=True),
        Feature("on rows", "not", "row", lambda cases: None),
        Feature("on cases", "not", "case", lambda cases: None),
        Feature("asking", "not", "row", lambda cases: None, asks=True),
    )
    tests = (Test(n, ">=", 4), Test(asking, "is"), Test(on_cases, "is"), Test(on_rows, "is"))
    conditions = [*(Found((test,), "and", 5, 0, 9) for test in tests), Found((Test(n, "<=", 2),), "and", 5, 10, 10)]
    found = premises(SimpleNamespace(score=lambda condition: 1.0), conditions, 10)
    assert [premise.tests for premise in found] == [(Test(on_rows, "is not"),), (Test(on_cases, "is not"),)]


def test_a_premise_does_not_ask_the_oracle():
    """Where a rule is wrong at constants above 1, that is said, and the premise is made of something else."""

    @candidate(on=Varieties("Gr(3,6)"))
    def at_most_one(X, u, v):
        return dict.fromkeys(right(u, v), 1)

    comparer = Comparer(at_most_one)
    found = search(comparer, [survey(comparer, budget=30).finding.row], budget=1.5)
    assert found.conditions[0].asks
    assert found.conditions[0].informative == 0
    assert found.premise is None or not found.premise.asks


# -- bundled false rules ------------------------------------------------------------------------------------------------


def test_the_lantern_rule():
    """The lantern rule fails exactly at d = 1 where v has an empty row, as far as anything is not 0; elsewhere it holds."""
    found, comparer = worked_out(bundled("lantern_rule"), budget=2.5)
    assert found.signs == ("always too large, always by 1", "only at d > 0")
    texts = [condition.words for condition in found.conditions[:2]]
    assert any("the number of empty rows of v is at least 1" in text and ("d > 0" in text or "|d| = 1" in text) for text in texts)
    assert found.conditions[0].informative == 0
    assert found.conditions[0].failing == found.failing > 10
    assert found.suggestion is not None
    assert found.suggestion.narrows
    assert found.suggestion.fresh > 20
    holds = eval(found.suggestion.premise.removeprefix("premise="))
    tables = gather(comparer, [faulty.FlagVariety("Gr(4,9)")], deadline=np.inf, most_rows=150)
    for table in tables:
        for k in np.flatnonzero(table.fails):
            case = place(table, int(k))
            assert not holds(case.X, case.u, case.v, case.w, case.d)
    assert sum(table.fails.sum() for table in tables) > 5


def test_step_puzzles():
    """The step puzzles give one too few, at three steps at least; a sub-class is suggested on which they are right."""
    rule = bundled("step_puzzles")
    comparer = Comparer(rule)
    row = Row.parse("Fl(1,2,3;5): [14325] * [21534]")
    finding = comparer.row(row).finding
    found = diagnose(comparer, Minimum(finding, True, 0), layer_of(comparer, finding, budget=0.5), budget=4)
    assert found.signs == ("always too small, always by 1",)
    assert found.failing >= 3
    assert all(condition.failing == found.failing for condition in found.conditions[:1])
    assert found.suggestion is not None
    assert found.suggestion.cases > 500


# -- counts, claims, rings ---------------------------------------------------------------------------------------------


def test_counts_are_exact():
    """The counts of a condition are those of its expression, case by case, and failing and agreeing cases are all cases looked at."""
    fault = next(fault for fault in faulty.FAULTS if fault.name == "l(u) + l(v) > dim")
    comparer = Comparer(faulty.planted(fault))
    rows = [survey(comparer, budget=9).finding.row]
    found = search(comparer, rows, budget=1)
    said = worded(comparer, found)
    assert said.failing == sum(int(table.fails.sum()) for table in found.tables)
    assert said.failing + said.agreeing > 300
    assert said.agreeing > said.informative > 0
    for one in found.conditions:
        if not one.expression:
            continue
        failing = informative = zeros = 0
        for table in found.tables:
            for k in range(len(table)):
                case = place(table, k)
                truth = right(case.u, case.v).get((case.w, case.d), 0)
                wrong = truth + (truth > 0 and case.u.length + case.v.length > case.X.dim)
                assert table.fails[k] == (wrong != truth)
                assert table.errors[k] == wrong - truth
                assert table.informative[k] == (truth > 0)
                names = {name: getattr(case, name) for name in "Xuvwd"} | {"combinations": combinations}
                if eval(one.expression, names):
                    failing += wrong != truth
                    informative += wrong == truth != 0
                    zeros += wrong == truth == 0
        assert (failing, informative, zeros) == (one.failing, one.informative, one.zeros)
    within = [inside(found.premise, table.cases) for table in found.tables]
    fresh = sum(map(len, found.fresh))
    assert said.suggestion.fresh == fresh > 20
    assert said.suggestion.cases == fresh + sum(int(holds.sum()) for holds in within)
    assert not any((holds & table.fails).any() for holds, table in zip(within, found.tables, strict=True))
    assert all(inside(found.premise, table.cases).all() for table in found.fresh)


def test_signs_and_first_failures():
    """Too small and too large errors are counted, and in each direction the smallest failure is given."""

    @candidate(on=Grassmannians())
    def off(X, u, v, w, d):
        true = right(u, v).get((w, d), 0)
        return true and (true + 2 if d[0] > 1 else 0 if d == (1,) and X.n >= 4 else true)

    found, _ = worked_out(off)
    assert found.signs[0].startswith("too small at ")
    assert found.signs[0].endswith("by 1 to 2")
    assert found.signs[1] == "only at d > 0"
    firsts = dict(found.firsts)
    assert str(firsts["n = 4"]).startswith("Gr(1,4): ")
    assert firsts["|d| = 1"].d == (1,)
    assert found.conditions[0].words in ("d > 0 (some q occurs); and n >= 4", "n >= 4; and d > 0 (some q occurs)", "deg q^d >= 4")


def test_claims():
    """A claim about constants and a claim about rows are diagnosed as well; there are no signs of errors."""

    @claim(on=Grassmannians())
    def no_q(X, u, v, w, d, N):
        return sum(d) == 0 or N(u, v, w, d) == 0

    found, _ = worked_out(no_q)
    assert found.signs == ("only at d > 0",)
    assert found.conditions[0].words == "d > 0 (some q occurs)"
    assert found.conditions[0].informative == 0

    @claim(on=Grassmannians(), features={"of cases": lambda X, u, v, w, d: True})
    def few_terms(X, u, v, N):
        return u.length < 2 or v.length < 2 or len(N.product(u, v)) == 0

    found, _ = worked_out(few_terms)
    assert found.signs == ()
    assert found.conditions[0].words == "the smaller of l(u) and l(v) is at least 2"
    assert found.conditions[0].agreeing == 0
    assert found.suggestion is not None
    assert found.suggestion.on_rows
    assert isinstance(found.firsts[0][1], Row)
    assert found.unusable == ("of cases: it is a feature of cases, and the claim is about whole products",)


def test_equivariant_rings():
    """In an equivariant ring there are conditions, but no sizes of errors."""

    @candidate(on=ProjectiveSpaces(), ring="equivariant")
    def unit_only(X, u, v):
        return {v: simple_roots(X)[0] * 0 + 1} if u.length == 0 else {}

    found, _ = worked_out(unit_only)
    assert found.signs == ()
    assert found.failing > 0
    assert found.conditions[0].informative == 0


def test_features_of_the_user_take_part():
    """A user's feature that says the planted condition is found and makes the premise; unusable ones are reported, and nothing breaks."""

    @candidate(
        on=CompleteFlags(),
        ring="classical",
        features={
            "l(u) is even": lambda X, u, v, w, d: u.length % 2 == 0,
            "broken": lambda X, u, v, w, d: {}[d],
            "asks": lambda X, u, v, w, d: len(product(u, v)) > 1,
        },
    )
    def even(X, u, v):
        return {w: n + (u.length % 2 == 0) for (w, d), n in right(u, v).items() if not any(d)}

    found, _ = worked_out(even, budget=1.5)
    assert found.conditions[0].words == "l(u) is even"
    assert found.conditions[0].informative == 0
    assert found.suggestion.words == "not: l(u) is even"
    assert [text.split(":")[0] for text in found.unusable] == ["broken", "asks"]
    assert "KeyError" in found.unusable[0]
    assert "oracle" in found.unusable[1]


def test_a_rule_that_misbehaves_elsewhere():
    """A rule that raises, or gives no count, at other rows is diagnosed by the rows where it answers."""

    @candidate(on=Grassmannians())
    def moody(X, u, v, w, d):
        if X.n == 5 and u.length == 2:
            raise SystemExit
        if X.n == 6 and v.length == 3:
            return -1
        return right(u, v).get((w, d), 0) * (not any(d) or X.n < 3)

    found, _ = worked_out(moody)
    assert found.failing > 0
    assert found.signs[0].startswith("always too small")
    assert found.signs[1] == "only at d > 0"


def test_a_slow_rule():
    """A rule that takes a tenth of a second a case does not hold up a diagnosis for long."""

    @candidate(on=Grassmannians())
    def slow(X, u, v, w, d):
        sleep(0.1)
        return right(u, v).get((w, d), 0) * (not any(d))

    comparer, started = Comparer(slow), perf_counter()
    row = Row.parse("Gr(2,5): (3,3) * (3,3)")
    finding = Finding("refuted", row)
    found = diagnose(comparer, Minimum(finding, True, 0), budget=1)
    assert perf_counter() - started < 10
    assert found is None or found.failing > 0


def test_nothing_to_compare_with():
    """A rule that is wrong everywhere has no diagnosis: there is no agreement."""

    @candidate(on=Varieties("Gr(1,2)"), ring="classical", premise=lambda X, u, v: v.length == 0)
    def never(X, u, v, w):
        return 7

    found, _ = worked_out(never)
    assert found is None


def test_a_whole_family_looked_at():
    """Where no fresh row is left a premise is still suggested, and it is said that there was nothing to compare it on."""

    @candidate(on=Varieties("Gr(2,4)"))
    def bad(X, u, v, w, d):
        return right(u, v).get((w, d), 0) * (not any(d))

    found, _ = worked_out(bad)
    assert found.suggestion.words == "d = 0 (classical)"
    assert found.suggestion.fresh == 0
    assert "all of them had a part in its choice" in found.suggested


# -- the pipeline ---------------------------------------------------------------------------------------------------------


def test_reports():
    """The outcome of a refuted rule carries the diagnosis into the text and into JSON."""
    fault = next(fault for fault in faulty.FAULTS if fault.name == "only d > 0")
    outcome = Examination(faulty.planted(fault), EFFORTS["quick"]).survey()
    assert outcome.status == "refuted"
    text = text_report(outcome)
    lines = text.splitlines()
    assert any(line.startswith("errors       always too large, always by 1; only at d > 0") for line in lines)
    assert any(line.startswith("failures     ") for line in lines)
    assert any(line.startswith("suggestion   the rule may hold when d = 0 (classical)") for line in lines)
    assert "premise=lambda X, u, v, w, d: not any(d)" in text
    plain = json.loads(json.dumps(outcome.as_json()))["diagnosis"]
    assert plain["conditions"][0]["words"] == "d > 0 (some q occurs)"
    assert plain["conditions"][0]["failing"] == plain["failing"]
    assert plain["suggestion"]["premise"].startswith("premise=")
    assert Case.parse(plain["firsts"]["n = 2"])


@pytest.mark.parametrize(("name", "arguments"), [("w Grassmannian", "X, u, v, w"), ("u not vexillary", "X, u, v")])
def test_a_suggestion_can_be_declared(name, arguments):
    """The suggested text is a premise that a declaration takes, and with it the rule agrees where it was refuted."""
    fault = next(fault for fault in faulty.FAULTS if fault.name == name)
    rule = faulty.planted(fault)
    found, _ = worked_out(rule)
    text = found.suggestion.premise
    assert text.startswith(f"premise=lambda {arguments}: ")
    assert ("from itertools import combinations" in found.suggested) == ("combinations(" in text)
    premise = eval(text.removeprefix("premise="), {"combinations": combinations})
    declared = candidate(on=Varieties("Fl(3)", "Fl(4)"), ring="classical", premise=premise)(rule.rule)
    done = survey(Comparer(declared), budget=30)
    assert done.finding is None
    assert done.coverage.whole_family
    assert done.coverage.nonzero > 50


def test_the_guard_is_left_as_it_was():
    """After a diagnosis nobody is watched any more."""
    worked_out(faulty.planted(faulty.FAULTS[1]), budget=1)
    with watched(watch := Watch(forbidding=False)):
        pass
    assert not watch.asked
    X = faulty.FlagVariety("Gr(2,4)")
    assert product(X.identity, X.identity)


def test_every_feature_says_what_it_needs():
    """A feature depends on the space, the row or the case; a premise on rows needs no case."""
    assert {feature.needs for feature in FEATURES} == {"space", "row", "case"}


def short(X, u, v):
    """A premise with a name."""
    return u.length <= 5


class Called:
    """A premise that is no function."""

    def __call__(self, X, u, v):
        return u.length <= 5


@pytest.mark.parametrize(
    ("own", "words"),
    [
        (lambda X, u, v: u.length <= 5, "(u.length <= 5) and (not any(d))"),
        (short, "(short(X, u, v)) and (not any(d))"),
        (Called(), "(your own premise) and (not any(d))"),
    ],
    ids=["lambda", "named", "neither"],
)
def test_a_suggestion_keeps_the_premise_that_is_there(own, words):
    """The text for the declaration is joined to the user's own premise, which it replaces, in Python where its source is at hand."""
    fault = next(fault for fault in faulty.FAULTS if fault.name == "only d > 0")
    planted = faulty.planted(fault)

    def rule(X, u, v):
        return planted.rule(X, u, v)

    assert rule.__globals__["short"] is short
    found, _ = worked_out(candidate(on=planted.on, premise=own)(rule))
    assert found.suggestion.premise == f"premise=lambda X, u, v, w, d: {words}"


def test_a_suggestion_without_a_text():
    """A premise that no short expression says has no text for the declaration, and that is said."""
    one = Suggestion("u is odd", "", True, 5, 4, 3, "Gr(2,4)")
    assert one.premise == ""
    assert "no short Python expression says it" in Diagnosis(1, 5, 4, "Gr(2,4)", suggestion=one).suggested
