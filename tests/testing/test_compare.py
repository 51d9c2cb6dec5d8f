"""Comparing rows: every status, the exact cases compared, and attempts to be believed wrongly."""

import itertools
import sys
import time
import warnings
from collections.abc import Mapping
from fractions import Fraction

import numpy as np
import pytest
import sympy
from planted import cases_of, outcomes_of, rule_by_cases, rule_by_rows, truth

import conjcheck
from conjcheck import Case, Fl, Gr, OutsideDomain, Row, Varieties, candidate, claim, constant, product, table
from conjcheck.errors import EnginesDisagree
from conjcheck.oracle import ENGINES, row_terms, witnesses
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.comparison import comparison
from conjcheck.oracle.grassmannian import residue_table
from conjcheck.oracle.recursion import complete_flag_ring
from conjcheck.testing.asker import Asker
from conjcheck.testing.compare import Comparer, RowResult

G, F = Gr(2, 4), Fl(3)
ROW = Row.parse("Fl(3): [132] * [321]")
"""Its product is q2 S312 + q1 q2, two of seven outcomes."""
ZERO, FIRST = (Case.parse(f"{ROW} -> {w}, q^(0,1)") for w in ("[231]", "[312]"))
"""The first outcome, a zero, and the second, a one."""


def judged(rule, row=ROW, **choices):
    """What comparing one row gives."""
    comparer = Comparer(rule, **choices)
    with comparer.limit:
        return comparer.row(row)


def by_cases(body, on=(F,), **choices):
    """A candidate that answers ``body(true value, w, d)`` case by case."""

    @candidate(on=Varieties(*on), **choices)
    def rule(X, u, v, w, d):
        return body(truth(X)[u, v].get((w, d), 0), w, d)

    return rule


def by_rows(body, on=(F,), **choices):
    """A candidate that answers ``body(true product)``."""

    @candidate(on=Varieties(*on), **choices)
    def rule(X, u, v):
        return body(dict(truth(X)[u, v]))

    return rule


OUTCOMES = outcomes_of(F, 4)
truth(G), truth(F)  # filled before any rule runs


# -- what is compared --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("X", [Gr(1, 2), G, F], ids=str)
def test_every_outcome_once_in_order(X):
    """Case by case, a rule is asked for every outcome of the degree axiom, zeros included, once, in the order of cases."""
    asked = []
    tables = truth(X)

    @candidate(on=Varieties(X))
    def rule(X, u, v, w, d):
        asked.append((X, u, v, w, d))
        return tables[u, v].get((w, d), 0)

    for u, v in itertools.product(X.classes, repeat=2):
        asked.clear()
        result = judged(rule, Row(X, u, v))
        outcomes = outcomes_of(X, u.length + v.length)
        assert asked == [(X, u, v, w, d) for w, d in outcomes]
        assert result == RowResult(len(outcomes), len(tables[u, v]), None, True)


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_counts_of_a_true_rule(kind):
    """Cases and nonzero cases are counted the same, whichever way a rule answers."""
    rule = kind(on=(F,))
    results = [judged(rule, Row(F, u, v)) for u in F.classes for v in F.classes]
    assert sum(result.cases for result in results) == len(cases_of(F)) == 189
    assert sum(result.nonzero for result in results) == 45
    assert all(result.complete and result.finding is None for result in results)


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_the_first_difference_in_a_row(kind):
    """Of several faults in one row the first in the order of cases is found, with both values."""
    outcomes = outcomes_of(F, 6)
    faults = [(F, F.point, F.point, *outcomes[k]) for k in (9, 4, 7)]
    finding = judged(kind(faults, on=(F,)), Row(F, F.point, F.point)).finding
    w, d = outcomes[4]
    true = truth(F)[F.point, F.point].get((w, d), 0)
    assert (finding.status, finding.where) == ("refuted", Case(F, F.point, F.point, w, d))
    assert (finding.rule, finding.oracle) == (true + 1, true)


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_all_differences_of_a_row(kind):
    """``findings`` lists exactly the faults of a row, in order; a true row has none."""
    outcomes = outcomes_of(F, 6)
    faults = [(F, F.point, F.point, *outcomes[k]) for k in (9, 2, 5)]
    comparer = Comparer(kind(faults, on=(F,)))
    with comparer.limit:
        found, through = comparer.findings(Row(F, F.point, F.point))
        assert comparer.findings(Row(F, F.identity, F.point)) == ([], True)
        assert comparer.findings(Row(F, F.point, F.point), deadline=0.0)[1] is False
    assert through
    assert [f.where for f in found] == [Case(F, F.point, F.point, *outcomes[k]) for k in (2, 5, 9)]


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_one_case(kind):
    """``case`` looks at the one case alone: the faults beside it do not count."""
    outcomes = outcomes_of(F, 6)
    comparer = Comparer(kind([(F, F.point, F.point, *outcomes[2])], on=(F,)))
    with comparer.limit:
        assert comparer.case(Case(F, F.point, F.point, *outcomes[1])) is None
        assert comparer.case(Case(F, F.point, F.point, *outcomes[3])) is None
        assert comparer.case(Case(F, F.point, F.point, *outcomes[2])).status == "refuted"


