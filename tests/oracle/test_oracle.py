"""The face of the oracle: which engine answers, what a product is, what is refused, and what happens when engines disagree."""

import inspect
import pickle

import pytest

import conjcheck
from conjcheck import Case, Fl, FlagVariety, Gr, Product, constant, product, table
from conjcheck.errors import DifferentVarieties, EnginesDisagree, NotationError, NotIndependent, OutOfReach
from conjcheck.oracle import ENGINES, engines_for, row_terms, witnesses
from conjcheck.oracle.guard import Watch, note_question, watched


def s(X, *partition):
    return X.schubert(partition=partition)


def test_engines_by_variety():
    """The closed formula comes first, then the recursion, then localisation; each serves what it covers and nothing else."""

    def names(X):
        return [engine.name for engine in engines_for(X)]

    assert list(ENGINES) == ["vafa-intriligator", "recursion", "localisation"]
    assert names(Gr(3, 6)) == ["vafa-intriligator", "recursion", "localisation"]
    assert names(Fl(1, 3, n=4)) == ["recursion", "localisation"]
    assert names(Gr(5, 10)) == ["vafa-intriligator", "localisation"]
    assert names(Fl(7)) == ["recursion"]
    assert names(Fl(1, 2, n=9)) == names(FlagVariety("E8/P8")) == ["localisation"]
    assert names(FlagVariety("F4/B")) == ["recursion"]
    assert names(FlagVariety("E6/P3,4")) == []


def test_products_are_in_the_order_of_cases():
    """Terms come by ``sum d``, ``d``, ``w``, whatever the engine's own order."""
    X = Fl(1, 2, n=4)
    for u in X.classes:
        for v in X.classes:
            terms = list(product(u, v))
            cases = [Case(X, u, v, w, d) for w, d in terms]
            assert cases == sorted(cases)
            assert product(u, v) == row_terms(u, v)


def test_products_read_as_mathematics():
    """Text, LaTeX and the empty product."""
    X = Gr(2, 4)
    assert repr(product(s(X, 2, 1), s(X, 2, 1))) == "q^(1) sigma(2) + q^(1) sigma(1,1)"
    assert str(product(s(X, 1), s(X, 1))) == "sigma(2) + sigma(1,1)"
    Y = Gr(3, 6)
    assert "2 sigma(3,2,1)" in str(product(s(Y, 2, 1), s(Y, 2, 1)))
    assert product(s(X, 2, 1), s(X, 2, 1))._repr_latex_() == r"$q^{(1)} \sigma_{(2)} + q^{(1)} \sigma_{(1,1)}$"
    assert str(Product()) == "0"
    assert pickle.loads(pickle.dumps(product(X.point, X.point))) == product(X.point, X.point)


def test_without_a_degree_the_constant_is_classical():
    """``constant(u, v, w)`` has d = 0."""
    X = Fl(3)
    s1 = X.schubert(word=(1,))
    assert constant(s1, s1, X.schubert(word=(2, 1))) == 1
    assert constant(s1, s1, X.identity) == 0
    assert constant(s1, s1, X.identity, (1, 0)) == 1


def test_constants_off_the_degree_axiom_are_zero():
    """Any degree may be asked for."""
    for engine in ENGINES:
        X = Gr(2, 4)
        assert constant(X.point, X.point, X.identity, (2,), engine=engine) == 1
        assert constant(X.point, X.point, X.identity, (1,), engine=engine) == 0
        assert constant(X.point, X.point, X.point, (1,), engine=engine) == 0
        assert constant(X.identity, X.identity, X.point, (7,), engine=engine) == 0


