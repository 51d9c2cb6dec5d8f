"""The laws: each is broken by a rule made for it alone, without the oracle, and by no true rule.

A rule that breaks one symmetry and no other adds 1 to the true constants along an orbit of all the *other* symmetries. These are
written down here a second time, on permutations, from their definitions.
"""

import importlib
import random
import sys
from pathlib import Path

import pytest
from planted import SMALL, cases_of, rule_by_cases, rule_by_rows, truth

import conjcheck.testing.compare
from conjcheck import Case, Fl, Gr, OutsideDomain, Row, Varieties, candidate
from conjcheck.geometry.polynomial import simple_roots
from conjcheck.oracle.equivariant import equivariant_constant
from conjcheck.testing.compare import Comparer
from conjcheck.testing.laws import LAWS, NoValue, broken_laws

PLUGINS = Path(__file__).parents[2] / "conjectures"
X, N = Fl(4), 4


@pytest.fixture(autouse=True)
def no_oracle(monkeypatch):
    """No law asks the oracle: here it is out of order."""

    def refuse(*args, **kwargs):
        raise AssertionError("a law asked the oracle")

    monkeypatch.setattr(conjcheck.testing.compare, "row_terms", refuse)


def broken_on(rule, rows, choices=range(12)):
    """The names of all laws that a rule breaks on some rows."""
    comparer = Comparer(rule)
    with comparer.limit:
        return {broken.law for row in rows for choice in choices for broken in broken_laws(comparer, row, choice)}


def of(values):
    """A class of Fl(4) by its one-line notation."""
    return X.schubert(permutation=values)


def dual(w):
    """The Poincare dual: every value x becomes 5 - x."""
    return of(tuple(N + 1 - x for x in w.permutation))


def lowered(w):
    """The generator of the Seidel group: every value goes down by 1, modulo 4."""
    return of(tuple((x - 2) % N + 1 for x in w.permutation))


def shift(w):
    """The exponent of q in the product of the Seidel class with w, a single term."""
    (((image, d), one),) = truth(X)[lowered(X.identity), w].items()
    assert (image, one) == (lowered(w), 1)
    return d


def swapped(case):
    """Commutativity."""
    u, v, w, d = case
    return v, u, w, d


def turned(case):
    """S3: v and the dual of w change places."""
    u, v, w, d = case
    return u, dual(w), dual(v), d


def seidel(case):
    """The generator of the Seidel group, acting on u."""
    u, v, w, d = case
    return lowered(u), v, lowered(w), tuple(a + b - c for a, b, c in zip(d, shift(w), shift(u), strict=True))


def mirrored(case):
    """The diagram automorphism: places and values turned round, degrees reversed."""
    u, v, w, d = case
    return *(of(tuple(N + 1 - x for x in reversed(a.permutation))) for a in (u, v, w)), d[::-1]


SYMMETRIES = {"commutativity": swapped, "S3-symmetry": turned, "Seidel symmetry": seidel, "diagram symmetry": mirrored}


def orbit(case, laws):
    """The orbit under some symmetries; ``None`` if it leaves the degrees of 0 or more."""
    todo, seen = [case], {case}
    while todo:
        here = todo.pop()
        fresh = {SYMMETRIES[law](here) for law in laws} - seen
        if any(min(d) < 0 for *_, d in fresh):
            return None
        seen |= fresh
        todo += fresh
    return seen


def touches_unit(case):
    """Whether the unit law speaks about a case."""
    return X.identity in case[:2]


def touches_duality(case):
    """Whether Poincare duality speaks about a case."""
    u, v, w, d = case
    return u.length + v.length == X.dim and w is X.point and not any(d)


def one_more(cases, **choices):
    """The true constants of Fl(4), one more at some cases."""
    return rule_by_rows([(X, *case) for case in cases], on=(X,), **choices)


def always(X, u, v):
    """A premise that holds: with any premise, associativity is not tried."""
    return True


def no_unit(X, u, v):
    """A premise that leaves the unit out; its constants and those of duality are the same by S3."""
    return X.identity not in (u, v)


def no_duality(X, u, v):
    """A premise that leaves out what duality speaks about."""
    return u.length + v.length != X.dim