def test_values_outside_the_degree_axiom():
    """A value that a whole product holds where lengths and degrees do not add up is a difference from 0."""
    finding = judged(by_rows(lambda true: true | {(F.point, (3, 0)): 1})).finding
    assert (finding.status, finding.where, finding.rule, finding.oracle) == (
        "refuted",
        Case(F, ROW.u, ROW.v, F.point, (3, 0)),
        1,
        0,
    )
    assert not finding.where.obeys_degree_axiom


@pytest.mark.parametrize("wrong", [None, 5], ids=["true", "false"])
def test_explicit_zeros(wrong):
    """Zeros written into a product change nothing: not the verdict, not the numbers."""
    zeros = dict.fromkeys(OUTCOMES, 0)
    result = judged(by_rows(lambda true: zeros | true | ({(ZERO.w, ZERO.d): wrong} if wrong else {})))
    if wrong:
        assert (result.finding.where, result.finding.rule) == (ZERO, wrong)
    else:
        assert result == RowResult(7, 2, None, True)


def test_premise_on_rows():
    """Outside a premise on rows nothing is compared, and nothing is counted."""
    rule = by_rows(lambda true: {}, premise=lambda X, u, v: u.length != 1)
    assert judged(rule) == RowResult(0, 0, None, True)
    assert judged(rule, Row(F, F.identity, F.point)).finding.status == "refuted"


@pytest.mark.parametrize("answers", [by_cases, by_rows])
def test_premise_on_cases(answers):
    """Under a premise on cases the others may be wrong; the numbers count those inside."""
    premise = lambda X, u, v, w, d: w.length != 2  # noqa: E731
    wrong_outside = {
        by_cases: lambda true, w, d: 7 if w.length == 2 else true,
        by_rows: lambda true: {key: 7 if key[0].length == 2 else n for key, n in true.items()},
    }
    inside = sum(w.length != 2 for w, _ in OUTCOMES)
    assert inside == 3
    assert judged(answers(wrong_outside[answers], premise=premise)) == RowResult(3, 1, None, True)


def test_classical_ring():
    """In the classical ring only d = 0 is compared and the rule never hears of degrees."""
    asked = []

    @candidate(on=Varieties(G), ring="classical")
    def rule(X, u, v, w):
        asked.append(w)
        return truth(X)[u, v].get((w, (0,)), 0)

    one = G.schubert(partition=(1,))
    assert judged(rule, Row(G, one, one)) == RowResult(2, 2, None, True)
    assert asked == list(G.of_length(2))
    assert judged(rule, Row(G, one, G.point)) == RowResult(0, 0, None, True)


def test_classical_products_are_keyed_by_classes():
    """In the classical ring a whole product is keyed by classes alone."""
    one = G.schubert(partition=(1,))
    row = Row(G, one, one)
    right = candidate(on=Varieties(G), ring="classical")(_squares)
    assert judged(right, row) == RowResult(2, 2, None, True)
    wrong = by_rows(lambda true: {key: n for key, n in true.items() if not any(key[1])}, on=(G,), ring="classical")
    assert "expected keys as in {w: count}, got the key" in judged(wrong, row).finding.detail


def _squares(X, u, v):
    return dict.fromkeys(X.of_length(2), 1)