@pytest.mark.parametrize(
    ("call", "error", "message"),
    [
        (
            lambda: product(Gr(2, 4).point, Gr(2, 5).point),
            DifferentVarieties,
            r"sigma\(2,2\) of Gr\(2,4\) and sigma\(3,3\) of Gr\(2,5\)",
        ),
        (
            lambda: constant(Gr(2, 4).point, Gr(2, 4).point, Gr(2, 5).identity, (1,)),
            DifferentVarieties,
            r"expected classes of one variety, got sigma\(2,2\) of Gr\(2,4\) and sigma\(\) of Gr\(2,5\)",
        ),
        (lambda: product((2, 1), (1,)), NotationError, r"expected a Schubert class, got \(2, 1\); make one with X.schubert"),
        (lambda: product(Gr(2, 4).point, "pt"), NotationError, r"expected a Schubert class, got 'pt'; make one with X.schubert"),
        (
            lambda: product(Gr(2, 4).point, Gr(2, 4).point, engine="puzzles"),
            NotationError,
            "expected engine to be one of 'vafa-intriligator', 'recursion', 'localisation', got engine='puzzles'",
        ),
        (
            lambda: product(Fl(3).point, Fl(3).point, engine="vafa-intriligator"),
            OutOfReach,
            r"in reach of engine 'vafa-intriligator', but Fl\(3\) is not a Grassmannian; leave engine= out",
        ),
        (
            lambda: product(FlagVariety("E6/P3,4").point, FlagVariety("E6/P3,4").point),
            OutOfReach,
            "expected a variety in reach of some engine, got E6/P3,4 .*not a Grassmannian.*51,840 classes of E6/B",
        ),
        (lambda: product(Gr(5, 10).point, Gr(5, 10).point, engine="recursion"), OutOfReach, "needs the 3,628,800 classes of A9/B"),
        (lambda: constant(Fl(3).point, Fl(3).point, Fl(3).point, (1,)), NotationError, r"expected 2 entries in d on Fl\(3\)"),
        (lambda: constant(Fl(3).point, Fl(3).point, Fl(3).point, (1, -1)), NotationError, "got entry 2 = -1 in d"),
        (lambda: table("Fl(4)"), NotationError, "expected a flag variety, got 'Fl\\(4\\)'; make one with FlagVariety"),
        (lambda: table(FlagVariety("E6/P3,4")), OutOfReach, "expected a variety in reach of some engine, got E6/P3,4"),
    ],
)
def test_refusals_name_the_offending_value(call, error, message):
    """Each refusal says what was expected and what came instead."""
    with pytest.raises(error, match=message):
        call()


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(3), Fl(1, 3, n=4)], ids=str)
def test_cross_checks_compare_two_answers(X, monkeypatch):
    """With ``cross_check`` a wrong engine is found out on whatever varieties there are; without, it is believed."""
    u, v = X.classes[1], X.point
    right = product(u, v)
    assert product(u, v, cross_check=True) == right
    first = engines_for(X)[0]
    monkeypatch.setattr(type(first), "row", lambda self, u, v: {(X.point, (0,) * len(X.marked)): 5})
    assert product(u, v) == {(X.point, (0,) * len(X.marked)): 5}
    with pytest.raises(EnginesDisagree, match=r"expected one product .* from two engines, got 5 sigma"):
        product(u, v, cross_check=True)


@pytest.mark.parametrize(
    "name",
    [
        "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)",
        "Fl(3): [321] * [321] -> [231], q^(1,1)",
        "Fl(1,2;4): [4312] * [4312] -> [3124], q^(1,2)",
        "Gr(2,4): (1) * (1) -> (2,2)",
    ],
)
def test_witnesses_tell_the_constant_in_other_ways(name):
    """Every witness says what ``constant`` says, under distinct names."""
    case = Case.parse(name)
    found = witnesses(case)
    assert len(found) >= 2
    assert len({how for how, _ in found}) == len(found)
    assert {value for _, value in found} == {constant(case.u, case.v, case.w, case.d)}


@pytest.mark.parametrize("name", ["Gr(2,4): (2,1) * (1) -> (2,2), q^(0)", "Fl(3): [321] * [321] -> [231], q^(1,1)"])
def test_the_witness_of_the_s3_symmetry_asks_another_question(name, monkeypatch):
    """When the engine is wrong at the case itself, the witness that goes through ``N_{u,w^vee}^{v^vee,d}`` still tells the truth."""
    case = Case.parse(name)
    engine = type(engines_for(case.X)[0])
    honest = engine.constant

    def wrong_here(self, u, v, w, d):
        return 7 if (u, v, w, d) == (case.u, case.v, case.w, case.d) else honest(self, u, v, w, d)

    truth = constant(case.u, case.v, case.w, case.d)
    monkeypatch.setattr(engine, "constant", wrong_here)
    assert constant(case.u, case.v, case.w, case.d) == 7
    assert dict(witnesses(case))["S3-symmetry"] == truth


def test_while_a_rule_runs_the_oracle_refuses_and_notices():
    """Every question is refused, and noticed even when the rule swallows the error; outside nothing is."""
    X = Gr(2, 4)
    case = Case(X, X.point, X.point, X.identity, (2,))
    for ask in (
        lambda: product(X.point, X.point),
        lambda: constant(X.point, X.point, X.identity, (2,)),
        lambda: table(X),
        lambda: row_terms(X.point, X.point),
        lambda: witnesses(case),
        note_question,
    ):
        watch = Watch()
        with watched(watch):
            assert not watch.asked
            with pytest.raises(NotIndependent):
                ask()
        assert watch.asked
        ask()


def test_nested_and_broken_rules_leave_the_guard_in_order():
    """An error inside the block ends the watch; the innermost watch is the one that notices."""
    outer, inner = Watch(), Watch()
    with pytest.raises(NotIndependent), watched(outer), watched(inner):
        note_question()
    assert (outer.asked, inner.asked) == (False, True)
    note_question()


def test_every_public_page_of_the_oracle_is_written():
    """``product``, ``constant`` and ``table`` are public at the top and have docstrings with an example."""
    for name in ("product", "constant", "table"):
        page = inspect.getdoc(getattr(conjcheck, name))
        assert ">>>" in page
