"""The sieve: who survives, where each of the others fails first, and what is said of survivors."""

import json
import random
import time
from pathlib import Path

import pytest
from planted import SMALL, as_case, cases_of, key_of, smaller_than, truth

from conjcheck import CompleteFlags, Fl, Gr, Grassmannians, OutsideDomain, Varieties, candidate, claim, product
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import DeclarationError
from conjcheck.testing import sift as room
from conjcheck.testing.sift import sift

P2 = Gr(1, 3)
PAGE = Path(__file__).parents[2] / "conjectures" / "pieri_inequalities.py"


def planted(faults, *, by_rows, on=SMALL, **choices):
    """A rule with one variant for each fault, a tuple ``(X, u, v, w, d)`` or None: the true constants, there one too many."""
    tables = {X: truth(X) for X in on}

    def right(X, u, v):
        return tables[X][u, v] if X in tables else dict(product(u, v))

    if by_rows:

        @candidate(on=Varieties(*on), variants={"fault": tuple(faults)}, **choices)
        def rule(X, u, v, *, fault):
            terms = right(X, u, v)
            if fault and fault[:3] == (X, u, v):
                terms = terms | {fault[3:]: terms.get(fault[3:], 0) + 1}
            return terms
    else:

        @candidate(on=Varieties(*on), variants={"fault": tuple(faults)}, **choices)
        def rule(X, u, v, w, d, *, fault):
            return right(X, u, v).get((w, d), 0) + ((X, u, v, w, d) == fault)

    return rule


@pytest.mark.parametrize("by_rows", [True, False])
def test_two_hundred_variants_each_dies_at_its_smallest_counterexample(by_rows):
    """Faults anywhere up to Fl(4), zeros included: each variant is dead at its own, minimal, with the exact number below; one lives."""
    chooser = random.Random(4)
    faults = [case for X in SMALL[:-1] for case in chooser.sample(cases_of(X), min(8, len(cases_of(X))))]
    faults += chooser.sample(cases_of(Fl(4)), 199 - len(faults))
    chooser.shuffle(faults)
    found = sift(planted([None, *faults], by_rows=by_rows), budget=300)
    assert [one.choice["fault"] for group in found.survivors for one in group] == [None]
    assert [one.conjecture.choice["fault"] for one in found.dead] == sorted(faults, key=key_of)
    for one in found.dead:
        fault = one.conjecture.choice["fault"]
        assert one.finding.where == as_case(fault)
        assert one.finding.rule == one.finding.oracle + 1
        assert one.minimal
        assert one.below == smaller_than(fault, SMALL)
    assert found.coverage.cases == sum(len(cases_of(X)) for X in SMALL)
    assert found.scope.endswith("this is the whole family")


def test_the_dead_are_not_called_again():
    """After its first failure a variant is not asked about later rows; the oracle is asked once for a row, not once for each variant."""
    asked = {False: set(), True: set()}

    @candidate(on=Varieties(P2), variants={"wrong": (False, True)})
    def rule(X, u, v, *, wrong):
        asked[wrong].add((u, v))
        return truth(X)[u, v] if not wrong or v.length < 1 else {}

    found = sift(rule, budget=60)
    assert len(asked[False]) == 9
    assert asked[True] == {(P2.identity, P2.identity), (P2.identity, P2.classes[1])}
    (dead,) = found.dead
    assert str(dead.finding.where) == "Gr(1,3): () * (1) -> (1), q^(0)"


def test_the_truth_is_shared(monkeypatch):
    """The oracle gives each row once, however many variants are alive."""
    asked = []
    honest = room.Comparer.truth
    monkeypatch.setattr(room.Comparer, "truth", lambda self, row: (asked.append(row), honest(self, row))[1])
    found = sift(planted([None, *cases_of(Gr(2, 4))[-3:]], by_rows=True, on=(Gr(2, 4),)), budget=60)
    assert len(asked) == len(set(asked)) == 36
    assert len(found.dead) == 3


