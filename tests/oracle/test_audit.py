"""The audit of the oracle: it agrees where the oracle is right, each of its checks can fail, and it names the smallest case."""

import itertools
import random

import pytest

from conjcheck import Case, Fl, FlagVariety, Gr, Row
from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import rows
from conjcheck.oracle import audit as room
from conjcheck.oracle import engines_for, laws
from conjcheck.oracle.audit import audit, checks_of
from conjcheck.oracle.check import Check, Difference, Reader, RowList, TripleList, times
from conjcheck.oracle.comparison import RecursionEngine
from conjcheck.oracle.formulas import classical_degree, weyl_degree
from conjcheck.oracle.mirror import CRITICAL_POINTS, critical_values
from conjcheck.oracle.published import evaluate, records

SMALL = ["Gr(1,2)", "Gr(2,4)", "Fl(3)", "Fl(1,3;4)", "C2/B", "C3/P3", "B3/P3", "C3/P1", "B3/P1", "D4/P1", "G2/P1", "G2/P2"]


def plant(monkeypatch, faults, engine=None):
    """Make an engine wrong: ``faults`` are pairs (case as text, amount added). By default the engine that answers on that space."""
    cases = [(Case.parse(text), amount) for text, amount in faults]
    kind = type(engine or engines_for(cases[0][0].X)[0])
    honest = kind.row

    def row(self, u, v):
        terms = dict(honest(self, u, v))
        for case, amount in cases:
            if (case.u, case.v) == (u, v):
                terms[case.w, case.d] = terms.get((case.w, case.d), 0) + amount
        return {key: count for key, count in terms.items() if count}

    monkeypatch.setattr(kind, "row", row)


def found(name, space):
    """All differences of one check, every unit asked."""
    X = FlagVariety(space)
    (check,) = [check for check in checks_of(X) if check.name == name]
    differences = [d for place in range(len(check.units)) for d in check.ask(check.units[place])]
    return min(differences, key=lambda difference: difference.sort_key, default=None)


@pytest.mark.parametrize("name", SMALL)
def test_the_oracle_agrees(name):
    """On small spaces of all kinds every check compares all it has, and nothing differs."""
    results = audit(FlagVariety(name), seconds=60)
    assert len(results) >= 10
    for result in results:
        assert (result.name, result.verdict, result.smallest, result.why) == (result.name, "agree", None, "")
        assert result.compared == result.of == result.in_order > 0


TWO = "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)"