def test_a_sample_of_cases_keeps_every_nonzero_one():
    """With ``most_cases`` all nonzero constants are compared and a sample of the zeros, the same every time."""
    X = Fl(4)
    row = Row(X, X.point, X.point)
    tables, asked = truth(X), []

    @candidate(on=Varieties(X))
    def rule(X, u, v, w, d):
        asked.append((w, d))
        return tables[u, v].get((w, d), 0)

    total = len(outcomes_of(X, 12))
    comparer = Comparer(rule)
    with comparer.limit:
        result = comparer.row(row, most_cases=60)
        first = list(asked)
        asked.clear()
        again = comparer.row(row, most_cases=60)
        asked_again = list(asked)
        whole = comparer.row(row, most_cases=total)
    assert result == again
    assert first == asked_again == sorted(first, key=lambda key: (sum(key[1]), key[1], key[0].index))
    assert set(tables[row.u, row.v]) < set(first) < set(outcomes_of(X, 12))
    assert len(first) == result.cases <= 60
    assert not result.complete
    assert whole == RowResult(total, len(tables[row.u, row.v]), None, True)


def test_the_deadline_ends_a_row():
    """After the deadline a row ends between two calls, and says that it is not complete."""
    calls = []
    rule = by_cases(lambda true, w, d: calls.append(w) or (time.sleep(2) if len(calls) == 3 else None) or true)
    comparer = Comparer(rule)
    with comparer.limit:
        result = comparer.row(ROW, deadline=time.perf_counter() + 1.5)
    assert not result.complete
    assert result.finding is None
    assert len(calls) == result.cases == 3


# -- every status ------------------------------------------------------------------------------------------------------


class LooksRight(Mapping):
    """A mapping that is no dict."""

    def __init__(self, values):
        self.values_ = values

    def __getitem__(self, key):
        return self.values_[key]

    def __iter__(self):
        return iter(self.values_)

    def __len__(self):
        return len(self.values_)


AGREEING = {
    "int": lambda n: n,
    "numpy integer": np.int64,
    "numpy unsigned": np.uint8,
    "sympy Integer": sympy.Integer,
    "list": lambda n: [("object", k) for k in range(n)],
    "set": lambda n: set(range(n)),
    "generator": lambda n: (k for k in range(n)),
    "truth value": bool,
    "sympy sum": lambda n: sympy.Sum(1, (sympy.Symbol("k"), 1, n)).doit(),
}


@pytest.mark.parametrize("name", AGREEING)
def test_answers_that_agree(name):
    """Every exact way to give the right number agrees, for cases and as the values of a product."""
    convert = AGREEING[name]
    assert judged(by_cases(lambda true, w, d: convert(true))) == RowResult(7, 2, None, True)
    whole = by_rows(lambda true: LooksRight({key: convert(n) for key, n in true.items()}))
    assert judged(whole) == RowResult(7, 2, None, True)


WRONG = {
    "negative": (-1, "negative number -1"),
    "half": (0.5, "a float 0.5"),
    "float": (2.0, "a float 2.0"),
    "none": (None, "got None"),
    "text": ("1", "a str '1'"),
    "dict": ({"a": 1}, "a dict"),
    "fraction": (Fraction(1), "a Fraction"),
    "sympy Rational": (sympy.Rational(1, 2), "a Half"),
    "numpy float": (np.float64(1), "a float64"),
    "array": (np.array([1, 2]), "ndarray"),
    "unhashable": ([[1]], "hashable objects, got object 1 = [1]"),
    "sets": ([{1}, {2}], "hashable objects, got object 1 = {1}"),
    "duplicate": (["a", "b", "a"], "distinct objects, got 'a' a second time, as object 3"),
}


@pytest.mark.parametrize("name", WRONG)
def test_answers_that_are_no_counts(name):
    """An answer that is no count is ``not-a-count`` at its case, or for its row, even where the true value is 1."""
    answer, words = WRONG[name]
    finding = judged(by_cases(lambda true, w, d: answer if true else 0)).finding
    assert (finding.status, finding.where) == ("not-a-count", FIRST)
    assert words in finding.detail
    finding = judged(by_rows(lambda true: dict.fromkeys(true, answer))).finding
    assert (finding.status, finding.where) == ("not-a-count", ROW)
    assert words in finding.detail