def test_every_way_to_die():
    """A variant that crashes, hangs, changes its mind, is no count, asks the oracle or is undefined is dead at its first such case."""
    turn = []

    @candidate(on=Varieties(P2), variants={"way": ("none", "crash", "hang", "unstable", "text", "ask", "undefined", "exit")})
    def rule(X, u, v, w, d, *, way):
        if (u.length, v.length) == (1, 1):
            turn.append(way)
            if way == "crash":
                raise ValueError("no")
            if way == "hang":
                time.sleep(60)
            if way == "unstable":
                return len(turn)
            if way == "text":
                return "1"
            if way == "ask":
                return product(u, v).get((w, d), 0)
            if way == "undefined":
                raise OutsideDomain("no")
            if way == "exit":
                raise SystemExit(0)
        return truth(X)[u, v].get((w, d), 0)

    found = sift(rule, budget=60, call_limit=0.3)
    assert [[one.choice["way"] for one in group] for group in found.survivors] == [["none"]]
    assert {one.conjecture.choice["way"]: one.finding.status for one in found.dead} == {
        "crash": "crashed",
        "hang": "too-slow",
        "unstable": "unstable",
        "text": "not-a-count",
        "ask": "not-independent",
        "undefined": "undefined",
        "exit": "crashed",
    }
    assert {one.finding.row.v.length for one in found.dead} == {1}
    assert all(one.minimal for one in found.dead)


def test_a_premise_holds_for_all_variants():
    """Outside a premise, on rows or on cases, nothing is compared, whatever the variants say there."""
    for premise in (lambda X, u, v: u.length == 1, lambda X, u, v, w, d: u.length == 1):

        @candidate(on=Varieties(P2), premise=premise, variants={"extra": (0, 1, 2)})
        def rule(X, u, v, *, extra):
            return truth(X)[u, v] if u.length == 1 and extra < 2 else {(X.identity, (5,)): extra}

        found = sift(rule, budget=60)
        assert [one.choice["extra"] for one in found.survivors[0]] == [0, 1]
        assert found.coverage.rows == 3


def test_a_premise_that_raises_or_hangs_ends_them_all():
    """A premise without an answer is the end of every variant, each with that status, and costs one call limit, not one each."""

    def raising(X, u, v):
        raise KeyError("gone")

    def hanging(X, u, v):
        time.sleep(60)

    for premise, status in ((raising, "crashed"), (hanging, "too-slow")):

        @candidate(on=Varieties(P2), premise=premise, variants={"a": tuple(range(20))})
        def rule(X, u, v, *, a):
            return {}

        began = time.perf_counter()
        found = sift(rule, budget=60, call_limit=0.3)
        assert time.perf_counter() - began < 20
        assert found.survivors == ()
        assert [one.finding.status for one in found.dead] == [status] * 20


def test_classical_ring():
    """Without degrees, by cases and by rows."""

    @candidate(on=Varieties("Gr(2,4)"), ring="classical", variants={"extra": (0, 1)})
    def by_cases(X, u, v, w, *, extra):
        return truth(X)[u, v].get((w, (0,)), 0) + extra * (w is X.point)

    @candidate(on=Varieties("Gr(2,4)"), ring="classical", variants={"extra": (0, 1)})
    def by_rows(X, u, v, *, extra):
        terms = {w: n for (w, d), n in truth(X)[u, v].items() if d == (0,)}
        return terms if not extra or u.length + v.length < 4 else terms | {X.point: terms.get(X.point, 0) + 1}

    where = [str(sift(rule, budget=60).dead[0].finding.where) for rule in (by_cases, by_rows)]
    assert where == ["Gr(2,4): () * (2,2) -> (2,2), q^(0)"] * 2