PLANTED = [
    ("vafa-intriligator = recursion", [(TWO, 1)], TWO, (2, 1)),
    ("vafa-intriligator = localisation", [(TWO, -1)], TWO, (0, 1)),
    ("unit", [("Gr(2,4): () * (2) -> (2)", -1)], "Gr(2,4): () * (2) -> (2)", (0, 1)),
    ("commutativity", [("Gr(2,4): (2) * (1) -> (2,1)", 1)], "Gr(2,4): (1) * (2) -> (2,1)", (1, 2)),
    ("degree axiom, positivity", [("Gr(2,4): (1) * (1) -> (1)", 1)], "Gr(2,4): (1) * (1) -> (1)", (1, 0)),
    ("degree axiom, positivity", [("Gr(2,4): (1) * (1) -> (2)", -2)], "Gr(2,4): (1) * (1) -> (2)", (-1, "an int above 0")),
    (
        "degree axiom, positivity",
        [(TWO, -1), ("Gr(2,4): (2,1) * (2,1) -> (1,1), q^(1)", -1)],
        "Gr(2,4): (2,1) * (2,1)",
        (0, "not 0"),
    ),
    ("associativity", [(TWO, 1)], "Gr(2,4): ((1) * (2)) * (2,1) -> (2), q^(1)", (2, 1)),
    ("S3-symmetry", [(TWO, 1)], "Gr(2,4): (2,1) * (2) -> (1), q^(1)", (1, 2)),
    ("S3-symmetry", [(TWO, -1)], "Gr(2,4): (2,1) * (2) -> (1), q^(1)", (1, 0)),
    ("Poincare duality", [("Gr(2,4): (1) * (2,1) -> (2,2)", -1)], "Gr(2,4): (1) * (2,1) -> (2,2)", (0, 1)),
    ("Poincare duality", [("Gr(2,4): (2) * (1,1) -> (2,2)", 1)], "Gr(2,4): (2) * (1,1) -> (2,2)", (1, 0)),
    ("diagram symmetry", [(TWO, 1)], TWO, (2, 1)),
    ("diagram symmetry", [("Gr(2,4): (2,1) * (2,1) -> (1,1), q^(1)", -1)], TWO, (1, 0)),
    ("Seidel symmetry", [("Gr(2,4): (1) * (1) -> (2)", 1)], "Gr(2,4): (1) * (1) -> (2)", (2, 1)),
    ("Seidel symmetry", [("Gr(2,4): () * (1) -> (1)", -1)], "Gr(2,4): () * (1) -> (1)", (0, 1)),
    ("classical limit in Fl(4)", [("Gr(2,4): (1) * (1) -> (1,1)", 1)], "Gr(2,4): (1) * (1) -> (1,1)", (2, 1)),
    ("Vafa-Intriligator in floats +-0.01", [(TWO, 1)], TWO, (2, 1)),
    ("powers of q", [("Gr(2,4): (2) * (1,1) -> (2,2)", 1)], "Gr(2,4): (2) * (1,1) -> (2,2)", ("[0, 1]", "[1, 2]")),
    ("powers of q", [("Gr(2,4): (1) * (2,1) -> (2,2)", -1)], "Gr(2,4): (1) * (2,1) -> (), q^(1)", ("[1]", "[0]")),
    ("powers of q", [("Gr(2,4): (1) * (1) -> (1), q^(1)", 1)], "Gr(2,4): (1) * (1) -> (2)", ("[0, 1]", "[0]")),
    ("quantum Chevalley", [("Gr(2,4): (1) * (2) -> (2,1)", 1)], "Gr(2,4): (1) * (2) -> (2,1)", (2, 1)),
    ("degree by Weyl", [("Gr(2,4): (1) * (2) -> (2,1)", 1)], "Gr(2,4): degree for the sum of the divisors", (3, 2)),
    ("quantum Pieri", [("Gr(2,4): (2) * (2) -> (2,2)", 1)], "Gr(2,4): (2) * (2) -> (2,2)", (2, 1)),
    ("quantum Pieri", [("Gr(2,4): (2) * (1,1) -> (), q^(1)", -1)], "Gr(2,4): (2) * (1,1) -> (), q^(1)", (0, 1)),
    ("rim hooks", [(TWO, 1)], TWO, (2, 1)),
    ("rational curves", [("Gr(2,4): (1) * (2,1) -> (), q^(1)", 1)], "Gr(2,4): coefficient of q^1 [pt] in sigma_1^8", (12, "8")),
    ("published products", [(TWO, 1)], TWO, (2, 1)),
    ("published numbers", [("Gr(2,4): (1) * (1) -> (2)", 1)], "Gr(2,4): coefficient of q^0 [pt] in sigma_1^4", (3, 2)),
    ("mirror potential", [("Gr(2,4): (1) * (1) -> (2)", 1)], "Gr(2,4): spectrum of c_1", None),
    ("recursion = localisation", [("Fl(3): [321] * [321] -> [231], q^(1,1)", 1)], "Fl(3): [321] * [321] -> [231], q^(1,1)", (2, 1)),
    (
        "recursion = its direct route",
        [("Fl(3): [231] * [231] -> [312], q^(1,0)", 1)],
        "Fl(3): [231] * [231] -> [312], q^(1,0)",
        (1, 0),
    ),
    ("classical limit in Fl(4)", [("Fl(3): [213] * [213] -> [312]", 1)], "Fl(3): [213] * [213] -> [312]", (2, 1)),
    ("quantum Pieri", [("Fl(3): [231] * [321] -> [132], q^(1,1)", 1)], "Fl(3): [231] * [321] -> [132], q^(1,1)", (2, 1)),
    (
        "transposition times point",
        [("Fl(3): [231] * [321] -> [321], q^(1,0)", 1)],
        "Fl(3): ([132] * [132]) * [321] -> [321], q^(1,0)",
        (1, 0),
    ),
    ("published products", [("Fl(3): [213] * [213] -> [312]", 1)], "Fl(3): [213] * [213] -> [312]", (2, 1)),
    ("diagram symmetry", [("D4/P3: <3> * <3> -> <2.3>", 1)], "Q^6: <1> * <1> -> <2.1>", (1, 2)),
    ("localisation at other numbers", [("E6/P1: <1> * <1> -> <3.1>", 1)], "E6/P1: <1> * <1> -> <3.1>", (2, 1)),
    ("published products", [("E6/P1: <1> * <1> -> <3.1>", 1)], "E6/P1: 3h w2431^2 - 6h^5 w2431 + 2h^9 = 0, at ", None),
    ("quantum Pieri", [("C3/P3: <3> * <3> -> <2.3>", 1)], "LG(3,6): <3> * <3> -> <2.3>", (3, 2)),
    ("published products", [("C3/P3: <3> * <3> -> <2.3>", 1)], "LG(3,6): s1 s1 - 2s2 = 0, at q^(0) sigma", (1, 0)),
    ("published products", [("B3/P3: <3> * <3> -> <2.3>", 1)], "OG(3,7): s1 s1 - s2 = 0, at q^(0) sigma", (1, 0)),
    ("quantum Pieri", [("B3/P3: <3> * <3> -> <2.3>", 1)], "OG(3,7): <3> * <3> -> <2.3>", (2, 1)),
]