def breakers(law):
    """For one law: sets of cases that are closed under all symmetries but that one, and the premise that switches other laws off."""
    others = [other for other in SYMMETRIES if other != law]
    for case in cases_of(X):
        cases = orbit(case[1:], others)
        if cases is None:
            continue
        unit, duality = any(map(touches_unit, cases)), any(map(touches_duality, cases))
        if law == "unit" and unit:
            yield cases, no_duality
        elif law == "Poincare duality" and any(touches_duality(c) and not touches_unit(c) for c in cases):
            yield cases, no_unit
        elif law == "associativity" and not unit and not duality:
            yield cases, None
        elif law in SYMMETRIES and not unit and not duality and {SYMMETRIES[law](case) for case in cases} - cases:
            yield cases, always


@pytest.mark.parametrize("law", [law for law in LAWS if law not in ("one answer", "positivity")])
def test_breaks_exactly_one(law):
    """A rule made against one law breaks that one and no other, around the rows where it is wrong and around others."""
    cases, premise = next(breakers(law))
    near = {Row(X, u, v) for u, v, _, _ in cases}
    near = sorted(row for row in near if premise is None or premise(X, row.u, row.v))[:40]
    rows = [Row(X, u, v) for u in X.classes for v in X.classes if premise is None or premise(X, u, v)]
    rule = one_more(cases, premise=premise)
    assert broken_on(rule, near, range(24)) == {law}
    assert broken_on(rule, random.Random(law).sample(rows, 40), range(4)) <= {law}


def test_one_answer():
    """A rule that answers otherwise when it is asked twice in succession breaks "one answer", and in this row nothing else."""
    table, last = truth(X), []

    @candidate(on=Varieties(X), premise=always)
    def rule(X, u, v):
        again = last == [(u, v)]
        last[:] = [(u, v)]
        return {} if again else table[u, v]

    assert broken_on(rule, [Row(X, X.classes[1], X.classes[5])], [1]) == {"one answer"}


def test_positivity():
    """In the equivariant ring a negative coefficient, or a polynomial of the wrong degree, breaks positivity and no other law."""
    P = Gr(1, 3)
    a, b = simple_roots(P)
    table = {
        (u, v): {w: equivariant_constant(Case(P, u, v, w, (0,))) for w in P.classes if w.length <= u.length + v.length}
        for u in P.classes
        for v in P.classes
    }
    assert table[P.point, P.point] == {P.identity: 0, P.classes[1]: 0, P.point: b * (a + b)}
    rows = [Row(P, u, v) for u in P.classes for v in P.classes]
    for wrong, expected in ((b * b - a * b, {"positivity"}), (a * b + b, {"positivity"}), (a * b + 2 * b * b, set())):
        changed = table | {(P.point, P.point): {P.point: wrong}}

        @candidate(on=Varieties(P), ring="equivariant")
        def rule(X, u, v):
            return changed[u, v]  # noqa: B023  # called inside this turn of the loop

        assert broken_on(rule, rows, [0]) == expected


def test_the_symmetries_here_are_symmetries():
    """The four symmetries of this file keep every nonzero constant of Fl(4), and so also the zeros: they are one-to-one."""
    for (u, v), terms in truth(X).items():
        for (w, d), count in terms.items():
            for law, image in SYMMETRIES.items():
                a, b, c, e = image((u, v, w, d))
                assert truth(X)[a, b].get((c, e)) == count, law


def test_names_and_places():
    """A broken law names both values, both cases, and rows on one of which the rule is wrong."""
    u, v = of((1, 3, 2, 4)), of((1, 2, 4, 3))
    assert truth(X)[u, v] == {(of((1, 3, 4, 2)), (0, 0, 0)): 1, (of((1, 4, 2, 3)), (0, 0, 0)): 1}
    comparer = Comparer(one_more([(u, v, X.identity, (0, 1, 0))]))
    with comparer.limit:
        first = next(broken_laws(comparer, Row(X, u, v)))
    assert first.law == "commutativity"
    assert first.detail == "1 at Fl(4): [1324] * [1243] -> [1234], q^(0,1,0), but 0 at Fl(4): [1243] * [1324] -> [1234], q^(0,1,0)"
    assert first.rows == (Row(X, u, v), Row(X, v, u))