def test_equivariant_ring():
    """Polynomials are compared, too: the equivariant weight of a divisor, with its sign right or wrong."""
    from conjcheck import simple_roots

    @candidate(on=Varieties("Gr(1,2)"), ring="equivariant", variants={"sign": (1, -1, 0)})
    def rule(X, u, v, w, *, sign):
        if u.length + v.length == 2 and w is X.point:
            return sign * simple_roots(X)[0]
        return int(u.length + v.length == w.length)

    found = sift(rule, budget=60)
    assert [one.choice["sign"] for one in found.survivors[0]] == [1]
    assert [one.finding.status for one in found.dead] == ["refuted", "refuted"]


def test_the_bundled_page():
    """Of 72 variants of the inequalities of quantum Pieri only the theorem survives; all others are refuted at a minimal case."""
    (rule,) = conjectures_in_file(PAGE)
    found = sift(rule, spaces=Grassmannians().up_to(6), budget=120)
    assert rule.number_of_variants == 72
    assert [[one.choice for one in group] for group in found.survivors] == [[rule.choice]]
    assert len(found.dead) == 71
    assert all(one.minimal and one.finding.status == "refuted" for one in found.dead)
    assert found.scope.startswith("of the 15 spaces named: all 15 spaces from Gr(1,2) to Gr(3,6); ")
    for group in found.alike:
        assert len({(str(one.finding.where), one.finding.rule) for one in group}) == 1
    assert sum(map(len, found.alike)) == 71
    assert {str(one.conjecture.on) for one in found.dead} == {str(rule.on)}
    assert found.survivors[0][0].__doc__ == rule.__doc__
    for one in found.dead:  # the variant says itself what is reported
        case = one.finding.where
        assert one.conjecture(case.X, case.u, case.v, case.w, case.d) == one.finding.rule
        assert product(case.u, case.v).get((case.w, case.d), 0) == one.finding.oracle != one.finding.rule