@pytest.mark.parametrize(("check", "faults", "where", "values"), PLANTED, ids=lambda x: x if isinstance(x, str) else "")
def test_every_check_can_fail(check, faults, where, values, monkeypatch):
    """A planted fault is found by the check, at the smallest place where it shows, with both values; without the fault it is not."""
    space = faults[0][0].split(":")[0]
    assert found(check, space) is None
    plant(monkeypatch, faults)
    difference = found(check, space)
    if isinstance(difference.where, Case):
        assert difference.where == Case.parse(where)
    else:
        assert difference.where.startswith(where)
    if values:
        assert (difference.one[1], difference.other[1]) == values


def test_seidel_elements_make_no_power_of_q_negative(monkeypatch):
    """A term that would come from a negative power of q is a difference of its own: ``S_2 * sigma_1 -> 1`` on ``Gr(2,4)``."""
    X = Gr(2, 4)
    text = "Gr(2,4): (2,2) * (1) -> ()"
    plant(monkeypatch, [(text, 1)])
    for row in (Row.parse("Gr(2,4): () * (1)"), Row.parse("Gr(2,4): (2,2) * (1)")):
        differences = [d for d in laws._seidel(Reader(), row) if "negative" in d.other[0]]
        assert {(d.where, d.one[1], d.other[1]) for d in differences} == {(Case.parse(text), 1, 0)}
    assert list(laws._seidel(Reader(), Row(X, X.classes[1], X.point))) == []


def test_every_name_of_a_check_is_in_the_list_of_those_that_can_fail():
    """No check is left out of the test above."""
    names = {check.name for space in [*SMALL, "Gr(2,5)", "Fl(4)", "E6/P1"] for check in checks_of(FlagVariety(space))}
    families = {
        "classical limit": "classical limit in Fl(4)",
        "number of": "number of constants",
        "localisation = recursion": "recursion = localisation",  # the same pair, named from the preferred engine
    }
    tested = {name for name, *_ in PLANTED} | {"number of constants", "published numbers"}
    left = {
        name for name in names - tested if not any(name.startswith(start) and proxy in tested for start, proxy in families.items())
    }
    assert left == set()


def test_a_wrong_table_is_noticed(monkeypatch):
    """The number of constants is that of ``table``."""
    engine = type(engines_for(Gr(2, 4))[0])
    honest = engine.blocks
    monkeypatch.setattr(engine, "blocks", lambda self, X: itertools.islice(honest(self, X), 5))
    difference = found("number of constants", "Gr(2,4)")
    assert difference.where == "Gr(2,4): number of nonzero constants"
    assert (difference.one[1], difference.other[1]) == (23, 24)


def test_published_numbers_of_classes(monkeypatch):
    """A published degree of q that is not that of the space is noticed."""
    from conjcheck.oracle import published

    monkeypatch.setitem(published._CLASSES_AND_INDEX, "G2/P2", (6, 4))
    assert str(found("published numbers", "G2/P2").where) == "G2/P2: degree of q"


def test_the_smallest_of_several_faults_is_named(monkeypatch):
    """Every check goes on after a difference, in the random part too; the result has the smallest and their number."""
    faults = ["Gr(2,4): (2,2) * (2,2) -> (), q^(2)", TWO, "Gr(2,4): (1) * (2) -> (2,1)"]
    plant(monkeypatch, [(text, 1) for text in faults])
    first = audit(Gr(2, 4), seconds=60)[0]
    assert (first.name, first.differing, first.smallest.where) == ("vafa-intriligator = recursion", 3, Case.parse(faults[2]))


def test_a_difference_on_one_space_with_several_q_has_a_whole_case(monkeypatch):
    """With several q's the degree is named, too."""
    text = "Fl(1,3;4): [4231] * [4231] -> [4132], q^(1,1)"
    plant(monkeypatch, [(text, 1)])
    assert found("recursion = localisation", "Fl(1,3;4)").where == Case.parse(text)