def test_a_power_of_q_below_zero():
    """A value whose Seidel image would have a negative power of q breaks the Seidel symmetry by itself."""
    case = next(
        case[1:]
        for case in cases_of(X)
        if min(seidel(case[1:])[3]) < 0
        and not (cases := orbit(case[1:], ["commutativity", "S3-symmetry", "diagram symmetry"])) & set(filter(touches_unit, cases))
        and not any(map(touches_duality, cases))
    )
    cases = orbit(case, ["commutativity", "S3-symmetry", "diagram symmetry"])
    comparer = Comparer(one_more(cases, premise=always))
    with comparer.limit:
        found = [broken for u, v, _, _ in cases for choice in range(3) for broken in broken_laws(comparer, Row(X, u, v), choice)]
    assert {broken.law for broken in found} == {"Seidel symmetry"}
    assert any("where a Seidel element would make a power of q negative" in broken.detail for broken in found)


@pytest.mark.parametrize("space", [Gr(1, 3), Gr(2, 4), Fl(3), Fl(1, 2, n=4)], ids=str)
@pytest.mark.parametrize("kind", [rule_by_rows, rule_by_cases])
def test_true_tables_break_none(space, kind):
    """The true constants break no law, in whichever way they are asked."""
    family = (space, Gr(2, 3), Fl(2, 3, n=4))
    rows = [Row(space, u, v) for u in space.classes for v in space.classes]
    assert broken_on(kind(on=family), random.Random(1).sample(rows, min(len(rows), 36)), range(3)) == set()


def test_associativity_of_a_true_table():
    """On all triples of Fl(3) associativity holds for the true table (and is tried: another test breaks it)."""
    rows = [Row(Fl(3), u, v) for u in Fl(3).classes for v in Fl(3).classes]
    assert broken_on(rule_by_rows(on=(Fl(3),)), rows, range(6)) == set()


def test_a_wrong_rule_that_obeys_every_law():
    """Laws cannot replace the oracle: on Fl(3), the products of two classes that are not Seidel classes, doubled, obey them all.

    The ring is a quadratic extension of the ring that the Seidel classes span, and any quadratic equation would do.
    """
    seidel_classes = {Fl(3).schubert(permutation=w) for w in ((1, 2, 3), (2, 3, 1), (3, 1, 2))}
    table = {
        (u, v): {key: 2 * n if not {u, v} & seidel_classes else n for key, n in terms.items()}
        for (u, v), terms in truth(Fl(3)).items()
    }

    @candidate(on=Varieties("Fl(3)"))
    def doubled(X, u, v):
        return table[u, v]

    assert broken_on(doubled, [Row(Fl(3), u, v) for u in Fl(3).classes for v in Fl(3).classes], range(6)) == set()


def test_true_plugins_break_none():
    """No candidate of the folder of conjectures breaks a law where it is right: on every variety it speaks about with n <= 4."""
    tried = 0
    sys.path.insert(0, str(PLUGINS))
    try:
        for path in sorted(PLUGINS.glob("[!_]*.py")):
            module = importlib.import_module(path.stem)
            for value in vars(module).values():
                if getattr(value, "role", None) == "candidate" and value.rule.__module__ == path.stem:
                    rows = [Row(Y, u, v) for Y in value.on.up_to(4) for u in Y.classes for v in Y.classes]
                    inside = [
                        row
                        for row in rows
                        if value.premise is None or not value.premise_by_rows or value.premise(row.X, row.u, row.v)
                    ]
                    chosen = random.Random(path.stem).sample(inside, min(len(inside), 60))
                    assert broken_on(value, chosen, [0, 5]) == set(), value
                    tried += 1
    finally:
        sys.path.remove(str(PLUGINS))
    assert tried >= 10


def test_a_rule_without_values():
    """A rule that fails on a row that takes part is reported with that row, the row itself or a relative."""
    table = truth(X)
    u, v = of((1, 2, 4, 3)), of((1, 3, 4, 2))

    @candidate(on=Varieties(X))
    def rule(X, u, v):
        if u.length > 1:
            raise OutsideDomain("long")
        return table[u, v]

    comparer = Comparer(rule)
    for row in (Row(X, u, v), Row(X, v, u)):
        with comparer.limit, pytest.raises(NoValue) as caught:
            list(broken_laws(comparer, row))
        assert caught.value.row == Row(X, v, u)