@pytest.mark.parametrize(
    ("answer", "words"),
    [
        (None, "expected a mapping {(w, d): count} for a whole product, got NoneType None"),
        ([(F.point, (0, 0))], "got list"),
        (1, "got int 1"),
        ({(F.point, 0): 1}, "got the key"),
        ({F.point: 1}, "got the key"),
        ({(F.point,): 1}, "got the key"),
        ({(Gr(1, 4).point, (0,)): 1}, "sigma(3) is no class of Fl(3)"),
        ({("[321]", (0, 0)): 1}, "is no class of Fl(3)"),
        ({(F.point, (0,)): 1}, "expected 2 entries in d on Fl(3)"),
        ({(F.point, (0, -1)): 1}, "entries of 0 or more in d"),
        ({(F.point, (0.5, 0)): 1}, "got the key"),
    ],
    ids=lambda value: type(value).__name__,
)
def test_wrong_products(answer, words):
    """What is no mapping from outcomes is refused with the key and the form that was expected."""
    finding = judged(by_rows(lambda true: answer)).finding
    assert (finding.status, finding.where) == ("not-a-count", ROW)
    assert words in finding.detail


def test_one_outcome_under_two_keys():
    """Two keys that mean one outcome are refused: neither value may decide silently."""
    key, other = (FIRST.w, (0, 1)), (FIRST.w, range(2))
    for extra in ({other: 5}, {other: 1}):
        finding = judged(by_rows(lambda true, extra=extra: extra | true | {key: 1})).finding
        assert finding.status == "not-a-count"


def crash(true, w, d):
    """Divide by zero where the constant is 1."""
    return true // (1 - true)


def recursion(true, w, d):
    """Never end."""
    return recursion(true, w, d)