@pytest.mark.parametrize("error", [AssertionError, IndexError])
def test_an_engine_that_stops_differs(error, monkeypatch):
    """A contradiction or another error inside an engine is a difference at that row, not a crash of the audit."""
    honest = RecursionEngine.row

    def row(self, u, v):
        if u.length + v.length > 4:
            raise error("structure constants are integers\nmore")
        return honest(self, u, v)

    monkeypatch.setattr(RecursionEngine, "row", row)
    result = next(r for r in audit(Fl(3), seconds=60) if r.name == "recursion = localisation")
    assert (result.verdict, result.differing, result.smallest.where) == ("differ", 5, "Fl(3): [231] * [321]")
    assert result.smallest.one[1] == f"{error.__name__}: structure constants are integers"


# -- order, budget, chance ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("X", [Gr(1, 2), Gr(2, 5), Fl(1, 2, n=4), FlagVariety("G2/B"), FlagVariety("D4/P2")], ids=str)
def test_rows_by_number_are_the_rows_in_order(X):
    """``RowList`` holds what ``rows`` enumerates, place by place; so it does for one total length."""
    everything = list(rows(X))
    assert [RowList(X)[place] for place in range(len(RowList(X)))] == everything
    for total in range(2 * X.dim + 1):
        some = RowList(X, total)
        assert [some[place] for place in range(len(some))] == [row for row in everything if row.u.length + row.v.length == total]
    for place in (-1, len(everything)):
        with pytest.raises(IndexError):
            RowList(X)[place]


def test_triples_by_number():
    """``TripleList`` holds every row with every class once."""
    X = Gr(2, 4)
    triples = TripleList(X)
    assert [triples[place] for place in range(len(triples))] == [(row, z) for row in rows(X) for z in X.classes]


def numbers(count, ask):
    return Check("numbers", "numbers", list(range(count)), ask)


def started(check, seed=0):
    return room._Run(Gr(1, 2), check, random.Random(seed))


def test_at_least_one_unit_is_compared():
    """Without any time left one unit is compared, and the result says how many of how many."""
    run = started(numbers(10, lambda n: ()))
    run.go_on(0.0, 0.0, at_random=False)
    run.go_on(0.0, 0.0, at_random=True)
    result = run.result()
    assert (result.compared, result.of, result.in_order, result.verdict) == (1, 10, 1, "agree")


def test_order_then_chance():
    """Units are asked in order, then the others once each in random order; the seed decides which."""
    orders = []
    for seed in (0, 0, 1):
        asked = []
        run = started(numbers(40, lambda n, asked=asked: asked.append(n) or ()), seed)
        run.go_on(0.0, 0.0, at_random=False)
        run.go_on(float("inf"), float("inf"), at_random=True)
        assert asked[0] == 0
        assert sorted(asked) == list(range(40))
        assert (run.result().compared, run.result().in_order, run.is_open) == (40, 40, False)
        orders.append(asked)
    assert orders[0] == orders[1] != orders[2]
    assert orders[0] != sorted(orders[0])


def test_what_takes_too_long_is_left_out_and_counted():
    """A unit out of reach is neither compared nor an agreement; what lies behind it is no longer without a gap."""

    def ask(n):
        if n % 3 == 2:
            raise OutOfReach(f"{n} takes too long")
        return ()

    run = started(numbers(9, ask))
    run.go_on(float("inf"), float("inf"), at_random=False)
    result = run.result()
    assert (result.compared, result.in_order, result.verdict, result.why) == (6, 2, "agree", "3 left out: 2 takes too long")


def test_nothing_compared_is_no_agreement():
    """A check that could compare nothing says "not run", and why."""

    def ask(n):
        raise OutOfReach("too long")

    run = started(numbers(3, ask))
    run.go_on(float("inf"), float("inf"), at_random=False)
    assert (run.result().verdict, run.result().why) == ("not run", "3 left out: too long")
    slow = started(Check("slow", "numbers", [1], lambda n: (), needs=5.0))
    slow.go_on(0.0, 0.0, at_random=False)
    assert (slow.result().verdict, slow.result().why) == ("not run", "takes about 5 s: give more --seconds")