@pytest.mark.parametrize("by_row", [True, False], ids=["premise on rows", "premise on cases"])
def test_never_asked_outside_the_premise(by_row):
    """Laws ask the rule inside its premise and family only: it may be undefined elsewhere."""
    spaces = (Fl(3), Gr(1, 4))
    table = {Y: truth(Y) for Y in spaces}

    def on_rows(X, u, v):
        return u.length != 2

    def on_cases(X, u, v, w, d):
        return u.length != 2

    @candidate(on=Varieties(*spaces), premise=on_rows if by_row else on_cases)
    def rule(X, u, v, w, d):
        assert u.length != 2
        return table[X][u, v].get((w, d), 0)

    for Y in spaces:
        inside = [Row(Y, u, v) for u in Y.classes for v in Y.classes if u.length != 2]
        assert broken_on(rule, inside) == set()


def test_laws_inside_a_premise():
    """Where a premise on cases leaves a case out, a difference there breaks nothing; inside it does."""
    for premise, expected in (
        (lambda X, u, v, w, d: w is not X.point, set()),
        (lambda X, u, v, w, d: True, {"commutativity"}),
    ):
        rule = one_more([(of((1, 2, 4, 3)), of((2, 4, 3, 1)), X.point, (0, 0, 0))], premise=premise)
        assert broken_on(rule, [Row(X, of((2, 4, 3, 1)), of((1, 2, 4, 3)))], [0]) == expected


PREMISES = {
    "classical part": lambda X, u, v, w, d: not any(d),
    "quantum part": lambda X, u, v, w, d: any(d),
    "degree": lambda X, u, v, w, d: sum(d) <= 1,
    "first q only": lambda X, u, v, w, d: not any(d[1:]),
    "length": lambda X, u, v, w, d: w.length <= 2,
    "long": lambda X, u, v, w, d: w.length > 2,
    "u alone": lambda X, u, v, w, d: u.length <= 2,
    "descents": lambda X, u, v, w, d: 1 in w.descents,
    "index": lambda X, u, v, w, d: (u.index + 2 * v.index + 3 * w.index) % 4 == 1,
}


@pytest.mark.parametrize("by_row", [True, False], ids=["by rows", "by cases"])
@pytest.mark.parametrize("name", PREMISES)
def test_a_right_rule_inside_a_premise_on_cases(name, by_row):
    """A premise on cases that no symmetry respects never makes a right rule break a law, although it gives nothing outside."""
    spaces = (Gr(1, 2), Gr(2, 4), Fl(3), Fl(1, 3, n=4), X)
    table, inside = {Y: truth(Y) for Y in spaces}, PREMISES[name]

    def by_cases(X, u, v, w, d):
        return table[X][u, v].get((w, d), 0) if inside(X, u, v, w, d) else 0

    def by_rows(X, u, v):
        return {(w, d): n for (w, d), n in table[X][u, v].items() if inside(X, u, v, w, d)}

    rule = candidate(on=Varieties(*spaces), premise=inside)(by_rows if by_row else by_cases)
    for Y in spaces:
        rows = [Row(Y, u, v) for u in Y.classes for v in Y.classes]
        assert broken_on(rule, rows if len(rows) < 200 else random.Random(3).sample(rows, 60), range(6)) == set()


def test_large_rows_are_left_alone():
    """A row with more than 3,000 outcomes is not tried at all."""

    @candidate(on=Varieties("Fl(5)"))
    def rule(X, u, v):
        raise AssertionError("called")

    assert broken_on(rule, [Row(Fl(5), Fl(5).point, Fl(5).point)], [0]) == set()


def test_every_law_is_tried():
    """The laws that the tests of this file break are all the laws there are."""
    assert set(LAWS) == {"one answer", "unit", "positivity", "Poincare duality", "associativity", *SYMMETRIES}
    assert len(SMALL) == 11