def differing(*, far):
    """The hyperplane powers; the variants ``same`` and ``again`` never differ, ``late`` does on the spaces that ``far`` admits."""

    @candidate(on=Varieties(*(Gr(1, n) for n in range(2, 12))), variants={"kind": ("same", "again", "late")})
    def rule(X, u, v, *, kind):
        power = u.length + v.length
        right = {(X.of_length(power % X.n)[0], (power // X.n,)): 1}
        return {} if kind == "late" and far(X) else right

    return rule


def test_survivors_that_are_one_function_stay_together():
    """Two spellings of one function survive in one class, and the report says beyond what was looked."""
    found = sift(differing(far=lambda X: False), spaces=[Gr(1, 2), Gr(1, 3)], budget=20)
    assert [[one.choice["kind"] for one in group] for group in found.survivors] == [["same", "again", "late"]]
    assert found.beyond.rows > 50
    assert found.beyond.rows == found.beyond.judged
    assert found.beyond.spaces[0] == Gr(1, 4)
    assert "rows drawn at random on Gr(1,4) to Gr(1,7)" in found.beyond.in_words()


def test_a_late_fault_is_met_beyond_and_not_called_minimal():
    """What the oracle refutes beyond the walk is dead, with its case; but nothing says that the case is the smallest."""
    found = sift(differing(far=lambda X: X.n > 4), spaces=[Gr(1, 2), Gr(1, 3)], budget=20)
    assert [[one.choice["kind"] for one in group] for group in found.survivors] == [["same", "again"]]
    (dead,) = found.dead
    assert not dead.minimal
    assert dead.finding.row.X.n > 4
    assert dead.below == found.coverage.cases == 4 + 9


def test_where_no_engine_reaches_survivors_are_told_apart_without_the_oracle(monkeypatch):
    """Beyond the reach of the oracle a difference between survivors makes two classes, and the smallest such row is named."""
    monkeypatch.setattr(room, "_quick_truth", lambda together, row, slow: None)
    found = sift(differing(far=lambda X: X.n > 4), spaces=[Gr(1, 2), Gr(1, 3)], budget=20)
    assert [[one.choice["kind"] for one in group] for group in found.survivors] == [["same", "again"], ["late"]]
    assert found.dead == ()
    assert found.beyond.judged == 0
    assert found.beyond.splits[0].X.n > 4


def test_a_crash_beyond_is_noticed_without_the_oracle(monkeypatch):
    """A survivor of the walk that crashes beyond it is dead."""
    monkeypatch.setattr(room, "_quick_truth", lambda together, row, slow: None)
    found = sift(differing(far=lambda X: 1 // (X.n < 5) < 0), spaces=[Gr(1, 2), Gr(1, 3)], budget=20)
    (dead,) = found.dead
    assert dead.conjecture.choice["kind"] == "late"
    assert (dead.finding.status, dead.minimal) == ("crashed", False)


def test_long_rows_beyond_are_sampled(monkeypatch):
    """A rule by cases is asked about all nonzero constants of a drawn row and a sample of its zeros, not about millions of cases."""
    asked = []

    @candidate(on=CompleteFlags(), variants={"a": (0, 1)})
    def rule(X, u, v, w, d, *, a):
        asked.append(X)
        return int(u.length == v.length == 0)

    monkeypatch.setattr(room, "_MOST_ROWS", 20)
    monkeypatch.setattr(room.Comparer, "row", lambda self, row, **choices: room.RowResult(1, 1, None, True))
    monkeypatch.setattr(room, "_quick_truth", lambda together, row, slow: None)
    found = sift(rule, spaces=[Fl(2)], budget=20)
    assert found.beyond.rows
    assert max(map(asked.count, set(asked))) <= 2 * 20 * 300
    assert Fl(5) in asked


def test_time_runs_out_in_the_middle():
    """A budget that is spent leaves the scope at the last row that every survivor was compared on."""

    @candidate(on=Varieties(Gr(2, 4)), variants={"a": tuple(range(10))})
    def slow(X, u, v, *, a):
        time.sleep(0.01)
        return truth(X)[u, v]

    found = sift(slow, budget=1.0)
    assert len(found.survivors[0]) == 10
    (space,) = found.coverage.spaces
    assert 0 < space.rows_seen < 36
    assert f"the first {space.rows_seen} of 36 rows of Gr(2,4)" in found.scope


def test_nothing_to_choose():
    """A candidate without open choices is its own only variant; a claim is refused, and so is a space of another family."""

    @candidate(on=Grassmannians())
    def plain(X, u, v):
        return {}

    @claim(on=Grassmannians())
    def statement(X, u, v, N):
        return True

    assert [str(one.finding.where) for one in sift(plain, budget=10).dead] == ["Gr(1,2): () * () -> (), q^(0)"]
    with pytest.raises(DeclarationError, match="expected a candidate to sift, got the claim statement"):
        sift(statement)
    with pytest.raises(DeclarationError, match=r"expected spaces of Grassmannians, got Fl\(3\)"):
        sift(plain, spaces=[Fl(3)])
    with pytest.raises(DeclarationError, match="at least one space"):
        sift(plain, spaces=[])


def test_the_dead_come_in_the_order_of_their_cases():
    """Two that die in one row are listed by their cases there, not by the order of the declaration."""
    (first, second) = [case for case in cases_of(Fl(3)) if case[1].length == case[2].length == 2][:2]
    found = sift(planted([None, second, first], by_rows=False, on=(Fl(3),)), budget=20)
    assert [one.conjecture.choice["fault"] for one in found.dead] == [first, second]
    assert found.dead[0].below + 1 == found.dead[1].below


def test_json():
    """The JSON form holds every variant once, and is JSON."""
    found = sift(planted([None, cases_of(P2)[4]], by_rows=True, on=(P2,)), budget=20)
    document = json.loads(json.dumps(found.as_json()))
    assert document["variants"] == 2
    assert document["survivors"] == [[{"fault": "None"}]]
    (dead,) = document["dead"]
    assert dead["minimal"] is True
    assert (dead["rule"], dead["oracle"]) == (1 + dead["oracle"], dead["oracle"])
    assert dead["where"] == str(as_case(cases_of(P2)[4]))
    assert document["scope"] == found.scope