def test_differences_found_at_random_count():
    """The smallest of all that were asked is kept, whatever the order of asking."""
    smallest = Case.parse("Gr(1,2): () * (1) -> (1)")
    larger = Case.parse("Gr(1,2): (1) * (1) -> (), q^(1)")

    def ask(n):
        return [Difference(smallest if n == 17 else larger, ("a", 1), ("b", 2))] if n in (5, 17, 23) else []

    run = started(numbers(30, ask))
    run.go_on(0.0, 0.0, at_random=False)
    run.go_on(float("inf"), float("inf"), at_random=True)
    assert (run.result().differing, run.result().smallest.where) == (3, smallest)


def test_differences_without_a_case_come_last():
    """In the order of differences a case is smaller than words."""
    larger, smaller = Case.parse("Gr(3,6): () * () -> ()"), Case.parse("Gr(1,2): () * () -> ()")
    case, words = (Difference(where, ("a", 1), ("b", 2)) for where in (larger, "A"))
    triples = [Difference(where, ("a", 1), ("b", 2), near=near) for where, near in (("Z", smaller), ("A", larger))]
    ordered = [case, *triples, words]
    assert sorted([words, *triples, case], key=lambda difference: difference.sort_key) == ordered


def test_the_budget_is_kept():
    """A large space ends at about its budget, every check has compared something, and says how far it got."""
    shares = []
    results = audit(Fl(5), seconds=1.5, watching=lambda name, share: shares.append(share))
    assert sum(result.seconds for result in results) < 6
    assert all(result.compared > 0 for result in results if result.name != "number of constants")
    assert any(result.compared < result.of for result in results)
    assert shares == sorted(shares)
    assert 0 <= shares[0] <= shares[-1] <= 1


def test_a_space_out_of_reach():
    """No engine: refused before anything is compared."""
    with pytest.raises(OutOfReach, match="expected a space in reach of some engine, got E6/P3,4"):
        audit(FlagVariety("E6/P3,4"))


def test_rows_that_localisation_would_take_long_for():
    """The reader's patience is a tenth of the budget: the point squared on Fl(5) is left out."""
    X = Fl(5)
    localisation = next(engine for engine in engines_for(X) if engine.name == "localisation")
    Reader(10.0).afford(localisation, X.classes[1], X.classes[1])
    with pytest.raises(OutOfReach, match=r"localisation of Fl\(5\): \[54321\] \* \[54321\] takes about"):
        Reader(10.0).afford(localisation, X.point, X.point)


def test_the_reader_remembers_and_forgets(monkeypatch):
    """A product is asked for once; when memory is short, earlier ones are forgotten and asked for again, with the same answer."""
    from conjcheck.oracle import check

    asked = []
    monkeypatch.setattr(check, "row_terms", lambda u, v: asked.append((u, v)) or {(u, (0,)): 1})
    X, read = Gr(2, 4), Reader()
    assert read(X.point, X.point) == read(X.point, X.point) == {(X.point, (0,)): 1}
    assert len(asked) == 1
    monkeypatch.setattr(check, "_MOST_TERMS", 3)
    for u in X.classes:
        read(u, u)
    read(X.point, X.point)
    read(X.classes[0], X.classes[0])
    assert len(asked) > len(X.classes)


# -- the parts ------------------------------------------------------------------------------------------------------------


def test_values_in_floating_point_that_are_no_integers_decide_nothing(monkeypatch):
    """Beyond the rounding margin a row is left out: no agreement, no difference."""
    values, back = laws._schur_values(Gr(2, 4))
    monkeypatch.setattr(laws, "_schur_values", lambda X: (values * 1.02, back))
    result = next(r for r in audit(Gr(2, 4), seconds=60) if "floats" in r.name)
    assert result.verdict != "differ"
    assert result.compared < 36
    assert "left out" in result.why


def test_the_mirror_needs_sympy(monkeypatch):
    """Without sympy the mirror check is not run and says why; all others are."""
    monkeypatch.setattr(room, "has_sympy", lambda: False)
    results = audit(Fl(3), seconds=60)
    assert {result.name: result.why for result in results if result.verdict == "not run"} == {"mirror potential": "needs sympy"}


@pytest.mark.parametrize("name", [name for name in CRITICAL_POINTS if name != "Fl(1,2;4)"])
def test_critical_points(name):
    """Their number is the one on record; the largest absolute value of a critical value is itself one, as it must be in the spectrum of
    a nonnegative matrix.
    """
    values, points = critical_values(FlagVariety(name))
    assert points == CRITICAL_POINTS[name][0] <= len(FlagVariety(name).classes)
    roots = values.nroots(maxsteps=200)
    largest = max(abs(root) for root in roots)
    assert min(abs(root - largest) for root in roots) < 1e-6