@pytest.mark.parametrize(
    ("body", "words"),
    [
        (crash, "ZeroDivisionError: integer division or modulo by zero"),
        (recursion, "RecursionError: maximum recursion depth exceeded"),
        (lambda true, w, d: sys.exit(3), "SystemExit: 3"),
        (lambda true, w, d: pytest.skip("enough"), "Skipped: enough"),
        (lambda true, w, d: pytest.fail("enough"), "Failed: enough"),
        (lambda true, w, d: warnings.warn("old", stacklevel=1), "UserWarning: old"),
        (lambda true, w, d: next(iter(())), "StopIteration"),
        (lambda true, w, d: (_ for _ in ()).throw(GeneratorExit), "GeneratorExit"),
        (lambda true, w, d: (1 // 0 for _ in "a"), "ZeroDivisionError"),
        (lambda true, w, d: setattr(w, "length", 0), "AttributeError: a Schubert class is immutable"),
        (lambda true, w, d: setattr(w.variety, "dim", 0), "AttributeError: a flag variety is immutable"),
        (lambda true, w, d: w.variety.classes.clear(), "AttributeError: 'tuple' object has no attribute 'clear'"),
    ],
    ids=[
        "error",
        "recursion",
        "exit",
        "skip",
        "fail",
        "warning",
        "stop",
        "generator exit",
        "in a generator",
        "class",
        "variety",
        "classes",
    ],
)
def test_crashes(body, words):
    """Whatever a rule raises is ``crashed`` at its case, with the traceback from the rule's file on."""
    rule = by_cases(body)
    finding = judged(rule).finding
    assert finding.status == "crashed"
    assert isinstance(finding.where, Case)
    assert words in finding.detail
    assert "conjcheck/testing" not in finding.trace
    assert "test_compare.py" in finding.trace or "pytest" in finding.detail
    whole = judged(by_rows(lambda true: {(w, d): body(n, w, d) for (w, d), n in true.items()})).finding
    if whole.status != "not-a-count":
        assert (whole.status, whole.where) == ("crashed", ROW)


def test_a_broken_exception():
    """An exception whose text cannot be had is a crash all the same."""

    class Mute(Exception):
        def __str__(self):
            raise ValueError("no words")

    def body(true, w, d):
        raise Mute

    assert judged(by_cases(body)).finding.status == "crashed"


def test_ctrl_c_goes_through():
    """Ctrl-C is the user's, not the rule's."""

    def body(true, w, d):
        raise KeyboardInterrupt

    comparer = Comparer(by_cases(body))
    with pytest.raises(KeyboardInterrupt), comparer.limit:
        comparer.row(ROW)
    assert product(ROW.u, ROW.v), "and the oracle answers again afterwards"


def test_crashes_with_changing_words():
    """A crash whose message differs from call to call is still a crash: the rule did the same thing each time."""

    def body(true, w, d):
        raise ValueError(object())

    assert judged(by_cases(body)).finding.status == "crashed"


def test_a_crash_before_a_difference():
    """Where a case crashes the rest of its row is not looked at, and that is said."""
    comparer = Comparer(by_cases(lambda true, w, d: 1 // 0 if (w, d) == (ZERO.w, ZERO.d) else true + 1))
    with comparer.limit:
        found, through = comparer.findings(ROW)
    assert [finding.status for finding in found] == ["crashed"]
    assert not through


def test_undefined():
    """``OutsideDomain`` is ``undefined``, with the reason that the rule gives."""

    def body(true, w, d):
        raise OutsideDomain("only hooks")

    finding = judged(by_cases(body)).finding
    assert finding.status == "undefined"
    assert finding.detail.endswith(": only hooks")


def test_printing_is_allowed(capsys):
    """A rule that prints is judged like any other."""
    assert judged(by_cases(lambda true, w, d: print("here") or true)).finding is None
    assert capsys.readouterr().out == "here\n" * 7


@pytest.mark.parametrize("answers", [by_cases, by_rows])
@pytest.mark.parametrize("wait", [lambda: time.sleep(9), lambda: sum(0 for _ in itertools.repeat(0))], ids=["sleeps", "loops"])
def test_too_slow(answers, wait):
    """A call beyond the limit is ``too-slow`` at its case or row, and ends soon after the limit."""
    bodies = {by_cases: lambda true, w, d: wait() if true else 0, by_rows: lambda true: wait()}
    began = time.perf_counter()
    finding = judged(answers(bodies[answers]), call_limit=0.15).finding
    assert time.perf_counter() - began < 6
    assert (finding.status, finding.where) == ("too-slow", FIRST if answers is by_cases else ROW)
    assert finding.detail == "one call took longer than 0.15 s"


def test_endless_objects_are_too_slow():
    """Objects without end that need time are stopped by the limit of calls."""
    finding = judged(by_cases(lambda true, w, d: (time.sleep(0.01) or k for k in itertools.count())), call_limit=0.15).finding
    assert finding.status == "too-slow"


def test_the_limit_is_per_call():
    """Many calls, each within the limit, may take longer than the limit together."""
    began = time.perf_counter()
    assert judged(by_cases(lambda true, w, d: time.sleep(0.15) or true), call_limit=0.6).finding is None
    assert time.perf_counter() - began > 0.9


# -- one answer --------------------------------------------------------------------------------------------------------


def test_two_answers():
    """A rule that gives another answer at the second call is ``unstable``, with both answers."""
    numbers = itertools.count(5)
    finding = judged(by_cases(lambda true, w, d: next(numbers) if true else 0)).finding
    assert (finding.status, finding.where) == ("unstable", FIRST)
    assert finding.detail.startswith("expected one answer for one case, got 5, and another time ")


def test_wrong_then_right():
    """A rule that is wrong once and right ever after is ``unstable``, by cases and by rows."""
    once = iter([1])
    assert judged(by_cases(lambda true, w, d: true + next(once, 0))).finding.status == "unstable"
    rows = iter([{}])
    assert judged(by_rows(lambda true: next(rows, true))).finding.status == "unstable"


def test_crash_then_right():
    """A rule that crashes once and is right ever after is ``unstable``."""
    once = iter([0])
    finding = judged(by_cases(lambda true, w, d: true // next(once, 1))).finding
    assert finding.status == "unstable"
    assert "ZeroDivisionError" in finding.detail


def test_used_up_iterator():
    """An iterator that is shared between calls is empty at the second: if the first count was wrong, that is ``unstable``."""
    shared = {}
    finding = judged(by_cases(lambda true, w, d: shared.setdefault((w, d), iter(range(true + 1))))).finding
    assert finding.status == "unstable"
    assert finding.detail == "expected one answer for one case, got 1, and another time 0"


def test_a_product_changed_by_its_rule_afterwards():
    """A rule that hands out one dictionary and empties it at the next call does not change what was compared."""
    kept = {}

    @candidate(on=Varieties(F))
    def rule(X, u, v):
        kept.clear()
        kept.update(truth(X)[u, v])
        return kept

    assert all(judged(rule, Row(F, u, v)).finding is None for u in F.classes for v in F.classes)
    kept.clear()
    assert judged(rule).finding is None


# -- independence ------------------------------------------------------------------------------------------------------


def _engine(name):
    return lambda X, u, v: ENGINES[name].row(u, v)


QUESTIONS = {
    "product": lambda X, u, v: product(u, v),
    "constant": lambda X, u, v: constant(u, v, X.point),
    "table": lambda X, u, v: next(iter(table(X))),
    "row_terms": lambda X, u, v: row_terms(u, v),
    "attribute": lambda X, u, v: conjcheck.oracle.product(u, v),
    "witnesses": lambda X, u, v: witnesses(Case(X, u, v, X.point, (0,) * len(X.marked))),
    "engine recursion": _engine("recursion"),
    "engine recursion, one constant": lambda X, u, v: ENGINES["recursion"].constant(u, v, X.point, (0,) * len(X.marked)),
    "engine recursion, direct": lambda X, u, v: ENGINES["recursion"].direct_row(u, v),
    "engine recursion, table": lambda X, u, v: next(iter(ENGINES["recursion"].blocks(X))),
    "ring": lambda X, u, v: complete_flag_ring(Fl(X.n)).packed_row(0, 0),
    "ring, direct": lambda X, u, v: complete_flag_ring(Fl(X.n)).direct_row(0, 0),
    "ring, table": lambda X, u, v: next(iter(complete_flag_ring(Fl(X.n)).blocks())),
    "chevalley": lambda X, u, v: chevalley(X).terms(0),
    "engine localisation": _engine("localisation"),
    "engine localisation, one constant": lambda X, u, v: ENGINES["localisation"].constant(u, v, X.point, (0,) * len(X.marked)),
    "engine localisation, table": lambda X, u, v: next(iter(ENGINES["localisation"].blocks(X))),
}
GRASSMANNIAN = {
    "engine vafa-intriligator": _engine("vafa-intriligator"),
    "engine vafa-intriligator, table": lambda X, u, v: next(iter(ENGINES["vafa-intriligator"].blocks(X))),
    "comparison": lambda X, u, v: comparison(X).row(u, v),
    "residues": lambda X, u, v: residue_table(X).row(u, v),
    "residues, one constant": lambda X, u, v: residue_table(X).constant(u, v, X.point, (0,)),
}


@pytest.mark.parametrize("swallow", [False, True], ids=["openly", "swallowed"])
@pytest.mark.parametrize("way", [*QUESTIONS, *GRASSMANNIAN])
def test_asking_the_oracle(way, swallow):
    """A rule that asks the oracle, by whatever door, is ``not-independent``, even if it is right and swallows the error."""
    question = (QUESTIONS | GRASSMANNIAN)[way]
    for X in (G,) if way in GRASSMANNIAN else (G, F):
        tables = truth(X)

        @candidate(on=Varieties(X))
        def rule(X, u, v):
            try:
                question(X, u, v)
            except Exception:
                if not swallow:
                    raise
            return tables[u, v]  # noqa: B023  # the rule runs inside this turn of the loop

        finding = judged(rule, Row(X, X.identity, X.point)).finding
        assert finding is not None
        assert finding.status == "not-independent"


def test_asking_case_by_case():
    """The same holds for a rule that answers case by case, also when only one case asks."""

    @candidate(on=Varieties(F))
    def rule(X, u, v, w, d):
        return constant(u, v, w, d) if w is FIRST.w else truth(X)[u, v].get((w, d), 0)

    finding = judged(rule).finding
    assert (finding.status, finding.row) == ("not-independent", ROW)


def test_asking_late():
    """Objects that ask while they are counted, and mappings that ask while they are read, are noticed."""

    def lazily(u, v):
        yield from range(product(u, v).get((FIRST.w, FIRST.d), 0))

    @candidate(on=Varieties(F))
    def objects(X, u, v, w, d):
        return lazily(u, v) if (w, d) == (FIRST.w, FIRST.d) else truth(X)[u, v].get((w, d), 0)

    class Lazy(LooksRight):
        def items(self):
            return product(ROW.u, ROW.v).items()

    assert judged(objects).finding.status == "not-independent"
    assert judged(by_rows(Lazy)).finding.status == "not-independent"


def test_asking_through_a_claims_oracle():
    """A rule that has got hold of the oracle of a claim is caught too, also at the row that it remembers."""
    N = Asker(classical=False)

    @candidate(on=Varieties(F))
    def borrowed(X, u, v):
        return N.product(u, v)

    @candidate(on=Varieties(F))
    def single(X, u, v, w, d):
        return N(u, v, w, d)

    N.product(ROW.u, ROW.v)
    assert judged(borrowed).finding.status == "not-independent"
    assert judged(single).finding.status == "not-independent"


def test_premise_that_asks():
    """A premise is part of the conjecture: it may not ask the oracle either."""
    for premise in (lambda X, u, v: bool(product(u, v)), lambda X, u, v, w, d: constant(u, v, w, d) > 0):
        assert judged(by_cases(lambda true, w, d: true, premise=premise)).finding.status == "not-independent"


def test_the_oracle_is_free_again():
    """After a rule was caught asking, everybody else may ask."""

    @candidate(on=Varieties(F))
    def rule(X, u, v):
        return product(u, v)

    assert judged(rule).finding.status == "not-independent"
    assert product(ROW.u, ROW.v) == truth(F)[ROW.u, ROW.v]


# -- premises that fail ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("by_row", [True, False], ids=["on rows", "on cases"])
def test_premise_that_raises(by_row):
    """A premise that raises is a crash, never a reason to compare nothing."""
    premise = (lambda X, u, v: 1 // 0) if by_row else (lambda X, u, v, w, d: 1 // 0)
    finding = judged(by_cases(lambda true, w, d: true, premise=premise)).finding
    assert finding.status == "crashed"
    assert "ZeroDivisionError" in finding.detail


@pytest.mark.parametrize("by_row", [True, False], ids=["on rows", "on cases"])
def test_premise_that_loops(by_row):
    """A premise that never ends is too slow."""
    wait = lambda: sum(0 for _ in itertools.repeat(0))  # noqa: E731
    premise = (lambda X, u, v: wait()) if by_row else (lambda X, u, v, w, d: wait())
    assert judged(by_cases(lambda true, w, d: true, premise=premise), call_limit=0.15).finding.status == "too-slow"


# -- claims ------------------------------------------------------------------------------------------------------------


def test_claims_about_cases():
    """A claim is held case by case; the first case where it is false is the finding, with the constant."""

    @claim(on=Varieties(F))
    def small(X, u, v, w, d, N):
        return N(u, v, w, d) == 0

    result = judged(small)
    assert (result.finding.status, result.finding.where) == ("refuted", FIRST)
    assert (result.finding.rule, result.finding.oracle) == (None, 1)
    assert judged(small, Row(F, F.identity, F.identity)).finding.where == Case(F, F.identity, F.identity, F.identity, (0, 0))


def test_claims_about_rows():
    """A claim about a product that is false is found at its row; a true one counts all cases of the row."""

    @claim(on=Varieties(F))
    def one_term(X, u, v, N):
        return len(N.product(u, v)) == 1

    finding = judged(one_term).finding
    assert (finding.status, finding.where) == ("refuted", ROW)
    row = Row(F, F.identity, F.point)
    assert judged(one_term, row) == RowResult(len(outcomes_of(F, 3)), 1, None, True)


def test_a_claim_may_ask_but_not_answer_loosely():
    """A claim that returns no truth value is ``not-a-count``; one that raises is ``crashed``."""

    @claim(on=Varieties(F))
    def number(X, u, v, w, d, N):
        return N(u, v, w, d)

    @claim(on=Varieties(F))
    def raising(X, u, v, N):
        raise ValueError("no")

    assert judged(number).finding.status == "not-a-count"
    assert judged(raising).finding.status == "crashed"


def test_an_unstable_claim():
    """A claim that changes its mind is ``unstable``."""
    minds = iter([False])

    @claim(on=Varieties(F))
    def fickle(X, u, v, N):
        return next(minds, True)

    finding = judged(fickle).finding
    assert (finding.status, finding.detail) == ("unstable", "expected one answer for one case, got False, and another time True")


# -- cross-checks ----------------------------------------------------------------------------------------------------------------------


def test_cross_check(monkeypatch):
    """With a cross-check, an engine that is wrong is an ``EnginesDisagree``, not a finding about the rule; without, it decides."""
    engine = ENGINES["vafa-intriligator"]
    right = type(engine).row

    def wrong(self, u, v):
        return right(self, u, v) | {(G.point, (3,)): 1}

    rule = by_rows(lambda true: true, on=(G,))
    row = Row(G, G.point, G.point)
    assert judged(rule, row, cross_check=True).finding is None
    monkeypatch.setattr(type(engine), "row", wrong)
    assert judged(rule, row).finding.status == "refuted"
    with pytest.raises(EnginesDisagree, match="no verdict of this version can be trusted"):
        judged(rule, row, cross_check=True)