def test_a_missing_critical_point_is_noticed(monkeypatch):
    """The number of critical points is compared."""
    monkeypatch.setitem(room.CRITICAL_POINTS, "Gr(1,3)", (4, 0.5))
    difference = found("mirror potential", "Gr(1,3)")
    assert (difference.where, difference.one[1], difference.other[1]) == ("Gr(1,3): critical points", 3, 4)


def test_records_are_read_as_written():
    """A line reads as an element: powers, coefficients, several q's, x's, words, partitions."""
    X, read = Fl(3), Reader()
    s1, s2, zero = X.schubert(word=(1,)), X.schubert(word=(2,)), (0, 0)
    assert evaluate(X, "2q1^2 q2 S213 - S132 + 3", read) == {(s1, (2, 1)): 2, (s2, zero): -1, (X.identity, zero): 3}
    assert evaluate(X, "x2", read) == {(s2, zero): 1, (s1, zero): -1}
    assert evaluate(X, "x3 + w2", read) == {}
    assert evaluate(X, "w1^2", read) == times(read, {(s1, zero): 1}, {(s1, zero): 1})
    assert evaluate(X, "pt - S321 + 0", read) == {}
    Y = FlagVariety("C3/P3")
    assert evaluate(Y, "s31 + h", read) == {(Y.schubert(word=(3, 1, 2, 3)), (0,)): 1, (Y.classes[1], (0,)): 1}
    with pytest.raises(AssertionError, match="expected terms"):
        evaluate(X, "S213 * S213", read)


def test_a_wrong_record_is_noticed():
    """Published lines are compared, not admired: each one fails when its right side is changed."""
    from conjcheck.oracle import published

    for space in ("Gr(2,5)", "Fl(3)", "C3/P3", "G2/B"):
        for record in records(FlagVariety(space)):
            assert list(published._holds(Reader(), record)) == []
            wrong = published.Record(record.X, f"{record.line} + 1", record.source)
            (difference,) = published._holds(Reader(), wrong)
            assert "published" in difference.other[0]


def test_there_is_much_on_record():
    """Spaces of all kinds have published lines."""
    counts = {
        name: len(records(FlagVariety(name)))
        for name in ("Gr(2,4)", "Gr(2,5)", "Fl(3)", "Fl(4)", "C3/P3", "B3/P3", "G2/B", "E6/P1")
    }
    assert counts == {"Gr(2,4)": 18, "Gr(2,5)": 13, "Fl(3)": 19, "Fl(4)": 19, "C3/P3": 10, "B3/P3": 8, "G2/B": 6, "E6/P1": 2}


@pytest.mark.parametrize(
    ("name", "degree"),
    [("Fl(3)", 6), ("Fl(4)", 720), ("B2/B", 24), ("G2/B", 720), ("Gr(3,6)", 42), ("C3/P3", 16), ("E6/P1", 78), ("G2/P1", 2)],
)
def test_degrees(name, degree):
    """Degrees by Weyl's formula: ``N!`` on G/B, 42 on ``Gr(3,6)``; ``LG(3,6)`` 16, the Cayley plane 78, a quadric 2 (standard)."""
    X = FlagVariety(name)
    assert weyl_degree(X) == degree == classical_degree(X, Reader())


def test_seeds_reach_the_second_route_of_localisation():
    """The second localisation stands at other numbers than the first, and gives the same products."""
    X = FlagVariety("E6/P1")
    other = room._elsewhere(X)
    p = 2**31 - 1
    assert other.numbers(p, other.seed).simple.tolist() != other.numbers(p, 0).simple.tolist()
    row = Row(X, X.classes[8], X.classes[13])
    assert other.row(row.u, row.v) == engines_for(X)[0].row(row.u, row.v)


def test_checks_of_hold_what_applies():
    """Engines first; laws and formulas by the kind of space."""

    def names(name):
        return [check.name for check in checks_of(FlagVariety(name))]

    assert names("Gr(2,4)")[:2] == ["vafa-intriligator = recursion", "vafa-intriligator = localisation"]
    assert names("Fl(7)")[0] == "recursion = its direct route"
    assert names("E8/P8")[0] == "localisation at other numbers"
    assert "Seidel symmetry" not in names("G2/B")
    assert "diagram symmetry" not in names("B3/P3")
    assert "classical limit in C3/B" in names("C3/P3")
    assert "classical limit in Fl(4)" in names("Fl(3)")
